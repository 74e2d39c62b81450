/**
 * Where a bake left its limits or its plan: stretches of time with what was found and what was allowed. Pure, so that the
 * same series always gives the same deviations, whoever asks and how often. Times in ms UTC, temperatures in °C.
 */
import type { DeviationKind } from './planning.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000

/** Values of one step of time along the tube; null where nothing usable is known. */
export interface BakeStep {
  at: number
  /** Lowest, middle and highest of the thermocouples that said something. */
  minC: number | null
  medianC: number | null
  maxC: number | null
  pressurePa: number | null
  supplyAmps: number | null
}

/** The planned course: what the setpoint is at an instant, and what the plan promises. */
export interface Planned {
  setpointC: (at: number) => number | null
  heatingFrom: number
  soakFrom: number
  soakUntil: number
}

export interface DeviationLimits {
  toleranceC: number | null
  spreadC: number | null
  rateKH: number | null
  holdPa: number | null
}

export interface Deviation {
  kind: DeviationKind
  from: number
  /** Null while it lasts. */
  to: number | null
  detail: string
}

/** A condition must hold this long before it counts, and be away as long before it is over. */
const SETTLE_MS = 10 * MINUTE_MS
/** Along the ramp the tube may be uneven a little more than at rest (common practice, no source). */
const RAMP_SPREAD_C = 30
const RAMP_GRACE_MS = 2 * HOUR_MS
const RATE_WINDOW_MS = 30 * MINUTE_MS
const RATE_MARGIN_KH = 2

interface Excess {
  value: number
  limit: number
}

/**
 * All deviations of a bake so far, oldest first.
 *
 * @param steps oldest first, equally spaced or not
 * @param pressureText how a pressure is written for people
 */
export function deviationsOf(
  steps: readonly BakeStep[],
  planned: Planned,
  limits: DeviationLimits,
  pressureText: (pa: number) => string,
): Deviation[] {
  const { toleranceC, spreadC, rateKH, holdPa } = limits
  const hot = (at: number) => at >= planned.heatingFrom
  const soaking = (at: number) => at >= planned.soakFrom && at < planned.soakUntil
  const degrees = (value: number) => `${value.toFixed(0)} °C`
  const found = [
    ...stretches(
      steps,
      'temperature',
      (step) => {
        const setpoint = planned.setpointC(step.at)
        if (toleranceC === null || setpoint === null || step.maxC === null || !hot(step.at)) return null
        return { value: step.maxC, limit: setpoint + toleranceC }
      },
      (worst) => `Hottest point ${degrees(worst.value)}, allowed ${degrees(worst.limit)}`,
    ),
    ...stretches(
      steps,
      'temperature',
      (step) => {
        const setpoint = planned.setpointC(step.at)
        if (toleranceC === null || setpoint === null || step.medianC === null || !soaking(step.at))
          return null
        return { value: -step.medianC, limit: -(setpoint - toleranceC) }
      },
      (worst) =>
        `Median of the tube ${degrees(-worst.value)} in the soak, at least ${degrees(-worst.limit)} wanted`,
    ),
    ...stretches(
      steps,
      'spread',
      (step) => {
        if (spreadC === null || step.minC === null || step.maxC === null || !hot(step.at)) return null
        const early = step.at < planned.heatingFrom + RAMP_GRACE_MS
        return { value: step.maxC - step.minC, limit: early ? Math.max(spreadC, RAMP_SPREAD_C) : spreadC }
      },
      (worst) => `Spread along the tube ${degrees(worst.value)}, allowed ${degrees(worst.limit)}`,
    ),
    ...stretches(
      steps,
      'ramp-rate',
      (step, index) => {
        if (rateKH === null || step.at < planned.heatingFrom || step.at >= planned.soakFrom) return null
        const rate = rateAt(steps, index)
        return rate === null ? null : { value: rate, limit: rateKH + RATE_MARGIN_KH }
      },
      (worst) =>
        `The tube climbed ${worst.value.toFixed(1)} °C/h over half an hour, planned ${(worst.limit - RATE_MARGIN_KH).toFixed(0)} °C/h`,
    ),
    ...stretches(
      steps,
      'pressure',
      (step) => {
        if (holdPa === null || step.pressurePa === null || !hot(step.at)) return null
        return { value: step.pressurePa, limit: holdPa }
      },
      (worst) =>
        `Pressure ${pressureText(worst.value)}, the ramp is to be held above ${pressureText(worst.limit)}`,
    ),
    ...stretches(
      steps,
      'supply',
      (step) => {
        if (step.supplyAmps === null || !soaking(step.at)) return null
        return { value: -step.supplyAmps, limit: -LEAST_AMPS }
      },
      () => 'The supply gave no current during the soak',
    ),
  ]
  return found.sort((a, b) => a.from - b.from || a.kind.localeCompare(b.kind))
}

/** Below this a supply set counts as off, A. */
const LEAST_AMPS = 5

/** Climb over the half hour that ends at a step, °C/h; null when its beginning isn't known. */
function rateAt(steps: readonly BakeStep[], index: number): number | null {
  const here = steps[index]
  if (here === undefined || here.medianC === null) return null
  for (let back = index - 1; back >= 0; back--) {
    const before = steps[back]
    if (before === undefined) return null
    const apart = here.at - before.at
    if (apart > 1.5 * RATE_WINDOW_MS) return null
    if (apart >= RATE_WINDOW_MS && before.medianC !== null) {
      return ((here.medianC - before.medianC) / apart) * HOUR_MS
    }
  }
  return null
}

/** Stretches in which a value lay above its limit; a step that cannot be judged neither begins nor ends one. */
function stretches(
  steps: readonly BakeStep[],
  kind: DeviationKind,
  judge: (step: BakeStep, index: number) => Excess | null,
  words: (worst: Excess) => string,
): Deviation[] {
  const found: Deviation[] = []
  let from: number | null = null
  let worst: Excess | null = null
  let goodSince: number | null = null
  let lastBad = 0
  const close = (to: number | null) => {
    if (from !== null && worst !== null && (to ?? lastBad) - from >= SETTLE_MS) {
      found.push({ kind, from, to, detail: words(worst) })
    }
    from = null
    worst = null
    goodSince = null
  }
  for (const [index, step] of steps.entries()) {
    const excess = judge(step, index)
    if (excess === null) continue
    if (excess.value > excess.limit) {
      if (from === null) from = step.at
      if (worst === null || excess.value - excess.limit > worst.value - worst.limit) worst = excess
      goodSince = null
      lastBad = step.at
    } else if (from !== null) {
      goodSince ??= step.at
      if (step.at - goodSince >= SETTLE_MS) close(goodSince)
    }
  }
  if (goodSince !== null) close(goodSince)
  else close(null)
  return found
}

/** Hours in which the tube's median lay below the band, from the start of the soak on: they do not count as soak. */
export function hoursBelowBand(steps: readonly BakeStep[], soakFrom: number, lowestC: number): number {
  let lost = 0
  for (const [index, step] of steps.entries()) {
    const next = steps[index + 1]
    if (next === undefined || step.at < soakFrom || step.medianC === null) continue
    if (step.medianC < lowestC) lost += next.at - step.at
  }
  return lost / HOUR_MS
}
