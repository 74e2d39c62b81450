/**
 * Steady pressure along a tube in molecular flow. With a uniform source per metre the pressure is a parabola between
 * pumps, so balances over cells that meet half way between nodes are exact: a handful of nodes needs no finer mesh.
 */
import { requireFinite, requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'

export interface SteadyLine {
  readonly lengthM: number
  /** Specific conductance of the tube for this gas, m4/s. */
  readonly specific: number
  /** Gas given off per metre of tube, Pa m2/s. */
  readonly sourcePerM: number
  readonly pumps: readonly { readonly atM: number; readonly speedM3S: number }[]
  readonly leaks?: readonly { readonly atM: number; readonly loadPaM3S: number }[]
  /** Pieces one behind the other where the tube is not the same all along; they make up `lengthM`. */
  readonly pieces?: readonly { readonly lengthM: number; readonly specific: number }[]
}

/** Relative distance below which two positions along a tube are the same point. */
const SAME_POINT = 1e-9

/** Ends, pumps, leaks and the extra positions, sorted and each once, m. */
export function linePositions(line: SteadyLine, extraM: readonly number[] = []): number[] {
  requirePositive('lengthM', line.lengthM)
  const wanted = [0, line.lengthM, ...extraM]
  for (const pump of line.pumps) wanted.push(pump.atM)
  for (const leak of line.leaks ?? []) wanted.push(leak.atM)
  for (const position of wanted) requireWithin('position along the tube', position, 0, line.lengthM)
  wanted.sort((a, b) => a - b)
  // Measured from the last one kept, so that a crowd of near points cannot drift away from it.
  const kept: number[] = []
  for (const x of wanted) if (kept.length === 0 || x - kept.at(-1)! > SAME_POINT * line.lengthM) kept.push(x)
  return kept
}

/**
 * Steady pressures in Pa at the ascending `positionsM`, which must hold both ends, every pump and every leak (see
 * `linePositions`). A gas that comes in but is pumped nowhere has no steady pressure: that throws.
 */
export function steadyPressures(line: SteadyLine, positionsM: readonly number[]): Float64Array {
  requireFinite('sourcePerM', line.sourcePerM)
  requirePositive('specific', line.specific)
  const n = positionsM.length
  const sink = new Float64Array(n)
  const right = new Float64Array(n)
  const link = new Float64Array(n)
  for (let i = 0; i + 1 < n; i++) {
    const gap = positionsM[i + 1]! - positionsM[i]!
    const half = (line.sourcePerM * gap) / 2
    link[i] = 1 / resistanceBetween(line, positionsM[i]!, positionsM[i + 1]!)
    right[i]! += half
    right[i + 1]! += half
  }
  let speed = 0
  for (const pump of line.pumps) {
    requireWithin('speedM3S', pump.speedM3S, 0, 1e6)
    sink[nodeAt(line, positionsM, pump.atM)]! += pump.speedM3S
    speed += pump.speedM3S
  }
  for (const leak of line.leaks ?? []) {
    requireWithin('loadPaM3S', leak.loadPaM3S, 0, 1e6)
    right[nodeAt(line, positionsM, leak.atM)]! += leak.loadPaM3S
  }
  const load = right.reduce((sum, value) => sum + value, 0)
  if (load === 0) return new Float64Array(n)
  if (speed === 0) {
    throw new PhysicsError('speed of all pumps for this gas', 0, 'at least one pump that takes the gas')
  }
  return solveLine(sink, link, right)
}

// Integral of dx/c: between two points without a source the pressure falls by this times the flow, wherever pieces meet.
function resistanceBetween(line: SteadyLine, fromM: number, toM: number): number {
  if (!line.pieces) return (toM - fromM) / line.specific
  let sum = 0
  let start = 0
  for (const [i, piece] of line.pieces.entries()) {
    requirePositive(`pieces[${i}].specific`, piece.specific)
    requirePositive(`pieces[${i}].lengthM`, piece.lengthM)
    const end = start + piece.lengthM
    sum += Math.max(0, Math.min(toM, end) - Math.max(fromM, start)) / piece.specific
    start = end
  }
  if (Math.abs(start - line.lengthM) > SAME_POINT * line.lengthM) {
    throw new PhysicsError('sum of the pieces, m', start, `the length of the line, ${line.lengthM} m`)
  }
  return sum
}

function nodeAt(line: SteadyLine, positionsM: readonly number[], atM: number): number {
  const node = positionsM.findIndex((x) => Math.abs(x - atM) <= SAME_POINT * line.lengthM)
  if (node < 0)
    throw new PhysicsError('positionsM', atM, 'a list of positions with every pump and leak in it')
  return node
}

// Gauss elimination from the near end: what a node passes on is its pumping in series with the link, so nothing is
// ever subtracted and a pump a hair from the end costs no digits.
function solveLine(sink: Float64Array, link: Float64Array, right: Float64Array): Float64Array {
  const n = sink.length
  for (let i = 0; i + 1 < n; i++) {
    const passed = link[i]! / (link[i]! + sink[i]!)
    sink[i + 1]! += passed * sink[i]!
    right[i + 1]! += passed * right[i]!
  }
  right[n - 1]! /= sink[n - 1]!
  for (let i = n - 2; i >= 0; i--) right[i] = (right[i]! + link[i]! * right[i + 1]!) / (sink[i]! + link[i]!)
  return right
}

/** One stretch of tube with its pump at `lengthM` apart (periodic) or at one end, for the closed forms. */
export interface PumpedStretch {
  /** Gas given off per metre, q B, Pa m2/s. */
  readonly sourcePerM: number
  readonly specific: number
  readonly lengthM: number
  readonly speedM3S: number
}

// Refuses a stretch that cannot be.
function requireStretch({ sourcePerM, specific, lengthM, speedM3S }: PumpedStretch): void {
  requireWithin('sourcePerM', sourcePerM, 0, 1e9)
  requirePositive('specific', specific)
  requirePositive('lengthM', lengthM)
  requirePositive('speedM3S', speedM3S)
}

/** Pressure at `xM` from a pump when equal pumps stand every `lengthM`, q B (x (L - x)/(2c) + L/S), Pa. */
export function periodicPressure(stretch: PumpedStretch, xM: number): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  requireWithin('xM', xM, 0, lengthM)
  return sourcePerM * ((xM * (lengthM - xM)) / (2 * specific) + lengthM / speedM3S)
}

/** Mean pressure with equal pumps every `lengthM`, Pa. */
export function periodicMean(stretch: PumpedStretch): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  return sourcePerM * (lengthM ** 2 / (12 * specific) + lengthM / speedM3S)
}

/** Pressure at `xM` from the pump of a stretch pumped at one end and closed at the other, Pa. */
export function endPumpedPressure(stretch: PumpedStretch, xM: number): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  requireWithin('xM', xM, 0, lengthM)
  return sourcePerM * ((lengthM * xM - xM ** 2 / 2) / specific + lengthM / speedM3S)
}

/** Mean pressure of a stretch pumped at one end and closed at the other, Pa. */
export function endPumpedMean(stretch: PumpedStretch): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  return sourcePerM * (lengthM ** 2 / (3 * specific) + lengthM / speedM3S)
}

/** Pressure at `xM` of a stretch with the same pump at both ends, Pa. */
export function bothEndsPressure(stretch: PumpedStretch, xM: number): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  requireWithin('xM', xM, 0, lengthM)
  return sourcePerM * ((xM * (lengthM - xM)) / (2 * specific) + lengthM / (2 * speedM3S))
}

/**
 * Pressure at `xM` with pumping spread over the wall (`wallSpeed` in m2/s per metre) beside an end pump at 0 and a
 * closed end at `lengthM`, Pa.
 */
export function wallPumpedPressure(stretch: PumpedStretch, wallSpeed: number, xM: number): number {
  requireStretch(stretch)
  const { sourcePerM, specific, lengthM, speedM3S } = stretch
  requirePositive('wallSpeed', wallSpeed)
  requireWithin('xM', xM, 0, lengthM)
  const kappa = Math.sqrt(wallSpeed / specific)
  const far = sourcePerM / wallSpeed
  // Both sides of the fraction over e^(kappa L), or a long line would overflow.
  const twice = Math.exp(-2 * kappa * lengthM)
  const back = specific * kappa * (1 - twice) + speedM3S * (1 + twice)
  const here = Math.exp(-kappa * xM) + Math.exp(-kappa * (2 * lengthM - xM))
  return far - (speedM3S * far * here) / back
}

/**
 * Slowest time constant of an empty tube closed at one end with a pump at the other, s: kappa tan(kappa L) = S/c,
 * tau = 1/(D kappa2) with D = c/A. An infinite speed gives 4 L2/(pi2 D).
 */
export function slowestTime(
  specific: number,
  crossSectionM2: number,
  lengthM: number,
  speedM3S: number,
): number {
  requirePositive('specific', specific)
  requirePositive('crossSectionM2', crossSectionM2)
  requirePositive('lengthM', lengthM)
  if (!(speedM3S > 0)) throw new PhysicsError('speedM3S', speedM3S, 'a number above 0, or Infinity')
  let low = 0
  let high = Math.PI / 2
  if (speedM3S !== Infinity) {
    const wanted = (speedM3S * lengthM) / specific
    for (let i = 0; i < 200 && high - low > 1e-15; i++) {
      const middle = (low + high) / 2
      if (middle * Math.tan(middle) < wanted) low = middle
      else high = middle
    }
  }
  return lengthM ** 2 / ((specific / crossSectionM2) * high ** 2)
}
