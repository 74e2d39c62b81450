/**
 * Temperature along a heated tube: heat flows in the wall, is set free in it, and leaks out evenly and at cold parts
 * (ports, supports, flanges). Finite volumes about evenly spaced nodes, second-order L-stable steps in time.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'
import { steelConductivity } from './steel.ts'
import { type HeatedTube, heatCapacityPerM, lossPerMK, wallSection } from './thermal.ts'

export interface HeatedLine {
  tube: HeatedTube
  lengthM: number
  /** Number of intervals between nodes. */
  intervals: number
  startK: number
  /** Ends held at a temperature (a flange on a cold valve); an end left out passes no heat. */
  leftK?: number
  rightK?: number
  /** Parts that lose heat and store it beyond the tube itself, each given to its nearest node. */
  parts?: readonly { atM: number; lossWK: number; capacityJK: number }[]
}

export interface LineHistory {
  positionsM: Float64Array
  /** Temperatures along the line at each output time, K. */
  kelvin: Float64Array[]
}

const GAMMA = 1 - Math.SQRT1_2

/**
 * March the line to every one of `outputSeconds` (ascending, from 0). `powerWM` gives the heat set free per metre at a
 * time and local temperature. `stepSeconds` bounds the step. Throws where a temperature leaves the range of the steel.
 */
export function marchLine(
  line: HeatedLine,
  powerWM: (seconds: number, kelvin: number) => number,
  outputSeconds: readonly number[],
  stepSeconds = 600,
): LineHistory {
  requireWithin('startK', line.startK, 200, 1300)
  requirePositive('lengthM', line.lengthM)
  requireWithin('intervals', line.intervals, 2, 20_000)
  requirePositive('stepSeconds', stepSeconds)
  const n = line.intervals + 1
  const state = stateOf(line, n)
  const kelvin: Float64Array[] = []
  let now = 0
  for (const until of outputSeconds) {
    requireWithin('outputSeconds', until, now, 1e10)
    const steps = Math.ceil((until - now) / stepSeconds)
    const h = steps === 0 ? 0 : (until - now) / steps
    for (let i = 0; i < steps; i++) {
      step(state, line, powerWM, now + i * h, h)
    }
    now = until
    kelvin.push(state.T.slice())
  }
  return {
    positionsM: Float64Array.from({ length: n }, (_, i) => (i * line.lengthM) / line.intervals),
    kelvin,
  }
}

interface LineState {
  n: number
  spacing: number
  T: Float64Array
  /** Metres of tube that belong to each node. */
  metres: Float64Array
  partLoss: Float64Array
  partCapacity: Float64Array
  capacity: Float64Array
  link: Float64Array
  loss: Float64Array
  diagonal: Float64Array
  right: Float64Array
  heat: Float64Array
  first: Float64Array
}

function stateOf(line: HeatedLine, n: number): LineState {
  const spacing = line.lengthM / line.intervals
  const metres = new Float64Array(n).fill(spacing)
  metres[0] = spacing / 2
  metres[n - 1] = spacing / 2
  const partLoss = new Float64Array(n)
  const partCapacity = new Float64Array(n)
  for (const part of line.parts ?? []) {
    requireWithin('parts.atM', part.atM, 0, line.lengthM)
    const node = Math.round(part.atM / spacing)
    partLoss[node]! += part.lossWK
    partCapacity[node]! += part.capacityJK
  }
  const T = new Float64Array(n).fill(line.startK)
  if (line.leftK !== undefined) T[0] = line.leftK
  if (line.rightK !== undefined) T[n - 1] = line.rightK
  const blank = (): Float64Array => new Float64Array(n)
  return {
    n,
    spacing,
    T,
    metres,
    partLoss,
    partCapacity,
    capacity: blank(),
    link: blank(),
    loss: blank(),
    diagonal: blank(),
    right: blank(),
    heat: blank(),
    first: blank(),
  }
}

/** One step of Alexander's two-stage method; properties of the steel are those at the start of the step. */
function step(
  s: LineState,
  line: HeatedLine,
  powerWM: (seconds: number, kelvin: number) => number,
  now: number,
  h: number,
): void {
  const { n, T } = s
  const section = wallSection(line.tube)
  const evenLoss = lossPerMK(line.tube)
  for (let i = 0; i < n; i++) {
    s.capacity[i] = heatCapacityPerM(line.tube, T[i]!) * s.metres[i]! + s.partCapacity[i]!
    s.loss[i] = evenLoss * s.metres[i]! + s.partLoss[i]!
    if (i + 1 < n) s.link[i] = (steelConductivity((T[i]! + T[i + 1]!) / 2) * section) / s.spacing
  }
  const stage = (seconds: number, base: Float64Array): void => {
    for (let i = 0; i < n; i++) {
      s.heat[i] = powerWM(seconds, T[i]!) * s.metres[i]! + s.loss[i]! * line.tube.ambientK
    }
    solveStage(s, line, GAMMA * h, base)
  }
  s.first.set(T)
  stage(now + GAMMA * h, T)
  // Second stage starts from T + (1 - gamma) h dT/dt of the first: slope recovered from the first stage itself.
  for (let i = 0; i < n; i++) {
    const slope = (s.right[i]! - s.first[i]!) / (GAMMA * h)
    s.first[i]! += (1 - GAMMA) * h * slope
  }
  stage(now + h, s.first)
  T.set(s.right)
  for (let i = 0; i < n; i++) {
    if (!(T[i]! >= 200 && T[i]! <= 1300)) {
      throw new PhysicsError(`temperature of node ${i}`, T[i]!, '200 to 1300 K; check power and loss')
    }
  }
}

// (C/g + losses + links) T = C/g base + heat, by elimination along the chain; the answer lands in s.right.
function solveStage(s: LineState, line: HeatedLine, g: number, base: Float64Array): void {
  const { n, diagonal, right, link } = s
  for (let i = 0; i < n; i++) {
    const before = i > 0 ? link[i - 1]! : 0
    const after = i + 1 < n ? link[i]! : 0
    diagonal[i] = s.capacity[i]! / g + s.loss[i]! + before + after
    right[i] = (s.capacity[i]! / g) * base[i]! + s.heat[i]!
  }
  const leftHeld = line.leftK !== undefined
  const rightHeld = line.rightK !== undefined
  if (leftHeld) {
    diagonal[0] = 1
    right[0] = line.leftK!
  }
  for (let i = 1; i < n; i++) {
    if (i === n - 1 && rightHeld) {
      diagonal[i] = 1
      right[i] = line.rightK!
      break
    }
    const pull = i === 1 && leftHeld ? 0 : link[i - 1]!
    if (i === 1 && leftHeld) right[i]! += link[0]! * line.leftK!
    else {
      right[i]! += (pull / diagonal[i - 1]!) * right[i - 1]!
      diagonal[i]! -= (pull / diagonal[i - 1]!) * pull
    }
  }
  const last = n - 1
  right[last] = right[last]! / diagonal[last]!
  for (let i = last - 1; i >= 0; i--) {
    if (i === 0 && leftHeld) break
    right[i] = (right[i]! + link[i]! * right[i + 1]!) / diagonal[i]!
  }
}
