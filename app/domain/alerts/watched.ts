/** Which parts of a window are watched, by the states of the segment with their own dates. */
import { SEGMENT_STATES, type SegmentState } from '../segment-states.ts'
import type { StateStretch } from './facts.ts'
import { utcText } from './series.ts'

export interface WatchedPiece {
  fromMs: number
  untilMs: number
  /** The state that keeps it from being watched, since when; null while it is watched. */
  by: { state: SegmentState; sinceMs: number } | null
}

/** A window in pieces that are watched and pieces that are not, in order. What no state covers is watched. */
export function watchedPieces(
  states: readonly StateStretch[],
  suppressedIn: readonly SegmentState[],
  fromMs: number,
  untilMs: number,
): WatchedPiece[] {
  if (untilMs <= fromMs) return []
  const hidden = states
    .filter(({ state }) => suppressedIn.includes(state))
    .filter((one) => one.fromMs < untilMs && (one.toMs === null || one.toMs > fromMs))
    .sort((a, b) => a.fromMs - b.fromMs)
  const pieces: WatchedPiece[] = []
  let at = fromMs
  for (const one of hidden) {
    const begins = Math.max(one.fromMs, at)
    const ends = Math.min(one.toMs ?? untilMs, untilMs)
    if (ends <= begins) continue
    if (begins > at) pieces.push({ fromMs: at, untilMs: begins, by: null })
    pieces.push({ fromMs: begins, untilMs: ends, by: { state: one.state, sinceMs: one.fromMs } })
    at = ends
  }
  if (at < untilMs) pieces.push({ fromMs: at, untilMs, by: null })
  return pieces
}

/** Why it is not watched, in a sentence. */
export function notWatchedText(by: NonNullable<WatchedPiece['by']>): string {
  return `Not watched while the segment is “${SEGMENT_STATES[by.state].label}” (since ${utcText(by.sinceMs)}).`
}
