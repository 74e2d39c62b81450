/**
 * Rate of rise of an isolated volume: p = p0 + r t + a (1 - exp(-t / tau)). The straight part persists (a leak, or
 * hydrogen); the bend is gas that the walls soon take back. Times in s, pressures in Pa, throughputs in Pa m3/s.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'
import { invertPositive } from './gauss-newton.ts'
import { fisherTail, median, studentQuantile, variancePenalty } from './statistics.ts'

export interface IsolationSeries {
  seconds: ArrayLike<number>
  pa: ArrayLike<number>
  volumeM3: number
  /** Standard error of the volume over the volume; 0 where it counts as exact. */
  volumeRelativeSe?: number
  /** Tube temperature at each reading; with it the pressures are brought to the mean temperature (p in step with T). */
  kelvin?: ArrayLike<number>
}

export interface IsolationResult {
  /**
   * 'steady': straight rise; 'saturating': the bend explains all of it; 'both'; 'too-short': a bend whose time constant
   * is over a third of the test, so that the straight part cannot be told from it; 'no-rise': nothing found.
   */
  kind: 'steady' | 'saturating' | 'both' | 'too-short' | 'no-rise'
  /** Straight rise, Pa/s, and its standard error (correlation of the readings counted). */
  ratePaS: number
  rateSePaS: number
  /** Volume times rate with its standard error (volume's error included) and 95 % limits, Pa m3/s. */
  throughputPaM3S: number
  throughputSePaM3S: number
  throughput95PaM3S: [number, number]
  /** Throughput in the first moment, bend included, Pa m3/s. */
  firstThroughputPaM3S: number
  bend: { risePa: number; tauS: number } | null
  bendChance: number
  rmsRelative: number
  points: number
}

/** The readings cannot be a rise in a closed volume. */
export class IsolationDataError extends Error {
  readonly reason: 'too-few-points' | 'valve-reopened'
  /** Where the pressure fell, s; null for other reasons. */
  readonly atSeconds: number | null

  constructor(reason: IsolationDataError['reason'], atSeconds: number | null, message: string) {
    super(message)
    this.name = 'IsolationDataError'
    this.reason = reason
    this.atSeconds = atSeconds
  }
}

const LEAST_POINTS = 8
// The time constant is searched for, so chance finds more bends than the level says; at 0.002 a straight rise hardly
// ever shows one (the test counts).
const BEND_LEVEL = 0.002

/**
 * Analyse one isolation. Relative weights, since gauge errors grow with the pressure. Throws IsolationDataError on
 * fewer than eight readings or on a fall in between, PhysicsError on readings that are no positive numbers.
 */
export function analyseIsolation(series: IsolationSeries): IsolationResult {
  const { volumeM3, volumeRelativeSe = 0 } = series
  requirePositive('volumeM3', volumeM3)
  requireWithin('volumeRelativeSe', volumeRelativeSe, 0, 1)
  const { t, p } = readings(series)
  refuseFall(t, p)
  const span = t[t.length - 1]!
  const line = weightedFit([new Float64Array(t.length).fill(1), t], p)
  const bent = bestBend(t, p, span)
  const freedom = t.length - 4
  const penalty = variancePenalty((bent?.fit ?? line).residuals, bent ? 4 : 2)
  const gain = bent ? (line.square - bent.fit.square) / (bent.fit.square / freedom) / 2 / penalty.factor : 0
  const bendChance = bent && bent.fit.square > 0 ? fisherTail(gain, 2, freedom) : bent ? 0 : 1
  const kept = bent && bendChance < BEND_LEVEL ? bent : null
  const fit = kept?.fit ?? line
  const used = kept ? 4 : 2
  const scale = fit.square / (t.length - used)
  const factor = variancePenalty(fit.residuals, used).factor
  const ratePaS = fit.coefficients[1]!
  const rateSePaS = Math.sqrt(fit.inverse[fit.coefficients.length + 1]! * scale * factor)
  const quantile = studentQuantile(0.975, t.length - used)
  const throughputPaM3S = volumeM3 * ratePaS
  const throughputSePaM3S = volumeM3 * Math.hypot(rateSePaS, ratePaS * volumeRelativeSe)
  const bend = kept ? { risePa: kept.fit.coefficients[2]!, tauS: kept.tauS } : null
  return {
    kind: kindOf(bend, ratePaS - quantile * rateSePaS > 0, span),
    ratePaS,
    rateSePaS,
    throughputPaM3S,
    throughputSePaM3S,
    throughput95PaM3S: [
      throughputPaM3S - quantile * throughputSePaM3S,
      throughputPaM3S + quantile * throughputSePaM3S,
    ],
    firstThroughputPaM3S: volumeM3 * (ratePaS + (bend ? bend.risePa / bend.tauS : 0)),
    bend,
    bendChance,
    rmsRelative: Math.sqrt(scale),
    points: t.length,
  }
}

function kindOf(bend: { tauS: number } | null, rises: boolean, span: number): IsolationResult['kind'] {
  if (!bend) return rises ? 'steady' : 'no-rise'
  if (bend.tauS * 3 > span) return 'too-short'
  return rises ? 'both' : 'saturating'
}

function readings(series: IsolationSeries): { t: Float64Array; p: Float64Array } {
  const n = series.seconds.length
  if (series.pa.length !== n) {
    throw new PhysicsError('series.pa.length', series.pa.length, `as many values as there are times (${n})`)
  }
  if (series.kelvin && series.kelvin.length !== n) {
    throw new PhysicsError('series.kelvin.length', series.kelvin.length, `one temperature per time (${n})`)
  }
  if (n < LEAST_POINTS) {
    throw new IsolationDataError(
      'too-few-points',
      null,
      `${n} readings during the isolation; at least ${LEAST_POINTS} are needed.`,
    )
  }
  let meanKelvin = 0
  for (let i = 0; i < n; i++) {
    requirePositive(`series.pa[${i}]`, series.pa[i]!)
    if (series.kelvin) {
      requirePositive(`series.kelvin[${i}]`, series.kelvin[i]!)
      meanKelvin += series.kelvin[i]! / n
    }
    if (i > 0 && !(series.seconds[i]! > series.seconds[i - 1]!)) {
      throw new PhysicsError(`series.seconds[${i}]`, series.seconds[i]!, 'a later time than the one before')
    }
  }
  const start = series.seconds[0]!
  return {
    t: Float64Array.from({ length: n }, (_, i) => series.seconds[i]! - start),
    p: Float64Array.from({ length: n }, (_, i) =>
      series.kelvin ? (series.pa[i]! * meanKelvin) / series.kelvin[i]! : series.pa[i]!,
    ),
  }
}

/** A closed volume does not lose pressure: a lasting fall well above the scatter means that a valve was opened. */
function refuseFall(t: Float64Array, p: Float64Array): void {
  const smooth = Float64Array.from({ length: p.length - 2 }, (_, i) => median(p.subarray(i, i + 3)))
  const steps = Array.from({ length: p.length - 1 }, (_, i) => Math.log(p[i + 1]! / p[i]!))
  const usual = median(steps)
  const scatter = 1.4826 * median(steps.map((s) => Math.abs(s - usual)))
  const allowed = Math.max(0.05, 6 * scatter)
  let highest = -Infinity
  for (let i = 0; i < smooth.length; i++) {
    highest = Math.max(highest, smooth[i]!)
    if (Math.log(highest / smooth[i]!) > allowed) {
      const found = `${highest.toExponential(2)} to ${smooth[i]!.toExponential(2)} Pa`
      throw new IsolationDataError(
        'valve-reopened',
        t[i + 1]!,
        `The pressure fell from ${found} by second ${Math.round(t[i + 1]!)} of the isolation; a closed volume only rises. End the series where the valve was opened.`,
      )
    }
  }
}

interface LinearFit {
  coefficients: Float64Array
  inverse: Float64Array
  /** Relative residuals and the sum of their squares. */
  residuals: Float64Array
  square: number
}

function weightedFit(columns: readonly Float64Array[], p: Float64Array): LinearFit {
  const size = columns.length
  const normal = new Float64Array(size * size)
  const right = new Float64Array(size)
  for (let i = 0; i < p.length; i++) {
    const weight = 1 / p[i]! ** 2
    for (let a = 0; a < size; a++) {
      right[a]! += weight * columns[a]![i]! * p[i]!
      for (let b = 0; b < size; b++) normal[a * size + b]! += weight * columns[a]![i]! * columns[b]![i]!
    }
  }
  const inverse = invertPositive(normal, size) ?? new Float64Array(size * size).fill(Number.NaN)
  const coefficients = right.map((_, a) => right.reduce((sum, r, b) => sum + inverse[a * size + b]! * r, 0))
  const residuals = p.map((v, i) => columns.reduce((sum, c, a) => sum - coefficients[a]! * c[i]!, v) / v)
  return { coefficients, inverse, residuals, square: residuals.reduce((sum, r) => sum + r * r, 0) }
}

/** Best bend with a positive rise: the other three parameters are linear once tau is set, so only tau is searched. */
function bestBend(t: Float64Array, p: Float64Array, span: number): { tauS: number; fit: LinearFit } | null {
  const one = new Float64Array(t.length).fill(1)
  const at = (lnTau: number): LinearFit => {
    const tau = Math.exp(lnTau)
    return weightedFit([one, t, t.map((v) => -Math.expm1(-v / tau))], p)
  }
  // A bend faster than two readings is one odd first reading, no bend.
  const low = Math.log((2 * span) / (t.length - 1))
  const high = Math.log(3 * span)
  let best = { lnTau: low, fit: at(low) }
  const better = (lnTau: number): void => {
    const fit = at(lnTau)
    if (!(fit.square >= best.fit.square)) best = { lnTau, fit }
  }
  const steps = 60
  for (let i = 1; i <= steps; i++) better(low + ((high - low) * i) / steps)
  for (let width = (high - low) / steps; width > 1e-6; width /= 2) {
    const centre = best.lnTau
    better(centre - width / 2)
    better(centre + width / 2)
  }
  return best.fit.coefficients[2]! > 0 ? { tauS: Math.exp(best.lnTau), fit: best.fit } : null
}
