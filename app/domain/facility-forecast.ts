/**
 * When will the facility be available? Each segment has a way still to go through its states; how long a state lasts is
 * taken from how long it has lasted here before, shortest to longest. Pure.
 */

import type { Verdict } from './segment-standing.ts'
import { SEGMENT_STATES, type SegmentState } from './segment-states.ts'

const HOUR_MS = 3_600_000
/** A soak shorter than this share of the usual one was broken off. */
const WHOLE_SOAK = 0.9

/** States still to come after the present one, on the usual way back into service; null where nobody can say. */
const WAY: Record<SegmentState, readonly SegmentState[] | null> = {
  'not-assembled': null,
  vented: ['roughing', 'pumping', 'bake-prep', 'heating', 'soak', 'cooling', 'post-bake-test'],
  roughing: ['pumping', 'bake-prep', 'heating', 'soak', 'cooling', 'post-bake-test'],
  pumping: ['bake-prep', 'heating', 'soak', 'cooling', 'post-bake-test'],
  'isolated-test': [],
  'leak-hunt': [],
  'in-service': [],
  'bake-prep': ['heating', 'soak', 'cooling', 'post-bake-test'],
  heating: ['soak', 'cooling', 'post-bake-test'],
  soak: ['cooling', 'post-bake-test'],
  cooling: ['post-bake-test'],
  'post-bake-test': [],
  maintenance: null,
  unknown: null,
}

export interface StateSpan {
  state: SegmentState
  since: Date
  endedAt: Date | null
}

/** Shortest and longest of what was seen, h. */
export interface Duration {
  low: number
  high: number
  count: number
}
export type Durations = Partial<Record<SegmentState, Duration>>

/**
 * How long each state has lasted on the usual way. Broken-off bakes do not count, nor does pumping that led to no bake.
 *
 * @param segments states of each segment, in any order
 * @param soakHours the usual soak
 */
export function durationsOf(segments: readonly (readonly StateSpan[])[], soakHours: number): Durations {
  const found: Durations = {}
  for (const spans of segments) {
    const ordered = spans.toSorted((a, b) => a.since.getTime() - b.since.getTime())
    for (const [index, { state, since, endedAt }] of ordered.entries()) {
      if (endedAt === null) continue
      const hours = (endedAt.getTime() - since.getTime()) / HOUR_MS
      const next = ordered[index + 1]?.state
      if (state === 'heating' && next !== 'soak') continue
      if (state === 'soak' && hours < WHOLE_SOAK * soakHours) continue
      if (state === 'pumping' && next !== 'bake-prep') continue
      const before = found[state] ?? { low: Infinity, high: 0, count: 0 }
      found[state] = {
        low: Math.min(before.low, hours),
        high: Math.max(before.high, hours),
        count: before.count + 1,
      }
    }
  }
  return found
}

export interface SegmentOutlook {
  tag: string
  state: SegmentState
  /** Hours until it is back in service, shortest and longest; null where that cannot be told. */
  hours: { low: number; high: number } | null
  /** In words: what is still to be done, or why it cannot be told. */
  words: string
}

/** What a segment still has before it. */
export function outlookOf(
  segment: { tag: string; state: SegmentState; since: Date | null; verdict: Verdict },
  durations: Durations,
  now: Date,
): SegmentOutlook {
  const { tag, state, since, verdict } = segment
  const cannot = (words: string): SegmentOutlook => ({ tag, state, hours: null, words })
  if (state === 'in-service') {
    if (verdict === 'over-limit') return cannot('in service above the operating limit; it needs work first')
    const words = verdict === 'unknown' ? 'in service, counts once its readings are back' : 'in service'
    return { tag, state, hours: { low: 0, high: 0 }, words }
  }
  const way = WAY[state]
  if (way === null) return cannot(`"${SEGMENT_STATES[state].label}": nobody can say how long that lasts`)
  const lengths = [state, ...way].map((each) => ({ state: each, lasts: durations[each] }))
  const missing = lengths.find(({ lasts }) => lasts === undefined)
  if (missing !== undefined)
    return cannot(
      `"${SEGMENT_STATES[missing.state].label}" has not been seen through here yet; no telling how long it lasts`,
    )
  const gone = since === null ? 0 : (now.getTime() - since.getTime()) / HOUR_MS
  let low = 0
  let high = 0
  for (const [index, { lasts }] of lengths.entries()) {
    if (lasts === undefined) continue
    // Once it has lasted longer than ever before, the past says only that it may last as long again.
    const overdue = index === 0 && gone > lasts.high
    const left = index === 0 && !overdue ? gone : 0
    low += overdue ? 0 : Math.max(0, lasts.low - left)
    high += Math.max(0, lasts.high - left)
  }
  const still = way.map((each) => SEGMENT_STATES[each].label.toLowerCase())
  const words =
    still.length === 0
      ? `"${SEGMENT_STATES[state].label}" to be finished`
      : `"${SEGMENT_STATES[state].label}" to be finished, then ${still.join(', ')}`
  return { tag, state, hours: { low, high }, words }
}

export interface FacilityOutlook {
  /** Hours until all segments are back; null where one cannot be told. */
  hours: { low: number; high: number } | null
  /** The segment that takes longest. */
  slowest: SegmentOutlook | null
  /** Segments that cannot be told. */
  open: SegmentOutlook[]
}

/** The whole: as slow as its slowest segment. */
export function facilityOutlook(segments: readonly SegmentOutlook[]): FacilityOutlook {
  const told = segments.filter((one) => one.hours !== null)
  const slowest = told.toSorted((a, b) => (b.hours?.high ?? 0) - (a.hours?.high ?? 0))[0] ?? null
  const open = segments.filter(({ hours }) => hours === null)
  return {
    slowest,
    open,
    hours:
      open.length > 0 || slowest?.hours == null
        ? null
        : { low: Math.max(...told.map(({ hours }) => hours?.low ?? 0)), high: slowest.hours.high },
  }
}

/** Weeks until a rising pressure reaches a limit if it goes on as it does; null when it does not rise, or is over it. */
export function weeksToLimit(paNow: number, perWeek: number, limitPa: number): number | null {
  if (perWeek <= 0 || paNow >= limitPa) return null
  return Math.log(limitPa / paNow) / Math.log1p(perWeek)
}
