/** Log pressure of gauges in equal bins, as the comparison of channels with neighbouring segments needs it. Pure. */
import { median } from '../physics/statistics.ts'

/** One gauge: natural log of Pa in equal bins, NaN where there is nothing to go by. */
export interface GaugeSeries {
  tag: string
  ln: readonly number[]
}

/** A bin as the database gives it. */
export interface PressureBin {
  atMs: number
  /** Geometric mean of the usable readings, Pa. */
  mean: number
  count: number
}

/** Of the readings a full bin has, the share that must be usable. */
const LEAST_USABLE = 0.5

/**
 * Bins of a gauge on a common grid. A bin in which most readings said "over range", "off" or the like is left out
 * whole: the mean of the few that remain stands for the edge of the gauge's range, not for the gas.
 *
 * @param fullCounts readings that a full bin of the source has, by bin
 */
export function lnSeries(
  bins: readonly PressureBin[],
  grid: { fromMs: number; binMs: number; length: number },
  fullCounts: readonly number[],
): number[] {
  const ln = new Array<number>(grid.length).fill(Number.NaN)
  for (const { atMs, mean, count } of bins) {
    const index = Math.floor((atMs - grid.fromMs) / grid.binMs)
    const full = fullCounts[index]
    if (full === undefined || !(mean > 0) || count < LEAST_USABLE * full) continue
    ln[index] = Math.log(mean)
  }
  return ln
}

/** Readings of the fullest channel in each bin: what a bin without gaps holds. */
export function fullCountsOf(
  bins: readonly PressureBin[],
  grid: { fromMs: number; binMs: number; length: number },
): number[] {
  const counts = new Array<number>(grid.length).fill(0)
  for (const { atMs, count } of bins) {
    const index = Math.floor((atMs - grid.fromMs) / grid.binMs)
    if (index >= 0 && index < grid.length) counts[index] = Math.max(counts[index] as number, count)
  }
  return counts
}

/**
 * What the gauges of a segment say together: their mean log after each was brought to the level of the one with most
 * data. So a gauge that is off for a while makes no step.
 */
export function together(gauges: readonly GaugeSeries[]): number[] {
  const known = (gauge: GaugeSeries) => gauge.ln.filter(Number.isFinite).length
  const [main, ...others] = [...gauges].sort((a, b) => known(b) - known(a))
  if (main === undefined) return []
  const levelled = [main.ln, ...others.flatMap((other) => levelledTo(main.ln, other.ln))]
  return main.ln.map((_, index) => {
    const said = levelled.map((ln) => ln[index] as number).filter(Number.isFinite)
    return said.length === 0 ? Number.NaN : said.reduce((sum, one) => sum + one, 0) / said.length
  })
}

/** The other series at the level of the main one; nothing when the two never speak at once. */
function levelledTo(main: readonly number[], other: readonly number[]): number[][] {
  const apart = other.map((one, index) => one - (main[index] as number)).filter(Number.isFinite)
  if (apart.length === 0) return []
  const level = median(apart)
  return [other.map((one) => one - level)]
}

/** Pearson's coefficient over the bins that both have; NaN when fewer than three, or when one does not move. */
export function correlation(a: readonly number[], b: readonly number[]): number {
  const both = a
    .map((one, index) => [one, b[index] as number] as const)
    .filter(([x, y]) => Number.isFinite(x) && Number.isFinite(y))
  if (both.length < 3) return Number.NaN
  const mean = (pick: 0 | 1) => both.reduce((sum, pair) => sum + pair[pick], 0) / both.length
  const [meanA, meanB] = [mean(0), mean(1)]
  let [ab, aa, bb] = [0, 0, 0]
  for (const [x, y] of both) {
    ab += (x - meanA) * (y - meanB)
    aa += (x - meanA) ** 2
    bb += (y - meanB) ** 2
  }
  return ab / Math.sqrt(aa * bb)
}

/** Mean over bins [from, to) that have something; NaN when fewer than `least` do. */
export function meanOver(ln: readonly number[], from: number, to: number, least: number): number {
  const said = ln.slice(Math.max(0, from), Math.max(0, to)).filter(Number.isFinite)
  return said.length < least ? Number.NaN : said.reduce((sum, one) => sum + one, 0) / said.length
}
