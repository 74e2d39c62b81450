/** When an exchange of channels that is already suspected began, from finer bins around the time. Pure. */
import { median } from '../physics/statistics.ts'
import type { PairInput, Suspicion } from './crossed-channels.ts'
import { together } from './crossed-series.ts'

/** Finer bins than these on either side of the begin are needed for it to be found among them. */
const LEAST_SIDE = 6

/**
 * The instant between "as labelled" and "crossed" that leaves the least departure, in bins finer than those by which it
 * was first seen. The gauges' distances are taken from the first quarter of the fine bins, which must lie before it.
 *
 * @returns null when the bins are too few
 */
export function beginInFineBins({ x, y, fromMs, binMs }: PairInput): Suspicion['begin'] | null {
  const own1 = together(x.others)
  const own2 = together(y.others)
  const rows = x.ln.flatMap((lnX, index) => {
    const [lnY, r1, r2] = [y.ln[index], own1[index], own2[index]] as [number, number, number]
    if (![lnX, lnY, r1, r2].every(Number.isFinite)) return []
    return [{ index, u: lnX - r1, v: lnY - r2, p: lnX - r2, q: lnY - r1 }]
  })
  const before = rows.slice(0, Math.floor(rows.length / 4))
  if (before.length < LEAST_SIDE) return null
  const [a, b] = [median(before.map(({ u }) => u)), median(before.map(({ v }) => v))]
  let best = { at: before.length, sum: Number.NEGATIVE_INFINITY }
  let sum = 0
  for (let at = rows.length - 1; at >= before.length; at -= 1) {
    const { u, v, p, q } = rows[at] as (typeof rows)[number]
    sum += (u - a) ** 2 + (v - b) ** 2 - (p - b) ** 2 - (q - a) ** 2
    if (sum > best.sum) best = { at, sum }
  }
  const [last, first] = [rows[best.at - 1], rows[best.at]]
  if (last === undefined || first === undefined) return null
  return { afterMs: fromMs + last.index * binMs, byMs: fromMs + first.index * binMs }
}
