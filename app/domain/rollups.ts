/** Rollups: figures of a channel over fixed stretches of UTC, so that a year is read as fast as a day. */

/** Lengths in seconds, each a multiple of the one before. */
export const ROLLUP_LEVELS = [600, 7_200, 28_800, 86_400] as const

export interface Span {
  /** Milliseconds UTC, included. */
  fromMs: number
  /** Not included. */
  toMs: number
}

/** The longest level that bins of this length, counted from this instant, are made of; null when there is none. */
export function levelFor(fromMs: number, binSeconds: number): number | null {
  const fits = ROLLUP_LEVELS.filter((level) => binSeconds % level === 0 && fromMs % (level * 1000) === 0)
  return fits.at(-1) ?? null
}

/** Start of the bucket of a length that holds an instant, ms. */
export function bucketStart(ms: number, levelSeconds: number): number {
  const length = levelSeconds * 1000
  return Math.floor(ms / length) * length
}

/** Stretches widened to whole buckets; those that overlap or touch become one. Ends of the input are included. */
export function wholeBuckets(
  stretches: readonly { fromMs: number; lastMs: number }[],
  levelSeconds: number,
): Span[] {
  const widened = stretches
    .map(({ fromMs, lastMs }) => ({
      fromMs: bucketStart(fromMs, levelSeconds),
      toMs: bucketStart(lastMs, levelSeconds) + levelSeconds * 1000,
    }))
    .sort((a, b) => a.fromMs - b.fromMs)
  const joined: Span[] = []
  for (const span of widened) {
    const last = joined.at(-1)
    if (last !== undefined && span.fromMs <= last.toMs) last.toMs = Math.max(last.toMs, span.toMs)
    else joined.push(span)
  }
  return joined
}
