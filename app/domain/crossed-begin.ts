/** When an exchange of channels that is already suspected began, from finer bins around the time. Pure. */
import type { PairInput, Suspicion } from './crossed-channels.ts'
import { together } from './crossed-series.ts'

/** Finer bins than these on either side of the begin are needed for it to be found among them. */
const LEAST_SIDE = 6

/**
 * The instant between "as labelled" and "crossed" that leaves the least departure, in finer bins than those by which it
 * was first seen. Levels are taken from the fine bins' outer ends, which lie surely before and after.
 *
 * @returns null when the bins are too few
 */
export function beginInFineBins(input: PairInput, suspicion: Suspicion): Suspicion['begin'] | null {
  const { x, y, fromMs, binMs } = input
  const own1 = together(x.others)
  const own2 = together(y.others)
  const { a, b } = suspicion.distances
  const rows = x.ln.flatMap((lnX, index) => {
    const [lnY, r1, r2] = [y.ln[index], own1[index], own2[index]] as [number, number, number]
    if (![lnX, lnY, r1, r2].every(Number.isFinite)) return []
    // The main gauge of `together` may differ between coarse and fine bins; the sum of both distances does not tell.
    const straight = (lnX - r1 - a) ** 2 + (lnY - r2 - b) ** 2
    const crossed = (lnX - r2 - b) ** 2 + (lnY - r1 - a) ** 2
    return [{ index, gain: straight - crossed }]
  })
  if (rows.length < 2 * LEAST_SIDE) return null
  let best = { at: LEAST_SIDE, sum: Number.NEGATIVE_INFINITY }
  let sum = 0
  for (let at = rows.length - 1; at >= 1; at -= 1) {
    sum += rows[at]?.gain ?? 0
    if (sum > best.sum) best = { at, sum }
  }
  const [last, first] = [rows[best.at - 1], rows[best.at]]
  if (last === undefined || first === undefined) return null
  return { afterMs: fromMs + last.index * binMs, byMs: fromMs + first.index * binMs }
}
