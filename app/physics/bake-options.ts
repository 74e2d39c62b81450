/** The choice of a bake: for every temperature the hold that meets the target, its time, energy and power, and no worse twins. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { type BakeOutcome, holdToMeet } from './bake.ts'
import { ZERO_CELSIUS_K } from './constants.ts'
import type { SegmentModel } from './segment-gas.ts'
import { bakeEnergyPerM, type HeatedTube, holdPower, rampPower } from './thermal.ts'

const HOUR_S = 3600

export interface BakeQuestion {
  model: SegmentModel
  /** Place whose reading must meet the target, m from the start of the segment. */
  atM: number
  /** Nitrogen-equivalent target after cooling, Pa. */
  targetPa: number
  tube: HeatedTube
  /** Coolest and hottest bake to be looked at, degrees Celsius, and the step between. */
  coolestC: number
  hottestC: number
  stepC?: number
  upKH: number
  downKH?: number
  /** Power the supply gives to the whole segment, W; no cap without it. */
  powerCapW?: number
  /** The heaters stay on to slow the way down; off unless given. */
  heatedDown?: boolean
}

export interface BakeOption {
  celsius: number
  holdHours: number
  /** From the first kelvin up to the last one down, h. */
  totalHours: number
  energyJ: number
  /** Highest power on the way, at the end of the climb, W. */
  peakW: number
  holdW: number
  outcome: BakeOutcome
}

export interface BakeChoice {
  /** Options that no other one beats in temperature, time and energy at once, coolest first. */
  options: BakeOption[]
  /** Temperatures left out, with the reason. */
  left: { celsius: number; reason: 'target-out-of-reach' | 'over-power-cap' | 'beaten' }[]
}

/** All bakes on the grid that meet the target within the power cap, the beaten ones named apart. */
export function bakeChoice(question: BakeQuestion): BakeChoice {
  const { coolestC, hottestC, stepC = 5, powerCapW = Infinity } = question
  requirePositive('stepC', stepC)
  requireWithin('hottestC', hottestC, coolestC, 1000)
  requireWithin('number of temperatures', (hottestC - coolestC) / stepC, 0, 10_000)
  if (question.powerCapW !== undefined) requirePositive('powerCapW', powerCapW)
  requireWithin('coolestC', coolestC, question.model.temperatureK - ZERO_CELSIUS_K, hottestC)
  const met: BakeOption[] = []
  const left: BakeChoice['left'] = []
  for (let i = 0; coolestC + i * stepC <= hottestC + 1e-9; i++) {
    const celsius = coolestC + i * stepC
    const option = optionAt(question, celsius)
    if (!option) left.push({ celsius, reason: 'target-out-of-reach' })
    else if (option.peakW > powerCapW) left.push({ celsius, reason: 'over-power-cap' })
    else met.push(option)
  }
  const options = met.filter((one) => !met.some((other) => beats(other, one)))
  for (const one of met) if (!options.includes(one)) left.push({ celsius: one.celsius, reason: 'beaten' })
  left.sort((a, b) => a.celsius - b.celsius)
  return { options, left }
}

function optionAt(question: BakeQuestion, celsius: number): BakeOption | null {
  const { model, atM, targetPa, tube, upKH, downKH = upKH, heatedDown = false } = question
  const bakeK = celsius + ZERO_CELSIUS_K
  const found = holdToMeet(model, { bakeK, upKH, downKH }, targetPa, atM)
  if (!found) return null
  const rise = bakeK - model.temperatureK
  const rateKS = upKH / HOUR_S
  const up = bakeEnergyPerM(tube, {
    fromK: model.temperatureK,
    toK: bakeK,
    rateKS,
    holdSeconds: found.holdHours * HOUR_S,
  })
  return {
    celsius,
    holdHours: found.holdHours,
    totalHours: found.holdHours + rise / upKH + rise / downKH,
    energyJ:
      model.lengthM * (up + (heatedDown ? downEnergyPerM(tube, bakeK, model.temperatureK, downKH) : 0)),
    peakW: model.lengthM * rampPower(tube, bakeK, rateKS),
    holdW: model.lengthM * holdPower(tube, bakeK),
    outcome: found.outcome,
  }
}

/** Heat that must still be given on a way down slower than free cooling, J/m; where the tube cools by itself, none. */
function downEnergyPerM(tube: HeatedTube, fromK: number, toK: number, downKH: number): number {
  const steps = 200
  const dt = ((fromK - toK) / downKH / steps) * HOUR_S
  let energy = 0
  for (let i = 0; i < steps; i++) {
    const kelvin = fromK - ((i + 0.5) / steps) * (fromK - toK)
    energy += Math.max(0, rampPower(tube, kelvin, -downKH / HOUR_S)) * dt
  }
  return energy
}

/** One option beats another when it is nowhere worse and somewhere better; a cooler bake is kinder to every part. */
function beats(one: BakeOption, other: BakeOption): boolean {
  const noWorse =
    one.celsius <= other.celsius && one.totalHours <= other.totalHours && one.energyJ <= other.energyJ
  const better =
    one.celsius < other.celsius || one.totalHours < other.totalHours || one.energyJ < other.energyJ
  return noWorse && better
}
