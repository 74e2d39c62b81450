/** What predictions of a segment share: how one gas stands along it, and what wall and unbaked area give. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { molecularSpecific } from './conductance.ts'
import { BOLTZMANN } from './constants.ts'
import { PhysicsError } from './errors.ts'
import type { Gas } from './gases.ts'
import { hydrogenDiffusivity, lowHydrogenRate, MILL_AGE_M2, slabAtomFlux } from './hydrogen.ts'
import { linePositions, type SteadyLine, steadyPressures } from './steady.ts'
import { cooledWater, DEFAULT_WATER, type WaterIsotherm, waterRateTime, waterScalePressure } from './water.ts'

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
  /** Valve bonnets, gauge stubs and the like; none unless given. */
  unbakedArea?: SegmentUnbakedArea
}

/** A part of the wall that a bake warms only in part: it keeps its water and hydrogen longer than the tube does. */
export interface SegmentUnbakedArea {
  /** Share of the wall, 1e-3 to 1e-2 on an ordinary line (common practice, no source). */
  share: number
  /** How far it follows the tube's rise in temperature: 0 not at all, 1 wholly. */
  followShare: number
  /** Age of its hydrogen at t = 0, m2; fresh from the mill unless given. */
  agedTauM2?: number
}

export type ModelGas = 'H2O' | 'H2' | 'N2'

/** Refuses a segment that cannot be, naming what is wrong with it. */
export function requireModel(model: SegmentModel): void {
  for (const key of ['lengthM', 'diameterM', 'wallM'] as const) requirePositive(key, model[key])
  requireWithin('temperatureK', model.temperatureK, 200, 700)
  if (model.pumps.length === 0) throw new PhysicsError('number of pumps', 0, 'at least 1 pump on the segment')
  if (model.hydrogen.kind === 'diffusion') {
    requireWithin('c0PerM3', model.hydrogen.c0PerM3, 0, 1e28)
    requirePositive('agedTauM2', model.hydrogen.agedTauM2)
  } else {
    requirePositive('qPaMS', model.hydrogen.qPaMS)
    requirePositive('atK', model.hydrogen.atK)
  }
  if (model.water.state === 'unbaked') requirePositive('capacityPerM2', model.water.capacityPerM2)
  else requireWithin('floorPa', model.water.floorPa, 0, 1)
  for (const leak of model.airLeaks ?? []) requireWithin('qPaM3S', leak.qPaM3S, 0, 1e3)
  if (!model.unbakedArea) return
  requireWithin('unbakedArea.share', model.unbakedArea.share, 0, 1)
  requireWithin('unbakedArea.followShare', model.unbakedArea.followShare, 0, 1)
  if (model.unbakedArea.agedTauM2 !== undefined)
    requirePositive('unbakedArea.agedTauM2', model.unbakedArea.agedTauM2)
}

/**
 * Speed of a pump for a gas, m3/s. One whose water speed is not given takes water as it takes nitrogen (common
 * practice, no source); any other gas that is not given is not pumped.
 */
export function pumpSpeed(pump: SegmentModel['pumps'][number], gas: ModelGas): number {
  return pump.speedM3S[gas] ?? (gas === 'H2O' ? (pump.speedM3S.N2 ?? 0) : 0)
}

/** The tube as one gas sees it, giving off `rate` Pa m/s everywhere. */
export function segmentLine(
  model: SegmentModel,
  gas: ModelGas,
  rate: number,
  temperatureK = model.temperatureK,
): SteadyLine {
  return {
    lengthM: model.lengthM,
    specific: molecularSpecific(gas, model.diameterM, temperatureK),
    sourcePerM: rate * Math.PI * model.diameterM,
    pumps: model.pumps.map((pump) => ({ atM: pump.atM, speedM3S: pumpSpeed(pump, gas) })),
  }
}

/** Pressure at one place for a wall rate of 1 Pa m/s, Pa. */
export function unitPressure(model: SegmentModel, gas: ModelGas, atM: number, temperatureK?: number): number {
  return pressureAt(segmentLine(model, gas, 1, temperatureK), atM)
}

/** Nitrogen that the air leaks hold at one place, Pa; 0 without leaks. */
export function airPressure(model: SegmentModel, atM: number): number {
  const leaks = (model.airLeaks ?? []).map((leak) => ({ atM: leak.atM, loadPaM3S: leak.qPaM3S }))
  return leaks.length === 0 ? 0 : pressureAt({ ...segmentLine(model, 'N2', 0), leaks }, atM)
}

function pressureAt(line: SteadyLine, atM: number): number {
  const positions = linePositions(line, [atM])
  let best = 0
  for (const [i, x] of positions.entries()) if (Math.abs(x - atM) < Math.abs(positions[best]! - atM)) best = i
  return steadyPressures(line, positions)[best]!
}

/** Temperature of the unbaked area while the tube is at `tubeK`, K. */
export function unbakedTemperature(model: SegmentModel, tubeK: number): number {
  return model.temperatureK + (model.unbakedArea?.followShare ?? 0) * (tubeK - model.temperatureK)
}

/**
 * Hydrogen rate of the cold wall in Pa m/s of gas at the segment's temperature, once tube and unbaked area have grown
 * older by these ages since t = 0.
 */
export function hydrogenRate(model: SegmentModel, tubeAgeM2: number, unbakedAgeM2 = tubeAgeM2): number {
  const { hydrogen, temperatureK, wallM, unbakedArea } = model
  if (hydrogen.kind === 'low-hydrogen') {
    return (lowHydrogenRate(hydrogen.qPaMS, hydrogen.atK, temperatureK) * temperatureK) / hydrogen.atK
  }
  const rateAt = (age: number): number =>
    (slabAtomFlux({ c0PerM3: hydrogen.c0PerM3, wallM }, temperatureK, age) / 2) * BOLTZMANN * temperatureK
  const tube = rateAt(hydrogen.agedTauM2 + tubeAgeM2)
  if (!unbakedArea) return tube
  const cooler = rateAt((unbakedArea.agedTauM2 ?? MILL_AGE_M2) + unbakedAgeM2)
  return (1 - unbakedArea.share) * tube + unbakedArea.share * cooler
}

/** The same after `seconds` at the segment's own temperature. */
export function hydrogenRateAfter(model: SegmentModel, seconds: number): number {
  return hydrogenRate(model, hydrogenDiffusivity(model.temperatureK) * seconds)
}

export function isothermOf(capacityPerM2: number): WaterIsotherm {
  return { ...DEFAULT_WATER, capacityPerM2 }
}

/**
 * Water at one place after a hold at `bakeK`, cold again, by hold in s: the place stands at its own pressure while hot
 * and keeps what is on its wall when it cools. What the unbaked area still holds then spreads over the emptied wall.
 * Far below the floor the numbers mean nothing: clamp what is shown.
 */
export function waterAfterHold(
  model: SegmentModel,
  capacityPerM2: number,
  bakeK: number,
  atM: number,
): { hotPa(seconds: number): number; coldPa(seconds: number): number } {
  const isotherm = isothermOf(capacityPerM2)
  const hotPerRate = unitPressure(model, 'H2O', atM, bakeK)
  const scale = waterScalePressure(bakeK, isotherm)
  const share = model.unbakedArea?.share ?? 0
  const unbakedK = unbakedTemperature(model, bakeK)
  // Both parts of the wall feed the pumps, each with its own width of energies; rates count as gas at `bakeK`.
  const rateTime =
    (1 - share) * waterRateTime(bakeK, isotherm) +
    share * waterRateTime(unbakedK, isotherm) * (bakeK / unbakedK)
  const hotPa = (seconds: number): number => Math.min(scale, (hotPerRate * rateTime) / seconds)
  const coldPa = (seconds: number): number =>
    cooledWater(hotPa(seconds), bakeK, model.temperatureK, isotherm, { share, atK: unbakedK })
  return { hotPa, coldPa }
}
