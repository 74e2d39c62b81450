/**
 * How far a source's clock went wrong over a stretch, and what that makes of its times. A correction is a layer over the
 * readings: the times as a file has them stay stored, and a correction that is taken away gives them back exactly.
 *
 * All times are milliseconds UTC. "Own" times are by the source's clock as stored, "true" ones are corrected.
 */
import { DomainError } from './errors.ts'

/** From `startsMs` (included) to `endsMs` (not included) by the source's own clock, straight between the two ends. */
export interface ClockCorrection {
  startsMs: number
  endsMs: number
  /** True time minus the source's own, at the start. */
  startOffsetMs: number
  /** The same at the end. */
  endOffsetMs: number
}

/** A stretch of own time, end not included, with what is to be laid over it; null where the clock is taken as right. */
export interface OwnStretch {
  fromMs: number
  toMs: number
  correction: ClockCorrection | null
}

/** Beyond this, a clock does not drift but jumps or runs at a wrong rate: 1 % is 14 minutes a day (our own limit). */
const MOST_DRIFT = 0.01
/** Farther off than this is a wrong date or a wrong zone, which the reading of the file has to settle (our own limit). */
export const MOST_OFFSET_MS = 86_400_000

/**
 * True time of a reading under one correction, in whole milliseconds. The database computes the same in SQL, with the
 * same order of operations on doubles, so that both round alike.
 */
export function withOffset(ownMs: number, correction: ClockCorrection | null): number {
  if (correction === null) return ownMs
  const { startsMs, endsMs, startOffsetMs, endOffsetMs } = correction
  const part = ((ownMs - startsMs) * (endOffsetMs - startOffsetMs)) / (endsMs - startsMs)
  return ownMs + startOffsetMs + Math.floor(part + 0.5)
}

/** True time of a reading by the corrections of its source. */
export function trueTime(ownMs: number, corrections: readonly ClockCorrection[]): number {
  return withOffset(
    ownMs,
    corrections.find(({ startsMs, endsMs }) => startsMs <= ownMs && ownMs < endsMs) ?? null,
  )
}

/**
 * The stretches of own time whose readings truly lie in [from, to), in order of own time. There may be several, and
 * they may overlap in true time where a clock was set.
 */
export function ownStretches(
  corrections: readonly ClockCorrection[],
  fromMs: number,
  toMs: number,
): OwnStretch[] {
  const found: OwnStretch[] = []
  for (const piece of pieces(corrections)) {
    const first = firstAtOrAfter(piece, fromMs)
    const end = firstAtOrAfter(piece, toMs)
    if (first < end) found.push({ fromMs: first, toMs: end, correction: piece.correction })
  }
  return found
}

/** All of time cut at the ends of the corrections. */
function pieces(corrections: readonly ClockCorrection[]): OwnStretch[] {
  const all: OwnStretch[] = []
  let fromMs = Number.NEGATIVE_INFINITY
  for (const correction of corrections.toSorted((a, b) => a.startsMs - b.startsMs)) {
    if (fromMs < correction.startsMs) all.push({ fromMs, toMs: correction.startsMs, correction: null })
    all.push({ fromMs: correction.startsMs, toMs: correction.endsMs, correction })
    fromMs = correction.endsMs
  }
  all.push({ fromMs, toMs: Number.POSITIVE_INFINITY, correction: null })
  return all
}

/** First own time of a piece whose true time is not before an instant; its end when there is none. */
function firstAtOrAfter({ fromMs, toMs, correction }: OwnStretch, trueMs: number): number {
  if (correction === null) return Math.min(Math.max(trueMs, fromMs), toMs)
  // True time never falls inside a piece (a drift is below 1 %), so halving finds the very millisecond.
  let [low, high] = [fromMs, toMs]
  while (low < high) {
    const middle = Math.floor((low + high) / 2)
    if (withOffset(middle, correction) >= trueMs) high = middle
    else low = middle + 1
  }
  return low
}

/**
 * A stretch of own time, both ends included, widened so that it also holds the true times of its readings: what may
 * change when the readings do.
 */
export function widened(
  corrections: readonly ClockCorrection[],
  fromMs: number,
  lastMs: number,
): { fromMs: number; lastMs: number } {
  let [first, last] = [fromMs, lastMs]
  for (const piece of pieces(corrections)) {
    const [from, to] = [Math.max(fromMs, piece.fromMs), Math.min(lastMs, piece.toMs - 1)]
    if (from > to) continue
    first = Math.min(first, withOffset(from, piece.correction))
    last = Math.max(last, withOffset(to, piece.correction))
  }
  return { fromMs: first, lastMs: last }
}

/**
 * What is wrong with a correction, in words for the field it concerns; null when nothing is.
 *
 * @returns the field's name and what to do
 */
export function correctionFault(
  correction: ClockCorrection,
): { field: 'endsAt' | 'startOffset' | 'endOffset'; text: string } | null {
  const { startsMs, endsMs, startOffsetMs, endOffsetMs } = correction
  if (endsMs <= startsMs)
    return { field: 'endsAt', text: 'The end lies before the beginning. Give a later time.' }
  const tooFar = 'More than a day is a wrong date or zone and no drift. Settle it in how the files are read.'
  if (Math.abs(startOffsetMs) > MOST_OFFSET_MS) return { field: 'startOffset', text: tooFar }
  if (Math.abs(endOffsetMs) > MOST_OFFSET_MS) return { field: 'endOffset', text: tooFar }
  const drift = Math.abs(endOffsetMs - startOffsetMs) / (endsMs - startsMs)
  if (drift <= MOST_DRIFT) return null
  return {
    field: 'endOffset',
    text: `From one end to the other the clock would go wrong by ${(drift * 100).toFixed(1)} % of the time; more than ${MOST_DRIFT * 100} % is a jump and no drift. Check the times and the two offsets.`,
  }
}

/** An offset as people write it: seconds, or minutes and seconds, with a sign. `+00:02:30`, `-90`, `2.5`. In ms. */
export function readOffset(text: string): number {
  const plain = text.trim().replace('−', '-').replace(',', '.')
  const parts = /^([+-]?)(?:(?:(\d{1,2}):)?(\d{1,2}):)?(\d{1,5}(?:\.\d{1,3})?)\s*s?$/.exec(plain)
  if (parts === null)
    throw new DomainError(
      'bad-input',
      `Found “${text.trim().slice(0, 30)}”; expected seconds such as 150 or -2.5, or minutes and seconds such as +2:30.`,
    )
  const [, sign, hours, minutes, seconds] = parts
  const size = Number(hours ?? 0) * 3600 + Number(minutes ?? 0) * 60 + Number(seconds)
  return Math.round(size * 1000) * (sign === '-' ? -1 : 1)
}

/** An offset in words: by how much the clock was slow or fast. */
export function offsetWords(offsetMs: number): string {
  if (offsetMs === 0) return 'right'
  const seconds = Math.abs(offsetMs) / 1000
  const minutes = Math.floor(seconds / 60)
  const rest = Number((seconds - minutes * 60).toFixed(3))
  const size = minutes === 0 ? `${rest} s` : `${minutes} min ${rest} s`
  return `${size} ${offsetMs > 0 ? 'slow' : 'fast'}`
}
