/** The bakes of a segment, found in the states that people set. Pure. */
import type { SegmentState } from './segment-states.ts'

interface Span {
  state: SegmentState
  since: Date
  endedAt: Date | null
  reason: string
}

export interface FoundBake {
  /** Null when nobody set the state of preparation before it. */
  prepFrom: Date | null
  heatingFrom: Date
  soakFrom: Date | null
  /** Heating off. */
  coolingFrom: Date | null
  /** No longer cooling. */
  coldFrom: Date | null
  phase: 'heating' | 'soak' | 'cooling' | 'over'
  /** Why the heating went off, in the words of whoever set the state; empty while it is on. */
  offReason: string
}

const HEATED: readonly SegmentState[] = ['heating', 'soak', 'cooling']

/**
 * Bakes, newest first. One begins where heating does and ends with the state after its cooling; heating again without
 * another state between belongs to the same bake.
 *
 * @param states of one segment, in any order
 */
export function bakesIn(states: readonly Span[]): FoundBake[] {
  const ordered = [...states].sort((a, b) => a.since.getTime() - b.since.getTime())
  const found: FoundBake[] = []
  let open: FoundBake | null = null
  for (const [index, span] of ordered.entries()) {
    if (!HEATED.includes(span.state)) {
      if (open !== null) {
        open.coldFrom = span.since
        open.phase = 'over'
        open = null
      }
      continue
    }
    const before = ordered[index - 1]
    if (open === null) {
      open = {
        prepFrom: before?.state === 'bake-prep' ? before.since : null,
        heatingFrom: span.since,
        soakFrom: null,
        coolingFrom: null,
        coldFrom: null,
        phase: 'heating',
        offReason: '',
      }
      found.push(open)
    }
    if (span.state === 'cooling') {
      open.phase = 'cooling'
      open.coolingFrom = span.since
      open.offReason = span.reason
    } else {
      open.phase = span.state === 'soak' ? 'soak' : 'heating'
      open.coolingFrom = null
      open.offReason = ''
      if (span.state === 'soak') open.soakFrom ??= span.since
    }
  }
  return found.reverse()
}
