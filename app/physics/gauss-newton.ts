/**
 * Levenberg and Marquardt's damped descent for a few parameters, on an analytic gradient and a positive
 * (Gauss-Newton or expected-information) curvature. The npm package for curve fitting takes its slopes by finite
 * differences and knows no censored points, so only its linear algebra (ml-matrix) is used; the test compares
 * the two on uncensored data.
 */
import { CholeskyDecomposition, Matrix } from 'ml-matrix'
import { PhysicsError } from './errors.ts'

/** Value to be made small, its slope and a positive curvature (row-major, n x n) at one set of parameters. */
export interface Landscape {
  cost: number
  gradient: Float64Array
  curvature: Float64Array
}

export interface DescentOptions {
  lower?: readonly number[]
  upper?: readonly number[]
  maxIterations?: number
  /** Stop when the damped step promises less than this share of (1 + |cost|). */
  tolerance?: number
}

export interface DescentResult extends Landscape {
  parameters: number[]
  iterations: number
  converged: boolean
}

/** Minimise `landscape` from `start`. Parameters stay inside [lower, upper]; the cost never rises. */
export function descend(
  landscape: (parameters: readonly number[]) => Landscape,
  start: readonly number[],
  options: DescentOptions = {},
): DescentResult {
  const { maxIterations = 200, tolerance = 1e-14 } = options
  const clamp = (p: readonly number[]): number[] =>
    p.map((v, i) => Math.min(options.upper?.[i] ?? Infinity, Math.max(options.lower?.[i] ?? -Infinity, v)))
  let parameters = clamp(start)
  let here = landscape(parameters)
  if (!Number.isFinite(here.cost)) {
    throw new PhysicsError('start', Number.NaN, 'a starting point where the cost is a finite number')
  }
  let damping = 1e-3
  let iterations = 0
  let quiet = 0
  while (iterations < maxIterations) {
    iterations++
    const step = dampedStep(here, damping)
    const there = step && clamp(parameters.map((v, i) => v + step[i]!))
    const next = there && landscape(there)
    if (!there || !next || !(next.cost <= here.cost)) {
      damping *= 8
      if (damping > 1e14) return { ...here, parameters, iterations, converged: true }
      continue
    }
    const gain = here.cost - next.cost
    parameters = there
    here = next
    damping = Math.max(damping / 6, 1e-12)
    quiet = gain <= tolerance * (1 + Math.abs(here.cost)) ? quiet + 1 : 0
    if (quiet >= 2) return { ...here, parameters, iterations, converged: true }
  }
  return { ...here, parameters, iterations, converged: false }
}

function dampedStep(at: Landscape, damping: number): number[] | null {
  const n = at.gradient.length
  const matrix = new Matrix(n, n)
  let scale = 0
  for (let i = 0; i < n; i++) scale = Math.max(scale, at.curvature[i * n + i]!)
  for (let i = 0; i < n; i++) {
    // Only the lower half is read: a b and b a may differ in the last digit, which the decomposition refuses.
    for (let j = 0; j <= i; j++) setBoth(matrix, i, j, at.curvature[i * n + j]!)
    const own = at.curvature[i * n + i]!
    matrix.set(i, i, own + damping * (own + 1e-12 * scale) + 1e-300)
  }
  const cholesky = new CholeskyDecomposition(matrix)
  if (!cholesky.isPositiveDefinite()) return null
  const right = Matrix.columnVector(Array.from(at.gradient, (g) => -g))
  const step = cholesky.solve(right).to1DArray()
  return step.every(Number.isFinite) ? step : null
}

function setBoth(matrix: Matrix, i: number, j: number, value: number): void {
  matrix.set(i, j, value)
  matrix.set(j, i, value)
}

/** Inverse of a symmetric positive matrix given row-major, or null when it is singular. */
export function invertPositive(curvature: Float64Array, size: number): Float64Array | null {
  // Scaled to a unit diagonal first: the parameters may differ in size by many decades.
  const scale = Float64Array.from({ length: size }, (_, i) => Math.sqrt(curvature[i * size + i]!))
  if (scale.some((s) => !(s > 0))) return null
  const matrix = new Matrix(size, size)
  for (let i = 0; i < size; i++) {
    for (let j = 0; j <= i; j++) setBoth(matrix, i, j, curvature[i * size + j]! / (scale[i]! * scale[j]!))
  }
  const cholesky = new CholeskyDecomposition(matrix)
  if (!cholesky.isPositiveDefinite()) return null
  const inverse = cholesky.solve(Matrix.eye(size))
  const result = new Float64Array(size * size)
  for (let i = 0; i < size; i++) {
    for (let j = 0; j < size; j++) result[i * size + j] = inverse.get(i, j) / (scale[i]! * scale[j]!)
  }
  return result.every(Number.isFinite) ? result : null
}
