/** Series as the conditions walk through them: in order, and each reading for what it is worth. */
import { QUALITIES, QUALITY_LABELS, UNTIMED_MARKS, USABLE_QUALITIES } from '../readings.ts'
import type { Series } from './facts.ts'
import { BACK, BETWEEN, BEYOND, UNKNOWN, type Zone } from './latch.ts'

/** What a reading is worth: nothing, a measured value, "at least", "at most". */
const NOTHING = 0
const MEASURED = 1
const AT_LEAST = 2
const AT_MOST = 3

const WORTH = Uint8Array.from(QUALITIES, (quality) =>
  USABLE_QUALITIES.includes(quality)
    ? MEASURED
    : quality === 'over-range'
      ? AT_LEAST
      : quality === 'under-range'
        ? AT_MOST
        : NOTHING,
)

/** Readings either side of a hole as long as this still count as one piece (our own rule). */
const LEAST_BRIDGE_MS = 30 * 60_000

/** Longest distance between two readings that belong together, ms. */
export function bridgeMs(series: Pick<Series, 'periodS'>): number {
  return Math.max(3000 * series.periodS, LEAST_BRIDGE_MS)
}

function worth(series: Series, i: number): number {
  return ((series.marks[i] as number) & UNTIMED_MARKS) !== 0
    ? NOTHING
    : (WORTH[series.quality[i] as number] ?? NOTHING)
}

/** Measured value; NaN for anything that is none. */
export function measured(series: Series, i: number): number {
  return worth(series, i) === MEASURED ? (series.value[i] as number) : Number.NaN
}

/** What a reading names, whatever it is worth as a measurement: the value, or the bound beside a word. */
export function named(series: Series, i: number): number {
  if (worth(series, i) === MEASURED || series.bound === null) return series.value[i] as number
  const bound = series.bound[i] as number
  return !Number.isNaN(bound) ? bound : (series.value[i] as number)
}

/**
 * Where a reading stands against a limit from above. "Over" a bound beyond the limit is beyond it; "under" a bound is
 * back where even the bound is; every other one says nothing. Exactly at a limit is not yet beyond, nor back.
 */
export function zoneAbove(series: Series, i: number, limit: number, back: number): Zone {
  const how = worth(series, i)
  if (how === NOTHING || Number.isNaN(limit)) return UNKNOWN
  const value = named(series, i)
  if (Number.isNaN(value)) return UNKNOWN
  if (how === AT_LEAST) return value >= limit ? BEYOND : UNKNOWN
  if (how === AT_MOST) return value <= back ? BACK : UNKNOWN
  return value > limit ? BEYOND : value < back ? BACK : BETWEEN
}

/** As zoneAbove, for a limit that is not to be fallen below. */
export function zoneBelow(series: Series, i: number, limit: number, back: number): Zone {
  const how = worth(series, i)
  if (how === NOTHING || Number.isNaN(limit)) return UNKNOWN
  const value = named(series, i)
  if (Number.isNaN(value)) return UNKNOWN
  if (how === AT_MOST) return value <= limit ? BEYOND : UNKNOWN
  if (how === AT_LEAST) return value >= back ? BACK : UNKNOWN
  return value < limit ? BEYOND : value > back ? BACK : BETWEEN
}

/** First index at or after an instant, in a series that is in order. */
export function firstAt(at: ArrayLike<number>, ms: number): number {
  let low = 0
  let high = at.length
  while (low < high) {
    const middle = (low + high) >> 1
    if ((at[middle] as number) < ms) low = middle + 1
    else high = middle
  }
  return low
}

/** The same readings by their instants, however they came. */
export function inOrder(series: Series): Series {
  const { at } = series
  let ordered = true
  for (let i = 1; ordered && i < at.length; i += 1) ordered = (at[i] as number) >= (at[i - 1] as number)
  if (ordered) return series
  const order = Array.from({ length: at.length }, (_, i) => i).sort(
    (a, b) => (at[a] as number) - (at[b] as number) || a - b,
  )
  const pick = (values: ArrayLike<number>) => Float64Array.from(order, (i) => values[i] as number)
  return {
    ...series,
    at: pick(at),
    value: pick(series.value),
    quality: pick(series.quality),
    marks: pick(series.marks),
    bound: series.bound === null ? null : Float64Array.from(order, (i) => series.bound?.[i] ?? Number.NaN),
  }
}

/** In words why a series says nothing at the end of a stretch. */
export function silenceText(series: Series, knownMs: number | null, fromMs: number, untilMs: number): string {
  const last = firstAt(series.at, untilMs) - 1
  const since = knownMs === null ? '' : ` since ${utcText(knownMs)}`
  if (last < 0 || (series.at[last] as number) < fromMs) return `${series.tag}: no reading${since}.`
  if (((series.marks[last] as number) & UNTIMED_MARKS) !== 0) {
    return `${series.tag}: no good reading${since}; the times of the newest are not certain.`
  }
  const quality = QUALITIES[series.quality[last] as number]
  const word = quality === undefined ? 'unknown' : QUALITY_LABELS[quality]
  return `${series.tag}: no good reading${since}; the newest says “${word}”.`
}

/** An instant as `2026-11-09 07:10 UTC`. */
export function utcText(ms: number): string {
  return `${new Date(ms).toISOString().slice(0, 16).replace('T', ' ')} UTC`
}

/** A figure with its unit in plain letters, short enough for the subject of a mail. */
export function figureText(value: number, unit: string): string {
  const size = Math.abs(value)
  const text =
    size !== 0 && (size < 1e-3 || size >= 1e5)
      ? value.toExponential(1)
      : size < 10
        ? String(Number(value.toPrecision(2)))
        : String(Number(value.toFixed(size < 1000 && unit !== '°C' ? 1 : 0)))
  return unit === '' ? text : `${text} ${unit}`
}
