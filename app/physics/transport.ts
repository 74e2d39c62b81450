/**
 * Pressure of gases along a tube over hours to months. Finite volumes in conservation form, stepped by Alexander's
 * two-stage L-stable Runge-Kutta rule (SIAM J. Numer. Anal. 14 (1977) 1006, from memory): steps may grow from
 * milliseconds to days without the fast modes ringing. Every stage is one balance of molecules, so mass closes to
 * what Newton's method leaves. Gases do not meet in molecular flow and are solved one after the other.
 */
import { requireFinite, requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'
import { gasBalance } from './gas-balance.ts'
import type { GasRun, ThermalState, ValveMotion } from './gas-run.ts'
import { factorTree, solveTree, treeMatrix } from './tree-matrix.ts'
import type { TubeMesh } from './tube.ts'

/** Root of 2 g2 - 4 g + 1 that makes the rule L-stable. */
const GAMMA = 1 - Math.SQRT1_2
/** What the rest of the step makes of the first stage's gain, (1 - g)/g. */
const REST = (1 - GAMMA) / GAMMA
const FIRST_STEP_S = 1e-3
const NEWTON_LIMIT = 12
/** Below this pressure nothing is measured or meant: errors there count against it, and a linear gas may reach 0, Pa. */
const NO_PRESSURE_PA = 1e-20
/** Newton stops once no pressure moved by more than this share: what is left then is about its square. */
const NEWTON_SHARE = 1e-5
/** Share of its capacity that a getter may take up in one step, since its speed is that of the step's start. */
const FILL_SHARE = 0.02
/** Steps grow at most so many times at once. */
const GROWTH = 8
/** A guess of the next pressures goes at most this far in ln p. */
const GUESS_LIMIT = 2

export type TransportFailure = 'cancelled' | 'step-too-small' | 'too-many-steps'

/** The solver stopped before the end: why, and at which time. No pressure it gives out is ever not a number. */
export class TransportError extends Error {
  readonly reason: TransportFailure
  readonly atS: number

  constructor(reason: TransportFailure, atS: number, message: string) {
    super(message)
    this.name = 'TransportError'
    this.reason = reason
    this.atS = atS
  }
}

export interface TransportRun {
  readonly mesh: TubeMesh
  readonly thermal: ThermalState
  readonly valves?: readonly ValveMotion[]
  readonly gases: readonly GasRun[]
  readonly fromS: number
  /** Ascending times after `fromS` to keep the pressures at, s. */
  readonly outputsS: readonly number[]
  /** Local error allowed per step as a share of the pressure; 1e-3 gives about 0.1 %. */
  readonly tolerance?: number
  readonly maxSteps?: number
  /** Asked every few steps; true stops the run with a `TransportError`. */
  readonly cancelled?: () => boolean
  /** Told the share of the run that is done, 0 to 1. */
  readonly onProgress?: (share: number) => void
}

export interface GasHistory {
  /** Pressures in Pa: `pressurePa[k]` at `outputsS[k]`, by node. */
  readonly pressurePa: Float64Array[]
  /** Molecules the pumps took, and wall and leaks gave, since the start, at each output. */
  readonly pumped: Float64Array
  readonly released: Float64Array
  /** Molecules in the gas and held by the isotherm at each output. */
  readonly held: Float64Array
  /** Worst share by which molecules failed to add up over the run. */
  readonly massError: number
  readonly steps: number
  readonly rejected: number
  readonly solves: number
}

/**
 * Runs every gas from `fromS` to the last output. Throws `TransportError` when cancelled or when no step is small
 * enough, and `PhysicsError` for arguments that cannot be used.
 */
export function runTransport(run: TransportRun): GasHistory[] {
  const slices = transportSlices(run)
  let slice = slices.next()
  while (!slice.done) slice = slices.next()
  return slice.value
}

/**
 * The same run handed over in slices of a few steps each, for a thread that must hear messages between them: take the
 * next slice to go on, take none to give the run up. The histories are what the last slice returns.
 */
export function* transportSlices(run: TransportRun): Generator<undefined, GasHistory[], undefined> {
  requireRun(run)
  const histories: GasHistory[] = []
  for (const [index, gas] of run.gases.entries()) {
    const report = run.onProgress
    histories.push(yield* runGas(run, gas, report && ((share) => report((index + share) / run.gases.length))))
  }
  return histories
}

function requireRun(run: TransportRun): void {
  requireFinite('fromS', run.fromS)
  requireWithin('tolerance', run.tolerance ?? 1e-3, 1e-8, 0.1)
  requireWithin('number of outputs', run.outputsS.length, 1, 1e6)
  let before = run.fromS
  for (const atS of run.outputsS) {
    if (!(atS > before)) throw new PhysicsError('time of an output, s', atS, `a time after ${before}`)
    before = atS
  }
}

/** Times at which something switches, so that the step must start anew, and corners it must only land on. */
function stops(run: TransportRun, gas: GasRun): { atS: number; restart: boolean }[] {
  const switches = new Set<number>()
  for (const valve of run.valves ?? []) for (const step of valve.open) switches.add(step.fromS)
  for (const pump of gas.pumps) for (const step of pump.curve) switches.add(step.fromS)
  for (const leak of gas.leaks ?? []) for (const step of leak.loadPaM3S) switches.add(step.fromS)
  const landings = new Set<number>(run.outputsS)
  for (const programme of run.thermal.programmes) for (const atS of programme.cornersS) landings.add(atS)
  const endS = run.outputsS.at(-1)!
  return [...new Set([...switches, ...landings])]
    .filter((atS) => atS > run.fromS && atS <= endS)
    .sort((a, b) => a - b)
    .map((atS) => ({ atS, restart: switches.has(atS) }))
}

function* runGas(
  run: TransportRun,
  gas: GasRun,
  onProgress?: (share: number) => void,
): Generator<undefined, GasHistory, undefined> {
  const { mesh } = run
  const n = mesh.count
  const tolerance = run.tolerance ?? 1e-3
  const maxSteps = run.maxSteps ?? 200_000
  const balance = gasBalance(mesh, run.thermal, run.valves ?? [], gas, run.fromS)
  const matrix = treeMatrix(mesh.parent)
  const now = new Float64Array(n)
  const first = new Float64Array(n)
  const second = new Float64Array(n)
  const before = new Float64Array(n)
  const target = new Float64Array(n)
  const amount = new Float64Array(n)
  const slope = new Float64Array(n)
  const rate = new Float64Array(n)
  const gained = new Float64Array(n)
  const change = new Float64Array(n)
  const trend = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    now[i] = typeof gas.startPa === 'number' ? gas.startPa : gas.startPa[i]!
    requirePositive('startPa', now[i]!)
  }

  const outputs = run.outputsS.length
  const history = {
    pressurePa: Array.from({ length: outputs }, () => new Float64Array(n)),
    pumped: new Float64Array(outputs),
    released: new Float64Array(outputs),
    held: new Float64Array(outputs),
  }
  let pumped = 0
  let released = 0
  let massError = 0
  let steps = 0
  let rejected = 0
  let solves = 0

  // Solves U(p) = base + weight * rate(p) at the prepared time, from the pressures in `p`; leaves U in `amount`.
  function solveStage(p: Float64Array, base: Float64Array, weight: number): boolean {
    return balance.linear ? solveLinear(p, base, weight) : solveNewton(p, base, weight)
  }

  // One factored matrix does for every stage of the same length while nothing but the sources changes.
  function solveLinear(p: Float64Array, base: Float64Array, weight: number): boolean {
    if (weight !== factoredWeight || balance.version() !== factoredVersion) {
      balance.storage(p, amount, slope)
      matrix.excess.set(slope)
      balance.flow(p, rate, matrix, weight)
      factorTree(matrix)
      factoredWeight = weight
      factoredVersion = balance.version()
    }
    const { source } = balance
    for (let i = 0; i < n; i++) p[i] = base[i]! + weight * source[i]!
    solveTree(matrix, p)
    solves++
    for (let i = 0; i < n; i++) {
      if (p[i]! <= 0 && p[i]! > -NO_PRESSURE_PA) p[i] = 0
      else if (!(p[i]! > 0 && p[i]! < Infinity)) return false
      amount[i] = slope[i]! * p[i]!
    }
    return true
  }

  function solveNewton(p: Float64Array, base: Float64Array, weight: number): boolean {
    for (let iteration = 0; iteration < NEWTON_LIMIT; iteration++) {
      balance.storage(p, amount, slope)
      matrix.excess.set(slope)
      balance.flow(p, rate, matrix, weight)
      for (let i = 0; i < n; i++) change[i] = base[i]! + weight * rate[i]! - amount[i]!
      factorTree(matrix)
      solveTree(matrix, change)
      solves++
      let largest = 0
      for (let i = 0; i < n; i++) {
        const share = change[i]! / p[i]!
        if (Math.abs(share) > largest) largest = Math.abs(share)
        // Falling far, storage goes like ln p, so the same step is taken in ln p, at most three e-foldings at once.
        if (share > -0.8) p[i]! += change[i]!
        else p[i]! *= Math.exp(Math.max(share, -3))
        if (!(p[i]! > 0 && p[i]! < Infinity)) return false
      }
      if (largest < NEWTON_SHARE) {
        balance.storage(p, amount, slope)
        return true
      }
    }
    return false
  }

  // Goes on in ln p as the last step did: saves Newton an iteration. A linear gas needs no guess.
  function guess(into: Float64Array, from: Float64Array, h: number): void {
    if (balance.linear) return
    into.set(from)
    for (let i = 0; i < n; i++) {
      into[i]! *= Math.exp(Math.min(GUESS_LIMIT, Math.max(-GUESS_LIMIT, trend[i]! * h)))
    }
  }

  // One step of length h from t; leaves the new pressures in `second` and gives the error as a share.
  function tryStep(t: number, h: number): number {
    const weight = GAMMA * h
    balance.begin(now, h)
    balance.prepare(t + weight)
    guess(first, now, weight)
    if (!solveStage(first, before, weight)) return Infinity
    for (let i = 0; i < n; i++) {
      gained[i] = amount[i]! - before[i]!
      target[i] = before[i]! + REST * gained[i]!
    }
    stagePumped = (1 - GAMMA) * h * balance.pumpTotal(first)
    stageReleased = (1 - GAMMA) * h * balance.sourceTotal()
    balance.take(first, (1 - GAMMA) * h)
    balance.prepare(t + h)
    guess(second, now, h)
    if (!solveStage(second, target, weight)) return Infinity
    stagePumped += weight * balance.pumpTotal(second)
    stageReleased += weight * balance.sourceTotal()
    if (balance.take(second, weight) > FILL_SHARE) return Infinity
    // Difference to the embedded first-order rule, damped by the factored matrix so that stiff modes do not count.
    for (let i = 0; i < n; i++) change[i] = amount[i]! - before[i]! - gained[i]! / GAMMA
    solveTree(matrix, change)
    let error = 0
    for (let i = 0; i < n; i++) {
      const scale = second[i]! + NO_PRESSURE_PA
      if (Math.abs(change[i]!) <= error * scale) continue
      error = Math.abs(change[i]!) / scale
      if (!(error < Infinity)) return Infinity
    }
    return error
  }

  let factoredWeight = Number.NaN
  let factoredVersion = -1
  let stagePumped = 0
  let stageReleased = 0
  let t = run.fromS
  let step = FIRST_STEP_S
  balance.enter(t)
  balance.prepare(t)
  balance.storage(now, before, slope)
  let held = total(before)
  const initial = held
  let output = 0
  const endS = run.outputsS.at(-1)!
  for (const stop of stops(run, gas)) {
    while (t < stop.atS) {
      const left = stop.atS - t
      const h = step >= left ? left : left < 2 * step ? left / 2 : step
      if ((steps + rejected) % 16 === 0) {
        yield
        if (run.cancelled?.()) {
          throw new TransportError('cancelled', t, `The run was cancelled ${t} s into the programme`)
        }
      }
      if (steps + rejected >= maxSteps) {
        throw new TransportError('too-many-steps', t, `More than ${maxSteps} steps were needed by ${t} s`)
      }
      const error = tryStep(t, h)
      if (!(error <= tolerance)) {
        rejected++
        step = h * (error === Infinity ? 0.25 : Math.max(0.2, 0.85 * Math.sqrt(tolerance / error)))
        if (step < 1e-12 * Math.max(1, Math.abs(t))) {
          throw new TransportError(
            'step-too-small',
            t,
            `No step from ${t} s on meets the tolerance ${tolerance}`,
          )
        }
        continue
      }
      steps++
      t = h === left ? stop.atS : t + h
      if (!balance.linear) for (let i = 0; i < n; i++) trend[i] = Math.log(second[i]! / now[i]!) / h
      now.set(second)
      balance.settle()
      before.set(amount)
      pumped += stagePumped
      released += stageReleased
      held = total(before)
      massError = Math.max(
        massError,
        Math.abs(held + pumped - released - initial) / Math.max(initial, pumped, released, held),
      )
      const grown = h * Math.min(GROWTH, 0.85 * Math.sqrt(tolerance / Math.max(error, 1e-300)))
      // A step cut short by a stop says nothing against the longer one planned.
      step = h < step ? Math.max(step, grown) : grown
      onProgress?.((t - run.fromS) / (endS - run.fromS))
    }
    if (stop.atS === run.outputsS[output]) {
      history.pressurePa[output]!.set(now)
      history.pumped[output] = pumped
      history.released[output] = released
      history.held[output] = held
      output++
    }
    if (stop.restart) {
      balance.enter(t)
      trend.fill(0)
      step = FIRST_STEP_S
    }
  }
  return { ...history, massError, steps, rejected, solves }
}

function total(values: Float64Array): number {
  let sum = 0
  for (let i = 0; i < values.length; i++) sum += values[i]!
  return sum
}
