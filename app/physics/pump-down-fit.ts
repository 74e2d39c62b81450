/** Fit of a pump-down: exponent, level and floor with honest errors, and whether the data show a floor at all. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { fisherQuantile, fisherTail, studentQuantile, variancePenalty } from './statistics.ts'
import {
  fitTrend,
  type LogSeries,
  logSeries,
  type PressureSeries,
  PumpDownDataError,
  residualsOf,
  type Trend,
} from './trend.ts'

export interface PumpDownFit {
  /** Level at one hour, Pa, and its logarithm's standard error. */
  kPa: number
  lnKSe: number
  alpha: number
  alphaSe: number
  /** Null where the data show no floor (test at `level`); its upper bound is given all the same. */
  floorPa: number | null
  lnFloorSe: number | null
  /** 95 % upper bound of the floor from the profile of the likelihood, Pa. */
  floorUpperPa: number
  floorTest: { f: number; chance: number }
  /** Root mean square of ln p about the trend, degrees of freedom counted. */
  rmsLn: number
  degreesOfFreedom: number
  points: number
  censoredPoints: number
  /** Correlation of neighbouring residuals, and the factor by which it raises every variance above. */
  rho: number
  varianceFactor: number
  /** Inflated covariance of [ln k, alpha] or [ln k, alpha, ln floor], row by row. */
  covariance: Float64Array
}

export interface PumpDownFitOptions {
  /** Points before this many hours are left out; the first hour is pump transfer and gauge start (common practice). */
  startHours?: number
  /** 'test': keep the floor only where it earns its place. */
  floor?: 'test' | 'always' | 'never'
  /** Level of the test for a floor. */
  level?: number
  /** Take neighbouring residuals as independent: only for readings far apart. */
  independent?: boolean
}

/**
 * Fit p = k (t / 1 h)^-alpha + floor. Method: non-linear least squares on ln p, censored points by the normal law,
 * standard errors raised by sqrt((1 + rho) / (1 - rho)). Throws PumpDownDataError where nothing can be fitted.
 */
export function fitPumpDown(series: PressureSeries, options: PumpDownFitOptions = {}): PumpDownFit {
  const { startHours = 1, floor = 'test', level = 0.05, independent = false } = options
  requireWithin('level', level, 1e-6, 0.5)
  const data = logSeries(series, startHours)
  requireUsable(data, floor === 'never' ? 4 : 5, startHours)
  const line = fitTrend(data, 0)
  const bent = floor === 'never' ? null : fitTrend(data, 'free')
  const reference = bent ?? line
  const size = bent ? 3 : 2
  const { rho, factor } = independent ? { rho: 0, factor: 1 } : correlationOf(data, reference, size)
  const freedom = data.x.length - 3
  // Both models are compared at the deviation of the fuller one, else the poorer one would excuse itself.
  const gain = bent ? fitTrend(data, 0, bent.sigma).deviance - bent.deviance : 0
  const f = Math.max(0, gain) / factor
  const chance = fisherTail(f, 1, freedom)
  const kept = bent && (floor === 'always' || chance < level) ? bent : line
  const keptFactor = kept === reference || independent ? factor : correlationOf(data, kept, 2).factor
  const covariance = (kept.covariance ?? new Float64Array(kept === bent ? 9 : 4).fill(Infinity)).map(
    (v) => v * keptFactor,
  )
  const width = kept === bent ? 3 : 2
  return {
    kPa: Math.exp(kept.lnK),
    lnKSe: Math.sqrt(covariance[0]!),
    alpha: kept.alpha,
    alphaSe: Math.sqrt(covariance[width + 1]!),
    floorPa: kept === bent ? kept.floorPa : null,
    lnFloorSe: kept === bent ? Math.sqrt(covariance[8]!) : null,
    floorUpperPa: floorUpperBound(data, reference, factor, freedom),
    floorTest: { f, chance },
    rmsLn: kept.sigma,
    degreesOfFreedom: data.x.length - width,
    points: data.x.length,
    censoredPoints: data.code.reduce((sum, c) => sum + (c === 0 ? 0 : 1), 0),
    rho,
    varianceFactor: keptFactor,
    covariance,
  }
}

/** Two-sided confidence limits of alpha, and of the floor (from those of its logarithm) where there is one. */
export function confidenceLimits(
  fit: PumpDownFit,
  confidence = 0.95,
): { alpha: [number, number]; floorPa: [number, number] | null } {
  requireWithin('confidence', confidence, 0.01, 0.9999)
  const t = studentQuantile((1 + confidence) / 2, fit.degreesOfFreedom)
  const alpha: [number, number] = [fit.alpha - t * fit.alphaSe, fit.alpha + t * fit.alphaSe]
  if (fit.floorPa === null || fit.lnFloorSe === null) return { alpha, floorPa: null }
  const ratio = Math.exp(t * fit.lnFloorSe)
  return { alpha, floorPa: [fit.floorPa / ratio, fit.floorPa * ratio] }
}

/**
 * Hours at which the fitted trend crosses `targetPa`, and the standard error of their logarithm (delta method on the
 * inflated covariance). Null where the fitted floor is not below the target or the trend does not fall.
 */
export function crossingTime(fit: PumpDownFit, targetPa: number): { hours: number; lnSe: number } | null {
  requirePositive('targetPa', targetPa)
  const floor = fit.floorPa ?? 0
  if (floor >= targetPa || fit.alpha <= 0) return null
  const lnHours = (Math.log(fit.kPa) - Math.log(targetPa - floor)) / fit.alpha
  const slope = [1 / fit.alpha, -lnHours / fit.alpha]
  if (fit.floorPa !== null) slope.push(floor / (targetPa - floor) / fit.alpha)
  const n = slope.length
  let variance = 0
  for (let a = 0; a < n; a++)
    for (let b = 0; b < n; b++) variance += slope[a]! * slope[b]! * fit.covariance[a * n + b]!
  return { hours: Math.exp(lnHours), lnSe: Math.sqrt(variance) }
}

/** Outgassing one hour after the start, Pa m/s, that a level `kPa` at `speedM3S` on `areaM2` of wall stands for. */
export function outgassingAtOneHour(kPa: number, speedM3S: number, areaM2: number): number {
  requirePositive('kPa', kPa)
  requirePositive('speedM3S', speedM3S)
  requirePositive('areaM2', areaM2)
  return (kPa * speedM3S) / areaM2
}

function requireUsable(data: LogSeries, least: number, startHours: number): void {
  const n = data.x.length
  const measured = data.code.reduce((sum, c) => sum + (c === 0 ? 1 : 0), 0)
  if (n === 0) {
    throw new PumpDownDataError(
      'empty',
      `No reading at or after ${startHours} h; at least ${least} are needed for a fit.`,
    )
  }
  if (measured === 0) {
    throw new PumpDownDataError(
      'all-censored',
      `All ${n} readings lie outside their gauge's range; at least ${least} must be measured values.`,
    )
  }
  if (measured < least) {
    throw new PumpDownDataError(
      'too-few-points',
      `${measured} measured readings; at least ${least} are needed for a fit.`,
    )
  }
  const first = data.x.find((_, i) => data.code[i] === 0)!
  if (data.x.every((x, i) => data.code[i] !== 0 || x === first)) {
    throw new PumpDownDataError(
      'one-moment',
      'All readings bear the same time; a trend needs at least two times.',
    )
  }
}

/** Correlation of neighbouring measured residuals. */
function correlationOf(data: LogSeries, trend: Trend, size: number): { rho: number; factor: number } {
  const residual = residualsOf(data, trend)
  return variancePenalty(
    residual.filter((_, i) => data.code[i] === 0),
    size,
  )
}

// Profile: raise the floor until the deviance has grown by the one-sided 95 % point of Fisher's F, correlation counted.
function floorUpperBound(data: LogSeries, best: Trend, factor: number, freedom: number): number {
  const allowed = fisherQuantile(0.1, 1, freedom) * factor
  const excess = (lnFloor: number): number =>
    fitTrend(data, Math.exp(lnFloor), best.sigma).deviance - best.deviance - allowed
  let highest = -Infinity
  for (let i = 0; i < data.y.length; i++) if (data.code[i] === 0) highest = Math.max(highest, data.y[i]!)
  let low = best.floorPa > 0 ? Math.log(best.floorPa) : highest - 40
  let high = highest + 3
  for (let i = 0; i < 60 && high - low > 1e-6; i++) {
    const middle = (low + high) / 2
    if (excess(middle) > 0) high = middle
    else low = middle
  }
  return Math.exp(low)
}
