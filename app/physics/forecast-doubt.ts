/** The many trends a pump-down may follow, each with the weight its readings give it: what a forecast ranges over. */
import { fisherQuantile } from './statistics.ts'
import { fitTrend, type LogSeries } from './trend.ts'

/** One assumed floor with its best level and exponent. */
export interface TrendCandidate {
  floorPa: number
  weight: number
  alpha: number
  alphaVariance: number
  /** Logarithm of the hour of crossing and its standard error; null where this floor is not below the target. */
  crossing(targetPa: number): { lnHours: number; lnSe: number } | null
}

interface Noise {
  /** Deviation of ln p per bin, and the factor by which correlation raises variances. */
  sigma: number
  factor: number
}

// Before any reading: clean unbaked metal falls with exponent 1.0 +- 0.2, plastics 0.5 to 0.9 (handbook ranges, from
// memory, not verified). Wide on purpose; it only tames floors that ask for an absurd exponent.
const EXPONENT_BEFORE = 1
const EXPONENT_SPREAD = 0.3
const FLOOR_REACH = Math.log(1000)
const COARSE_FLOORS = 25
// No tube keeps one exponent: it drifts by a few hundredths per e-fold of time (spread of our own trial curves).
const EXPONENT_DRIFT = 0.03

/**
 * Weigh no floor (half of the belief) against floors spread evenly in ln p from the lowest reading down over three
 * decades: a floor may hide anywhere below what the readings can show. Steps are finer about the best floor.
 */
export function weighFloors(bins: LogSeries, options: Noise & { endHours: number }): TrendCandidate[] {
  const { sigma, factor, endHours } = options
  const lnEnd = Math.log(endHours)
  const nodes = floorNodes(bins, sigma, factor)
  const fits = [0, ...nodes.map(Math.exp)].map((floor) => candidateAt(bins, floor, sigma, factor, lnEnd))
  const least = Math.min(...fits.map((f) => f.misfit))
  return fits.map(({ misfit, candidate }, i) => ({
    ...candidate,
    weight: Math.exp((least - misfit) / 2) * (i === 0 ? 0.5 : 0.5 * beliefOf(nodes, i - 1)),
  }))
}

function floorNodes(bins: LogSeries, sigma: number, factor: number): number[] {
  let lowest = Infinity
  for (let i = 0; i < bins.y.length; i++) if (bins.code[i] === 0) lowest = Math.min(lowest, bins.y[i]!)
  const top = lowest + 0.05
  const nodes = Array.from({ length: COARSE_FLOORS }, (_, i) => top - (FLOOR_REACH * i) / (COARSE_FLOORS - 1))
  const free = fitTrend(bins, 'free', sigma)
  const middle = Math.log(free.floorPa)
  const deviation = Math.sqrt((free.covariance?.[8] ?? Infinity) * factor)
  if (deviation < 0.5) {
    for (let step = -7; step <= 7; step++) nodes.push(middle + (step / 2) * deviation)
  }
  return nodes.filter((v) => v <= top && v >= top - FLOOR_REACH).sort((a, b) => a - b)
}

/** Share of the even belief in ln floor that falls to one node: half of both gaps beside it. */
function beliefOf(nodes: readonly number[], index: number): number {
  const before = nodes[index - 1] ?? nodes[index]!
  const after = nodes[index + 1] ?? nodes[index]!
  return (after - before) / 2 / FLOOR_REACH
}

function candidateAt(
  bins: LogSeries,
  floorPa: number,
  sigma: number,
  factor: number,
  lnEnd: number,
): { misfit: number; candidate: TrendCandidate } {
  const trend = fitTrend(bins, floorPa, sigma)
  const c = trend.covariance
  if (!c) return { misfit: Infinity, candidate: neverCrossing(floorPa) }
  // One step of Bayes: the exponent's spread before any reading counts like one more measurement of it.
  const own = c[3]! * factor
  const shared = c[1]! * factor
  const sum = own + EXPONENT_SPREAD ** 2
  const surprise = EXPONENT_BEFORE - trend.alpha
  const alpha = trend.alpha + (own / sum) * surprise
  const lnK = trend.lnK + (shared / sum) * surprise
  const alphaVariance = own - own ** 2 / sum
  const lnKVariance = c[0]! * factor - shared ** 2 / sum
  const covariance = shared - (shared * own) / sum
  return {
    misfit: trend.deviance / factor + surprise ** 2 / sum + Math.log(sum),
    candidate: {
      floorPa,
      weight: 0,
      alpha,
      alphaVariance,
      crossing(targetPa) {
        if (floorPa >= targetPa || alpha <= 0) return null
        const lnHours = (lnK - Math.log(targetPa - floorPa)) / alpha
        const variance = lnKVariance - 2 * lnHours * covariance + lnHours ** 2 * alphaVariance
        const beyond = Math.max(0, lnHours - lnEnd)
        const drift = (EXPONENT_DRIFT * beyond * (1 + beyond)) / alpha
        return { lnHours, lnSe: Math.sqrt(Math.max(0, variance) / alpha ** 2 + drift ** 2) }
      },
    },
  }
}

function neverCrossing(floorPa: number): TrendCandidate {
  return { floorPa, weight: 0, alpha: 0, alphaVariance: 0, crossing: () => null }
}

/**
 * Hour by which readings going on without a floor would speak against a floor as high as the target (Fisher's test at
 * 0.05, correlation counted), or null where a hundred times the present hours would not do.
 */
export function tryAgainAfter(
  bins: LogSeries,
  options: Noise & { targetPa: number; endHours: number },
): number | null {
  const { sigma, factor, targetPa, endHours } = options
  const bare = fitTrend(bins, 0, sigma)
  const spacing = (endHours - Math.exp(bins.x[0]!)) / Math.max(1, bins.x.length - 1)
  for (let until = endHours * 1.1; until < endHours * 100; until *= 1.15) {
    const added = Math.floor((until - endHours) / spacing)
    const stride = Math.max(1, Math.ceil(added / 200))
    const more = Array.from({ length: Math.ceil(added / stride) }, (_, i) =>
      Math.log(endHours + (i + 1) * stride * spacing),
    )
    const x = Float64Array.from([...bins.x, ...more])
    const smooth: LogSeries = { x, y: x.map((v) => bare.lnK - bare.alpha * v), code: new Int8Array(x.length) }
    const thinned = (added + bins.x.length) / x.length
    const misfit = (fitTrend(smooth, targetPa, sigma).deviance * thinned) / factor
    if (misfit > fisherQuantile(0.05, 1, Math.max(2, x.length / factor - 2))) return until
  }
  return null
}
