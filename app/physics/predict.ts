/**
 * What a segment will do: pump-down in hours, the profile along it, and how long it or a bake takes to a target.
 *
 * The wall gives its gas slowly against the minutes that gas needs along a segment, so each gas stands at the steady
 * profile of the present outgassing: water on the plateau of its isotherm falls as 1/t everywhere alike, hydrogen
 * follows the age of the sheet. Pressures are nitrogen-equivalent, as an ion gauge shows them.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { molecularSpecific } from './conductance.ts'
import { BOLTZMANN } from './constants.ts'
import { PhysicsError } from './errors.ts'
import type { Gas } from './gases.ts'
import { nitrogenEquivalent } from './gauges.ts'
import { hydrogenDiffusivity, lowHydrogenRate, slabAtomFlux } from './hydrogen.ts'
import { linePositions, steadyPressures } from './steady.ts'
import {
  DEFAULT_WATER,
  WATER_FLOOR_PA,
  type WaterIsotherm,
  waterRateTime,
  waterScalePressure,
} from './water.ts'

const HOUR_S = 3600
/** Lead time of the 1/t law of water: the wall has been giving gas for a minute when high vacuum starts (own choice). */
const WATER_LEAD_S = 60
/** A target not reached in twenty years of pumping is not reached, h. */
const LONGEST_PUMPING_H = 20 * 8766
/** Nor does anyone hold a bake longer than a year, h. */
const LONGEST_HOLD_H = 8766

export interface SegmentModel {
  lengthM: number
  diameterM: number
  wallM: number
  /** Wall and gas temperature, K. */
  temperatureK: number
  /** Speeds at the tube per gas. A pump whose water speed is not given takes water as it takes nitrogen. */
  pumps: { atM: number; speedM3S: Partial<Record<Gas, number>> }[]
  /** Age in m2 is the integral of the diffusivity over the life of the steel, up to t = 0. */
  hydrogen:
    | { kind: 'diffusion'; c0PerM3: number; agedTauM2: number }
    | { kind: 'low-hydrogen'; qPaMS: number; atK: number }
  water: { state: 'unbaked'; capacityPerM2: number } | { state: 'baked'; floorPa: number }
  /** Leaks of air, taken as nitrogen: argon, which getters leave, would add a little. */
  airLeaks?: { atM: number; qPaM3S: number }[]
}

type ModelGas = 'H2O' | 'H2' | 'N2'

export interface PumpDownPrediction {
  hours: Float64Array
  n2EquivalentPa: Float64Array
  byGasPa: Record<ModelGas, Float64Array>
}

/**
 * Pressure at `atM` over hours since the start of high vacuum. Air that is still in the gas phase then leaves within
 * minutes and is not counted. Throws on a gas that comes in but is pumped nowhere.
 */
export function predictPumpDown(
  model: SegmentModel,
  options: { hours: readonly number[]; atM: number },
): PumpDownPrediction {
  requireModel(model)
  const at = pressuresAt(model, options.atM)
  const count = options.hours.length
  const result: PumpDownPrediction = {
    hours: Float64Array.from(options.hours),
    n2EquivalentPa: new Float64Array(count),
    byGasPa: { H2O: new Float64Array(count), H2: new Float64Array(count), N2: new Float64Array(count) },
  }
  for (const [i, hours] of options.hours.entries()) {
    requireWithin('hours', hours, 0, 1e7)
    const partial = at(hours * HOUR_S)
    for (const gas of ['H2O', 'H2', 'N2'] as const) result.byGasPa[gas][i] = partial[gas]
    result.n2EquivalentPa[i] = nitrogenEquivalent(partial)
  }
  return result
}

/**
 * Profile of hydrogen and air leaks along the segment at t = 0, without water: what stands long after a bake. About
 * 41 points, among them both ends, every pump and every leak.
 */
export function steadyProfile(model: SegmentModel): { offsetM: number; n2EquivalentPa: number }[] {
  requireModel(model)
  const even = Array.from({ length: 41 }, (_, i) => (model.lengthM * i) / 40)
  const leaks = (model.airLeaks ?? []).map((leak) => ({ atM: leak.atM, loadPaM3S: leak.qPaM3S }))
  const positions = linePositions({ ...line(model, 'N2', 0), leaks }, even)
  const hydrogen = steadyPressures(line(model, 'H2', hydrogenRate(model, 0)), positions)
  const air = steadyPressures({ ...line(model, 'N2', 0), leaks }, positions)
  return positions.map((offsetM, i) => ({
    offsetM,
    n2EquivalentPa: nitrogenEquivalent({ H2: hydrogen[i]!, N2: air[i]! }),
  }))
}

/** Hours of high vacuum until the reading at `atM` is at the target; null if not within twenty years. */
export function hoursToReach(model: SegmentModel, targetPa: number, atM: number): number | null {
  requireModel(model)
  requirePositive('targetPa', targetPa)
  const at = pressuresAt(model, atM)
  return firstTime((hours) => nitrogenEquivalent(at(hours * HOUR_S)) <= targetPa, LONGEST_PUMPING_H)
}

/**
 * Hours of hold at `bakeK` after which the cooled segment reads the target at `atM`, and the gas that decides it;
 * null if a year would not do. Ramps are not counted: they shorten the hold. The water closed form holds while
 * sites are still full at the highest energy; beyond, it promises too little, and never below the floor.
 */
export function bakeHoursToReach(
  model: SegmentModel,
  options: { targetPa: number; bakeK: number; atM: number },
): { hours: number; limitedBy: 'water' | 'hydrogen' } | null {
  requireModel(model)
  requirePositive('targetPa', options.targetPa)
  requireWithin('bakeK', options.bakeK, model.temperatureK, 1300)
  const after = pressuresAfterBake(model, options.bakeK, options.atM)
  const reached = (hours: number): boolean => nitrogenEquivalent(after(hours * HOUR_S)) <= options.targetPa
  const hours = firstTime(reached, LONGEST_HOLD_H)
  if (hours === null) return null
  const partial = after(Math.max(hours, 1e-3) * HOUR_S)
  const water = nitrogenEquivalent({ H2O: partial.H2O })
  return { hours, limitedBy: water > nitrogenEquivalent({ H2: partial.H2 }) ? 'water' : 'hydrogen' }
}

function requireModel(model: SegmentModel): void {
  for (const key of ['lengthM', 'diameterM', 'wallM'] as const) requirePositive(key, model[key])
  requireWithin('temperatureK', model.temperatureK, 200, 700)
  if (model.pumps.length === 0) throw new PhysicsError('number of pumps', 0, 'at least 1 pump on the segment')
  if (model.hydrogen.kind === 'diffusion') {
    requireWithin('c0PerM3', model.hydrogen.c0PerM3, 0, 1e28)
    requirePositive('agedTauM2', model.hydrogen.agedTauM2)
  } else {
    requirePositive('qPaMS', model.hydrogen.qPaMS)
  }
  if (model.water.state === 'unbaked') requirePositive('capacityPerM2', model.water.capacityPerM2)
  else requireWithin('floorPa', model.water.floorPa, 0, 1)
  for (const leak of model.airLeaks ?? []) requireWithin('qPaM3S', leak.qPaM3S, 0, 1e3)
}

/**
 * Speed of a pump for a gas, m3/s. One whose water speed is not given takes water as it takes nitrogen (common
 * practice, no source); any other gas that is not given is not pumped.
 */
export function pumpSpeed(pump: SegmentModel['pumps'][number], gas: ModelGas): number {
  return pump.speedM3S[gas] ?? (gas === 'H2O' ? (pump.speedM3S.N2 ?? 0) : 0)
}

// The tube as one gas sees it, giving off `rate` Pa m/s everywhere.
function line(model: SegmentModel, gas: ModelGas, rate: number, temperatureK = model.temperatureK) {
  return {
    lengthM: model.lengthM,
    specific: molecularSpecific(gas, model.diameterM, temperatureK),
    sourcePerM: rate * Math.PI * model.diameterM,
    pumps: model.pumps.map((pump) => ({
      atM: pump.atM,
      speedM3S: pumpSpeed(pump, gas),
    })),
  }
}

// Pressure at one place for a wall rate of 1 Pa m/s.
function unitPressure(model: SegmentModel, gas: ModelGas, atM: number, temperatureK?: number): number {
  const unit = line(model, gas, 1, temperatureK)
  const positions = linePositions(unit, [atM])
  return steadyPressures(unit, positions)[nearest(positions, atM)]!
}

function airPressure(model: SegmentModel, atM: number): number {
  const leaks = (model.airLeaks ?? []).map((leak) => ({ atM: leak.atM, loadPaM3S: leak.qPaM3S }))
  const air = { ...line(model, 'N2', 0), leaks }
  const positions = linePositions(air, [atM])
  return steadyPressures(air, positions)[nearest(positions, atM)]!
}

function nearest(positions: readonly number[], atM: number): number {
  let best = 0
  for (const [i, x] of positions.entries()) if (Math.abs(x - atM) < Math.abs(positions[best]! - atM)) best = i
  return best
}

// Hydrogen rate in Pa m/s of gas at the segment's temperature, after `seconds` at that temperature.
function hydrogenRate(model: SegmentModel, seconds: number): number {
  const { hydrogen, temperatureK, wallM } = model
  if (hydrogen.kind === 'low-hydrogen') {
    return (lowHydrogenRate(hydrogen.qPaMS, hydrogen.atK, temperatureK) * temperatureK) / hydrogen.atK
  }
  return slabRateAt(
    hydrogen,
    wallM,
    temperatureK,
    hydrogen.agedTauM2 + hydrogenDiffusivity(temperatureK) * seconds,
  )
}

function slabRateAt(sheet: { c0PerM3: number }, wallM: number, temperatureK: number, tauM2: number): number {
  return (slabAtomFlux({ c0PerM3: sheet.c0PerM3, wallM }, temperatureK, tauM2) / 2) * BOLTZMANN * temperatureK
}

function isothermOf(capacityPerM2: number): WaterIsotherm {
  return { ...DEFAULT_WATER, capacityPerM2 }
}

function pressuresAt(model: SegmentModel, atM: number): (seconds: number) => Record<ModelGas, number> {
  const { water } = model
  const hydrogenPerRate = unitPressure(model, 'H2', atM)
  const air = airPressure(model, atM)
  if (water.state === 'baked') {
    return (seconds) => ({ H2O: water.floorPa, H2: hydrogenPerRate * hydrogenRate(model, seconds), N2: air })
  }
  const waterPerRate = unitPressure(model, 'H2O', atM)
  const rateTime = waterRateTime(model.temperatureK, isothermOf(water.capacityPerM2))
  return (seconds) => ({
    H2O: (waterPerRate * rateTime) / (seconds + WATER_LEAD_S),
    H2: hydrogenPerRate * hydrogenRate(model, seconds),
    N2: air,
  })
}

// Hot, each place stands at its own water pressure; cooled, it keeps its coverage.
function pressuresAfterBake(
  model: SegmentModel,
  bakeK: number,
  atM: number,
): (holdSeconds: number) => Record<ModelGas, number> {
  const { hydrogen, water, temperatureK } = model
  const hydrogenPerRate = unitPressure(model, 'H2', atM)
  const air = airPressure(model, atM)
  const hotDiffusivity = hydrogenDiffusivity(bakeK)
  const hydrogenAfter = (seconds: number): number =>
    hydrogen.kind === 'diffusion'
      ? slabRateAt(hydrogen, model.wallM, temperatureK, hydrogen.agedTauM2 + hotDiffusivity * seconds)
      : hydrogenRate(model, 0)
  const waterAfter =
    water.state === 'baked' ? () => water.floorPa : emptyingWater(model, water.capacityPerM2, bakeK, atM)
  return (seconds) => ({ H2O: waterAfter(seconds), H2: hydrogenPerRate * hydrogenAfter(seconds), N2: air })
}

function emptyingWater(model: SegmentModel, capacityPerM2: number, bakeK: number, atM: number) {
  const isotherm = isothermOf(capacityPerM2)
  const hotPerRate = unitPressure(model, 'H2O', atM, bakeK)
  const rateTime = waterRateTime(bakeK, isotherm)
  const hotScale = waterScalePressure(bakeK, isotherm)
  const coldScale = waterScalePressure(model.temperatureK, isotherm)
  return (seconds: number): number => {
    const share = (hotPerRate * rateTime) / seconds / hotScale
    return Math.max(WATER_FLOOR_PA, coldScale * Math.min(1, share) ** (bakeK / model.temperatureK))
  }
}

/** Earliest time in (0, longest] at which a condition that stays true once it is holds; null if never. */
function firstTime(holds: (hours: number) => boolean, longest: number): number | null {
  const earliest = 1e-3
  if (!holds(longest)) return null
  if (holds(earliest)) return 0
  let low = Math.log(earliest)
  let high = Math.log(longest)
  while (high - low > 1e-10) {
    const middle = (low + high) / 2
    if (holds(Math.exp(middle))) high = middle
    else low = middle
  }
  return Math.exp(high)
}
