/**
 * When will the pressure reach a target on its present trend? A range that holds in about four cases of five, or a
 * refusal with its reason. Many floors from none up to the last reading are tried; each counts by how well it explains
 * the readings, so the range carries the doubt about a floor as well as the errors of level and exponent.
 */
import { requireFinite, requirePositive, requireWithin } from './argument-checks.ts'
import { tryAgainAfter, weighFloors } from './forecast-doubt.ts'
import { normalQuantile, variancePenalty, weightedQuantile } from './statistics.ts'
import { fitTrend, logSeries, type PressureSeries, residualsOf } from './trend.ts'
import { type BinnedSeries, binEvenly, dailyWave, suddenStep } from './trend-bins.ts'

export type ForecastRefusal =
  | 'too-few-hours'
  | 'pump-change'
  | 'too-few-points'
  | 'not-falling'
  | 'cannot-tell-yet'
  | 'never-on-this-trend'

export type Forecast =
  | {
      kind: 'forecast'
      /** Hours since the start of high vacuum: median, and the 80 % range low to high. */
      hours: number
      low: number
      high: number
      alpha: number
      alphaSe: number
      /** Null unless the readings show a floor. */
      floorPa: number | null
      /** The floor lies below this with 95 % probability. */
      floorUpperPa: number
      windowHours: [number, number]
      points: number
      rmsLn: number
    }
  | { kind: 'refused'; reason: ForecastRefusal; message: string; tryAgainHours: number | null }

export interface ForecastOptions {
  targetPa: number
  /** Hour of the last pump change, valve action or heating: nothing before it is used. A sudden step counts as one. */
  windowStartHours?: number
  /** Good hours wanted after the start of the window. */
  minimumHours?: number
}

// Readings older than a tenth of the run say little about the present exponent and pull the trend aside.
const OLDEST_SHARE = 0.1
const FIRST_GOOD_HOUR = 1
const MOST_BINS = 96
const LEAST_BINS = 8
const DRAWS = Array.from({ length: 41 }, (_, i) => normalQuantile((i + 0.5) / 41))

/**
 * Forecast the hour at which `targetPa` is reached. Hours count from the start of high vacuum. Throws PhysicsError on
 * a target, time or pressure that is no positive number; everything else that prevents a forecast is a refusal.
 */
export function forecastTimeToTarget(series: PressureSeries, options: ForecastOptions): Forecast {
  const { targetPa, windowStartHours, minimumHours = 12 } = options
  requirePositive('targetPa', targetPa)
  requireWithin('minimumHours', minimumHours, 1, 1e5)
  if (windowStartHours !== undefined) requireFinite('windowStartHours', windowStartHours)
  const goodFrom = Math.max(FIRST_GOOD_HOUR, windowStartHours ?? 0)
  const all = logSeries(series, goodFrom)
  let end = goodFrom
  for (const x of all.x) end = Math.max(end, Math.exp(x))
  if (end - goodFrom < minimumHours)
    return refuseForHours(end - goodFrom, goodFrom, minimumHours, windowStartHours)
  const start = Math.max(goodFrom, Math.min(end * OLDEST_SHARE, end - minimumHours))
  const bins = binEvenly(logSeries(series, start), end, start, MOST_BINS)
  const measured = bins.code.reduce((sum, c) => sum + (c === 0 ? 1 : 0), 0)
  if (measured < LEAST_BINS) {
    return {
      kind: 'refused',
      reason: 'too-few-points',
      message: `Only ${measured} of ${MOST_BINS} stretches of the window hold a measured reading; at least ${LEAST_BINS} are needed.`,
      tryAgainHours: null,
    }
  }
  const step = suddenStep(bins, residualsOf(bins, fitTrend(bins, 'free')))
  if (step === null) return forecastFromBins(bins, targetPa, [start, end])
  // Bins blur the moment of the change by their width; the readings after that are clean.
  return forecastTimeToTarget(series, { targetPa, minimumHours, windowStartHours: step + bins.widthHours })
}

function forecastFromBins(raw: BinnedSeries, targetPa: number, window: [number, number]): Forecast {
  const { bins, sigma, factor, rmsLn } = withoutDailyWave(raw)
  const line = fitTrend(bins, 0, sigma)
  const lineSe = Math.sqrt((line.covariance?.[3] ?? Infinity) * factor)
  const reached = alreadyReached(bins, line.lnK - line.alpha * Math.log(window[1]), targetPa)
  if (reached === null && line.alpha - normalQuantile(0.9) * lineSe <= 0) {
    return {
      kind: 'refused',
      reason: 'not-falling',
      message: `The pressure does not fall over the last ${Math.round(window[1] - window[0])} h (exponent ${line.alpha.toFixed(2)} with standard error ${lineSe.toFixed(2)}); a forecast needs a falling trend.`,
      tryAgainHours: null,
    }
  }
  const candidates = weighFloors(bins, { sigma, factor, endHours: window[1] })
  const weights = candidates.map((c) => c.weight)
  const floors = candidates.map((c) => c.floorPa)
  const total = weights.reduce((a, b) => a + b, 0)
  const bare = candidates.reduce((sum, c) => sum + (c.floorPa === 0 ? c.weight : 0), 0) / total
  const meanOf = (of: (index: number) => number): number =>
    candidates.reduce((sum, c, i) => sum + (c.weight / total) * of(i), 0)
  const alpha = meanOf((i) => candidates[i]!.alpha)
  const alphaSe = Math.sqrt(meanOf((i) => candidates[i]!.alphaVariance + (candidates[i]!.alpha - alpha) ** 2))
  const common = {
    kind: 'forecast' as const,
    alpha,
    alphaSe,
    floorPa: bare < 0.05 ? meanOf((i) => floors[i]!) : null,
    floorUpperPa: weightedQuantile(floors, weights, 0.95),
    windowHours: window,
    points: bins.x.length,
    rmsLn,
  }
  if (reached !== null) return { ...common, hours: reached, low: reached, high: reached }
  const times: number[] = []
  const chances: number[] = []
  for (const candidate of candidates) {
    const crossing = candidate.crossing(targetPa)
    for (const draw of DRAWS) {
      times.push(crossing ? Math.exp(crossing.lnHours + draw * crossing.lnSe) : Infinity)
      chances.push(candidate.weight)
    }
  }
  const never = chances.reduce((sum, w, i) => sum + (Number.isFinite(times[i]!) ? 0 : w), 0)
  const neverShare = never / chances.reduce((a, b) => a + b, 0)
  if (neverShare >= 0.1)
    return refuseForFloor(neverShare, targetPa, common, () =>
      tryAgainAfter(bins, { sigma, factor, targetPa, endHours: window[1] }),
    )
  return {
    ...common,
    hours: weightedQuantile(times, chances, 0.5),
    low: weightedQuantile(times, chances, 0.1),
    high: weightedQuantile(times, chances, 0.9),
  }
}

/** Deviation and correlation of the bins about the better of both trends, once the daily wave is out. */
function withoutDailyWave(raw: BinnedSeries): {
  bins: BinnedSeries
  sigma: number
  factor: number
  rmsLn: number
} {
  let bins = raw
  let trend = fitTrend(bins, 'free')
  const rmsLn = trend.sigma
  for (let round = 0; round < 3; round++) {
    const wave = dailyWave(raw, residualsOf(raw, trend))
    bins = { ...raw, y: raw.y.map((y, i) => y - wave[i]!) }
    trend = fitTrend(bins, 'free')
  }
  const residual = residualsOf(bins, trend)
  const measured = residual.map((_, i) => i).filter((i) => bins.code[i] === 0)
  const penalty = variancePenalty(
    measured.map((i) => residual[i]!),
    bins === raw ? 3 : 5,
    (i) => bins.hasNeighbour[measured[i]!]! && measured[i + 1] === measured[i]! + 1,
  )
  return { bins, sigma: trend.sigma, factor: penalty.factor, rmsLn }
}

/** First hour from which every later bin lies at or below the target, where trend and last bin do. */
function alreadyReached(bins: BinnedSeries, lnNow: number, targetPa: number): number | null {
  const lnTarget = Math.log(targetPa)
  if (lnNow > lnTarget) return null
  let hours: number | null = null
  for (let i = bins.x.length - 1; i >= 0 && bins.y[i]! <= lnTarget && bins.code[i]! <= 0; i--) {
    hours = Math.exp(bins.x[i]!)
  }
  return hours
}

function refuseForHours(
  have: number,
  goodFrom: number,
  minimumHours: number,
  windowStartHours: number | undefined,
): Forecast {
  const again = goodFrom + minimumHours
  const changed = windowStartHours !== undefined && windowStartHours > FIRST_GOOD_HOUR
  return {
    kind: 'refused',
    reason: changed ? 'pump-change' : 'too-few-hours',
    message: changed
      ? `Pumps, valves or heat were changed (or the reading jumped) at hour ${goodFrom.toFixed(1)}, and only ${have.toFixed(1)} h of readings follow; at least ${minimumHours} h are needed.`
      : `Only ${have.toFixed(1)} h of good readings; at least ${minimumHours} h after the first are needed.`,
    tryAgainHours: again,
  }
}

function refuseForFloor(
  neverShare: number,
  targetPa: number,
  fit: { floorPa: number | null; floorUpperPa: number },
  again: () => number | null,
): Forecast {
  const target = targetPa.toExponential(1)
  if (neverShare > 0.9) {
    const floor = fit.floorPa === null ? '' : ` near ${fit.floorPa.toExponential(1)} Pa`
    return {
      kind: 'refused',
      reason: 'never-on-this-trend',
      message: `The readings bend towards a floor${floor}, above the target of ${target} Pa: it is not reached on the present trend.`,
      tryAgainHours: null,
    }
  }
  const tryAgainHours = again()
  return {
    kind: 'refused',
    reason: 'cannot-tell-yet',
    message: `A floor above ${target} Pa fits the readings too well to be ruled out (${Math.round(neverShare * 100)} %); more hours will tell.`,
    tryAgainHours,
  }
}
