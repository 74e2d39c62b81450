/**
 * The pump-down trend p = k (t / 1 h)^-alpha + floor, fitted to ln p: gauge errors are multiplicative, so every decade
 * must weigh alike. Points beyond a gauge's range enter by the chance of lying there, never as numbers.
 */
import { requirePositive } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'
import { type DescentResult, descend, invertPositive, type Landscape } from './gauss-newton.ts'
import { logNormalCdf, normalHazard } from './statistics.ts'

/** 'below': the true pressure lies under the number kept beside it; 'above': over it; null: measured. */
export type Censoring = 'below' | 'above' | null

/** Hours since the start of high vacuum (rising) and pressures in Pa, index by index. */
export interface PressureSeries {
  hours: ArrayLike<number>
  pa: ArrayLike<number>
  censored?: ArrayLike<Censoring>
}

/** The series cannot carry a fit at all. */
export class PumpDownDataError extends Error {
  readonly reason: 'empty' | 'all-censored' | 'too-few-points' | 'one-moment'

  constructor(reason: PumpDownDataError['reason'], message: string) {
    super(message)
    this.name = 'PumpDownDataError'
    this.reason = reason
  }
}

/** The usable part of a series in logarithms: x = ln(t / 1 h), y = ln(p / 1 Pa), code -1 below, 0, +1 above. */
export interface LogSeries {
  x: Float64Array
  y: Float64Array
  code: Int8Array
}

/** One trend through a log series. `covariance` is of [ln k, alpha] or [ln k, alpha, ln floor], not inflated. */
export interface Trend {
  lnK: number
  alpha: number
  floorPa: number
  /** Twice the negative log-likelihood up to a constant, at the deviation given to the fit (sum of squares / s2). */
  deviance: number
  sigma: number
  covariance: Float64Array | null
}

/** Keep the points from `startHours` on. Throws on a pressure or time that is no positive number. */
export function logSeries(series: PressureSeries, startHours: number): LogSeries {
  const n = series.hours.length
  if (series.pa.length !== n || (series.censored && series.censored.length !== n)) {
    throw new PhysicsError('series.pa.length', series.pa.length, `as many values as there are hours (${n})`)
  }
  const x: number[] = []
  const y: number[] = []
  const code: number[] = []
  for (let i = 0; i < n; i++) {
    const hours = series.hours[i]!
    if (hours < startHours) continue
    requirePositive(`series.hours[${i}]`, hours)
    requirePositive(`series.pa[${i}]`, series.pa[i]!)
    const mark = series.censored?.[i] ?? null
    x.push(Math.log(hours))
    y.push(Math.log(series.pa[i]!))
    code.push(mark === 'below' ? -1 : mark === 'above' ? 1 : 0)
  }
  return { x: Float64Array.from(x), y: Float64Array.from(y), code: Int8Array.from(code) }
}

/** ln of the trend at x = ln t. */
function lnTrend(lnK: number, alpha: number, floorPa: number, x: number): number {
  const lnFalling = lnK - alpha * x
  return floorPa > 0 ? lnFalling + Math.log1p(floorPa * Math.exp(-lnFalling)) : lnFalling
}

function landscapeOf(
  data: LogSeries,
  sigma: number,
  heldFloor: number | null,
  p: readonly number[],
): Landscape {
  const size = heldFloor === null ? 3 : 2
  const floor = heldFloor ?? Math.exp(p[2]!)
  const gradient = new Float64Array(size)
  const curvature = new Float64Array(size * size)
  const slope = new Float64Array(size)
  let cost = 0
  for (let i = 0; i < data.x.length; i++) {
    const model = lnTrend(p[0]!, p[1]!, floor, data.x[i]!)
    const share = Math.exp(p[0]! - p[1]! * data.x[i]! - model)
    slope[0] = share
    slope[1] = -share * data.x[i]!
    if (size === 3) slope[2] = 1 - share
    const z = (data.y[i]! - model) / sigma
    const code = data.code[i]!
    let pull = -z / sigma
    let weight = 1 / sigma ** 2
    if (code === 0) cost += (z * z) / 2
    else {
      // A point known only as "below y" counts by ln Phi(z), one "above y" by ln Phi(-z).
      const side = code < 0 ? z : -z
      const hazard = normalHazard(side)
      cost -= logNormalCdf(side)
      pull = ((code < 0 ? 1 : -1) * hazard) / sigma
      weight *= Math.max(0, hazard * (hazard + side))
    }
    for (let a = 0; a < size; a++) {
      gradient[a]! += pull * slope[a]!
      for (let b = 0; b < size; b++) curvature[a * size + b]! += weight * slope[a]! * slope[b]!
    }
  }
  return { cost, gradient, curvature }
}

/**
 * Fit ln k and alpha (and ln floor when `floorPa` is 'free'; a number, 0 included, is held). `sigma` fixes the deviation
 * of ln p; without it the deviation is estimated with the fit, censored points included.
 */
export function fitTrend(data: LogSeries, floorPa: number | 'free', sigma?: number): Trend {
  const held = floorPa === 'free' ? null : floorPa
  const size = held === null ? 3 : 2
  const starts = startingPoints(data, held)
  let spread = sigma ?? 0.05
  let best: DescentResult | null = null
  for (let round = 0; round < 60; round++) {
    const candidates = best ? [best.parameters] : starts
    let winner: DescentResult | null = null
    for (const start of candidates) {
      const found = descend((p) => landscapeOf(data, spread, held, p), start, {
        lower: [-200, -5, -120],
        upper: [200, 15, 20],
      })
      if (!winner || found.cost < winner.cost) winner = found
    }
    best = winner!
    if (sigma !== undefined) break
    const next = deviationAt(data, spread, held, best.parameters, size)
    const settled = Math.abs(next - spread) <= 1e-10 * spread
    spread = next
    if (settled) break
  }
  const p = best!.parameters
  const final = landscapeOf(data, spread, held, p)
  return {
    lnK: p[0]!,
    alpha: p[1]!,
    floorPa: held ?? Math.exp(p[2]!),
    deviance: 2 * final.cost,
    sigma: spread,
    covariance: invertPositive(final.curvature, size),
  }
}

/** Residuals ln p - ln trend of every point, censored ones included (their sign is then only a bound). */
export function residualsOf(data: LogSeries, trend: Pick<Trend, 'lnK' | 'alpha' | 'floorPa'>): Float64Array {
  return data.y.map((y, i) => y - lnTrend(trend.lnK, trend.alpha, trend.floorPa, data.x[i]!))
}

// Expectation step: a censored point adds the mean square it would have under the present deviation.
function deviationAt(
  data: LogSeries,
  sigma: number,
  held: number | null,
  p: readonly number[],
  size: number,
): number {
  const residual = residualsOf(data, { lnK: p[0]!, alpha: p[1]!, floorPa: held ?? Math.exp(p[2]!) })
  let square = 0
  for (let i = 0; i < residual.length; i++) {
    const code = data.code[i]!
    if (code === 0) square += residual[i]! ** 2
    else {
      const side = (code < 0 ? residual[i]! : -residual[i]!) / sigma
      square += sigma ** 2 * Math.max(0, 1 - side * normalHazard(side))
    }
  }
  return Math.max(1e-9, Math.sqrt(square / Math.max(1, residual.length - size)))
}

function startingPoints(data: LogSeries, held: number | null): number[][] {
  const shares = held === null ? [0.2, 0.6, 0.9, 0.98] : [0]
  let lowest = Infinity
  for (let i = 0; i < data.y.length; i++)
    if (data.code[i] === 0) lowest = Math.min(lowest, Math.exp(data.y[i]!))
  return shares.map((share) => {
    const floor = held === null ? share * lowest : Math.min(held, 0.98 * lowest)
    let n = 0
    let sx = 0
    let sy = 0
    let sxx = 0
    let sxy = 0
    for (let i = 0; i < data.x.length; i++) {
      if (data.code[i] !== 0) continue
      const x = data.x[i]!
      const y = Math.log(Math.exp(data.y[i]!) - floor)
      n++
      sx += x
      sy += y
      sxx += x * x
      sxy += x * y
    }
    const slope = (n * sxy - sx * sy) / (n * sxx - sx * sx)
    const line = [(sy - slope * sx) / n, -slope]
    return held === null ? [...line, Math.log(floor)] : line
  })
}
