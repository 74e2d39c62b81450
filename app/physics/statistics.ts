/**
 * The few laws of chance the analysis needs. Quantiles come from jstat; the tails of the normal law, where one
 * minus the error function loses its digits, are done here.
 */
import jstat from 'jstat'
import { requireWithin } from './argument-checks.ts'

/** Quantile of Student's t. `probability` in (0, 1), `degreesOfFreedom` >= 0.5. Good to about 1e-8. */
export function studentQuantile(probability: number, degreesOfFreedom: number): number {
  requireWithin('probability', probability, 1e-12, 1 - 1e-12)
  requireWithin('degreesOfFreedom', degreesOfFreedom, 0.5, 1e9)
  return jstat.studentt.inv(probability, degreesOfFreedom)
}

/** Chance that Fisher's F with these degrees of freedom exceeds `value` (>= 0). */
export function fisherTail(value: number, numerator: number, denominator: number): number {
  requireWithin('value', value, 0, Number.MAX_VALUE)
  requireWithin('numerator', numerator, 0.5, 1e9)
  requireWithin('denominator', denominator, 0.5, 1e9)
  return 1 - jstat.centralF.cdf(value, numerator, denominator)
}

/** Value of Fisher's F that is exceeded with probability `tail`. */
export function fisherQuantile(tail: number, numerator: number, denominator: number): number {
  requireWithin('tail', tail, 1e-9, 1 - 1e-9)
  requireWithin('numerator', numerator, 0.5, 1e9)
  requireWithin('denominator', denominator, 0.5, 1e9)
  return jstat.centralF.inv(1 - tail, numerator, denominator)
}

/** Value of chi-square that is exceeded with probability `tail`. */
export function chiSquareQuantile(tail: number, degreesOfFreedom: number): number {
  requireWithin('tail', tail, 1e-9, 1 - 1e-9)
  requireWithin('degreesOfFreedom', degreesOfFreedom, 0.5, 1e9)
  return jstat.chisquare.inv(1 - tail, degreesOfFreedom)
}

/** Quantile of the standard normal law, `probability` in (0, 1). */
export function normalQuantile(probability: number): number {
  requireWithin('probability', probability, 1e-15, 1 - 1e-15)
  return jstat.normal.inv(probability, 0, 1)
}

/**
 * Hazard of the standard normal law on its left side, phi(z)/Phi(z): the slope of ln Phi. Below -6 the quotient of
 * two vanishing numbers is replaced by the classical continued fraction of Mills (textbook result, from memory;
 * the test compares both sides at the joint).
 */
export function normalHazard(z: number): number {
  if (z < -6) return leftTailDenominator(-z)
  return jstat.normal.pdf(z, 0, 1) / jstat.normal.cdf(z, 0, 1)
}

/** ln Phi(z), without underflow however far left. */
export function logNormalCdf(z: number): number {
  if (z < -6) return -0.5 * z * z - 0.5 * Math.log(2 * Math.PI) - Math.log(leftTailDenominator(-z))
  return Math.log(jstat.normal.cdf(z, 0, 1))
}

// phi(-x)/Phi(-x) = x + 1/(x + 2/(x + 3/(x + ...))), x >= 6: forty levels are far beyond double precision.
function leftTailDenominator(x: number): number {
  let tail = x
  for (let level = 40; level >= 1; level--) tail = x + level / tail
  return tail
}

/**
 * Quantile of weighted values (not necessarily sorted, weights >= 0, at least one above 0), interpolated between the
 * middles of neighbouring weights so that it moves smoothly with the weights. Infinite values are allowed and sort
 * last; the answer is then infinite where they are reached.
 */
export function weightedQuantile(
  values: ArrayLike<number>,
  weights: ArrayLike<number>,
  probability: number,
): number {
  requireWithin('probability', probability, 0, 1)
  const order = Array.from({ length: values.length }, (_, i) => i)
    .filter((i) => weights[i]! > 0)
    .sort((a, b) => (values[a]! < values[b]! ? -1 : values[a]! > values[b]! ? 1 : 0))
  requireWithin('values.length', order.length, 1, Number.MAX_SAFE_INTEGER)
  let total = 0
  for (const i of order) total += weights[i]!
  const wanted = probability * total
  let before = 0
  let lastMiddle = 0
  let lastValue = values[order[0]!]!
  for (const i of order) {
    const middle = before + weights[i]! / 2
    const value = values[i]!
    if (middle >= wanted) {
      if (middle === lastMiddle || !Number.isFinite(value)) return value
      return lastValue + ((value - lastValue) * (wanted - lastMiddle)) / (middle - lastMiddle)
    }
    before += weights[i]!
    lastMiddle = middle
    lastValue = value
  }
  return lastValue
}

/** Median of at least one number; the middle pair is averaged. */
export function median(values: ArrayLike<number>): number {
  requireWithin('values.length', values.length, 1, Number.MAX_SAFE_INTEGER)
  const sorted = Float64Array.from(values).sort()
  const half = sorted.length >> 1
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2
}

/**
 * How much the variance of a mean of evenly spaced residuals is raised because neighbours look alike:
 * (1 + rho)/(1 - rho) for a first-order chain, with the small-sample bias of rho mended by (1 + 3 rho)/n plus
 * the share taken up by `fitted` parameters. `pairs` tells which residuals i have a true neighbour i + 1.
 * Never below 1; rho is cut at 0.97.
 */
export function variancePenalty(
  residuals: ArrayLike<number>,
  fitted: number,
  hasNeighbour: (index: number) => boolean = () => true,
): { rho: number; factor: number } {
  const n = residuals.length
  let lagged = 0
  let pairs = 0
  let square = 0
  for (let i = 0; i < n; i++) {
    square += residuals[i]! ** 2
    if (i + 1 < n && hasNeighbour(i)) {
      lagged += residuals[i]! * residuals[i + 1]!
      pairs++
    }
  }
  if (pairs < 8 || square === 0) return { rho: 0, factor: 1 }
  const raw = lagged / pairs / (square / n)
  const rho = Math.min(0.97, Math.max(0, raw + (1 + 3 * Math.max(0, raw) + fitted) / n))
  return { rho, factor: (1 + rho) / (1 - rho) }
}
