/**
 * Water on the wall: adsorbed molecules in equilibrium with the local pressure, on sites whose binding energies
 * spread evenly from E0 to E1 (Temkin isotherm; for pump-down see Redhead, J. Vac. Sci. Technol. A 13 (1995) 467).
 * It yields the 1/t law of unbaked steel and the effect of a bake. It ignores the slow water of thick oxides.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { BOLTZMANN, GAS_CONSTANT } from './constants.ts'
import { moleculeMass } from './gases.ts'

export interface WaterIsotherm {
  /** Lowest and highest binding energy, J/mol. */
  readonly lowJMol: number
  readonly highJMol: number
  /** Molecules per geometric m2 when every site is full. */
  readonly capacityPerM2: number
  /** Molecules per m2 of one layer. */
  readonly layerPerM2: number
  /** Attempt frequency, 1/s. */
  readonly attemptPerS: number
  /** Sticking on a free site, 0 to 1. A lower value only shifts both energies: do not fit both. */
  readonly sticking: number
}

/**
 * Defaults calibrated to the common level of unbaked steel, about 3e-6 Pa m/s after one hour (from memory, not
 * verified). The capacity is five layers with roughness; fit it per tube, from 3e19 to 4e20 per m2.
 */
export const DEFAULT_WATER: WaterIsotherm = {
  lowJMol: 60e3,
  highJMol: 110e3,
  capacityPerM2: 5e19,
  layerPerM2: 1e19,
  attemptPerS: 1e13,
  sticking: 1,
}

/**
 * Least water pressure ever shown as a prediction, Pa. Below it the model knows nothing, so a forecast says "at or
 * below" and ranks no options by it (common practice, no source; set per site).
 */
export const WATER_FLOOR_PA = 1e-11

/** Throws on an isotherm that no wall has, naming the number. */
export function requireIsotherm(isotherm: WaterIsotherm): void {
  requireWithin('lowJMol', isotherm.lowJMol, 0, 5e5)
  requireWithin('highJMol', isotherm.highJMol, isotherm.lowJMol + 1, 5e5)
  requirePositive('capacityPerM2', isotherm.capacityPerM2)
  requirePositive('layerPerM2', isotherm.layerPerM2)
  requirePositive('attemptPerS', isotherm.attemptPerS)
  requireWithin('sticking', isotherm.sticking, 1e-6, 1)
}

/** Pressure scale p00 = N_m nu sqrt(2 pi m k T)/s of the isotherm, Pa. */
export function waterScalePressure(temperatureK: number, isotherm: WaterIsotherm = DEFAULT_WATER): number {
  requireIsotherm(isotherm)
  requirePositive('temperatureK', temperatureK)
  const thermal = Math.sqrt(2 * Math.PI * moleculeMass('H2O') * BOLTZMANN * temperatureK)
  return (isotherm.layerPerM2 * isotherm.attemptPerS * thermal) / isotherm.sticking
}

export interface Coverage {
  /** Share of the capacity that is taken, 0 to 1. */
  theta: number
  /** Slope over ln p. */
  byLogPressure: number
  /** Slope over temperature at constant pressure, 1/K. */
  byTemperature: number
}

/** Coverage in equilibrium with water vapour at `pressurePa` and wall temperature `temperatureK`. */
export function waterCoverage(
  pressurePa: number,
  temperatureK: number,
  isotherm: WaterIsotherm = DEFAULT_WATER,
): Coverage {
  requirePositive('pressurePa', pressurePa)
  const { lowJMol, highJMol } = isotherm
  requireWithin('temperatureK', temperatureK, 50, 5000)
  const thermal = GAS_CONSTANT * temperatureK
  const logRatio = Math.log(pressurePa / waterScalePressure(temperatureK, isotherm))
  const width = thermal / (highJMol - lowJMol)
  const low = lowJMol / thermal + logRatio
  const high = highJMol / thermal + logRatio
  const theta = width * (softplus(high) - softplus(low))
  const highShare = logistic(high)
  const lowShare = logistic(low)
  // u = E/RT + ln(p/p00) falls with T by E/(R T2) and, through p00, by 1/(2T).
  const highFall = (highJMol / thermal + 0.5) / temperatureK
  const lowFall = (lowJMol / thermal + 0.5) / temperatureK
  return {
    theta,
    byLogPressure: width * (highShare - lowShare),
    byTemperature: theta / temperatureK - width * (highShare * highFall - lowShare * lowFall),
  }
}

// ln(1 + e^u) without overflow.
function softplus(u: number): number {
  return u > 0 ? u + Math.log1p(Math.exp(-u)) : Math.log1p(Math.exp(u))
}

// 1/(1 + e^-u) without overflow.
function logistic(u: number): number {
  if (u >= 0) return 1 / (1 + Math.exp(-u))
  const e = Math.exp(u)
  return e / (1 + e)
}

/**
 * Product of rate and time on the plateau of the isotherm, kT N_s RT/(E1 - E0), Pa m: a pumped tube releases
 * q = (this)/t whatever its speed and area.
 */
export function waterRateTime(temperatureK: number, isotherm: WaterIsotherm = DEFAULT_WATER): number {
  requireIsotherm(isotherm)
  requirePositive('temperatureK', temperatureK)
  const width = (GAS_CONSTANT * temperatureK) / (isotherm.highJMol - isotherm.lowJMol)
  return BOLTZMANN * temperatureK * isotherm.capacityPerM2 * width
}

/** Binding energy up to which a wall at `temperatureK` is emptied at `pressurePa`, RT ln(p00/p), J/mol. */
export function emptyingFront(
  pressurePa: number,
  temperatureK: number,
  isotherm: WaterIsotherm = DEFAULT_WATER,
): number {
  requirePositive('pressurePa', pressurePa)
  return GAS_CONSTANT * temperatureK * Math.log(waterScalePressure(temperatureK, isotherm) / pressurePa)
}

export interface BakedWater {
  /** Water pressure at the end of the hot time, Pa. */
  hotPa: number
  /** Water pressure after cooling with the same coverage, Pa. */
  coldPa: number
  /** Energy up to which the sites are empty, J/mol. */
  frontJMol: number
  /**
   * True once the front has passed the highest energy: what remains then falls exponentially, the closed form no
   * longer holds, and only "at or below the floor" can be said.
   */
  emptied: boolean
}

/**
 * Water after `seconds` at `hotK`, cooled to `coldK`, for a wall area over pumping speed `areaOverSpeed` in s/m.
 * Closed form of the emptying front; it ignores the gradient along the tube, so the hold it promises at the end of
 * a long tube is 1.3 to 1.5 times too short.
 */
export function bakedWater(
  hotK: number,
  coldK: number,
  seconds: number,
  areaOverSpeed: number,
  isotherm: WaterIsotherm = DEFAULT_WATER,
): BakedWater {
  requirePositive('coldK', coldK)
  requirePositive('seconds', seconds)
  requirePositive('areaOverSpeed', areaOverSpeed)
  requireWithin('hotK', hotK, coldK, 2000)
  const hotPa = (areaOverSpeed * waterRateTime(hotK, isotherm)) / seconds
  const share = hotPa / waterScalePressure(hotK, isotherm)
  const coldPa = waterScalePressure(coldK, isotherm) * share ** (hotK / coldK)
  const frontJMol = emptyingFront(hotPa, hotK, isotherm)
  return { hotPa, coldPa, frontJMol, emptied: frontJMol >= isotherm.highJMol }
}

/**
 * Water pressure in Pa after cooling from `hotK` to `coldK` with what was on the wall at `hotPa`. A share of the wall
 * may have been cooler (`atK`) and so have kept more: cold, it shares that with the rest. Gas phase and pumping while
 * it cools are left out, both small beside the wall.
 */
export function cooledWater(
  hotPa: number,
  hotK: number,
  coldK: number,
  isotherm: WaterIsotherm = DEFAULT_WATER,
  cooler: { share: number; atK: number } = { share: 0, atK: coldK },
): number {
  requirePositive('coldK', coldK)
  requirePositive('hotPa', hotPa)
  requireWithin('hotK', hotK, coldK, 2000)
  requireWithin('cooler.share', cooler.share, 0, 1)
  requireWithin('cooler.atK', cooler.atK, 100, hotK)
  const coldScale = waterScalePressure(coldK, isotherm)
  const alone = coldScale * Math.min(1, hotPa / waterScalePressure(hotK, isotherm)) ** (hotK / coldK)
  if (cooler.share === 0) return alone
  const held =
    (1 - cooler.share) * waterCoverage(alone, coldK, isotherm).theta +
    cooler.share * waterCoverage(hotPa, cooler.atK, isotherm).theta
  // Coverage rises with ln p, so the pressure at which the cold wall holds as much is found by halving.
  let low = Math.log(Number.MIN_VALUE)
  let high = Math.log(coldScale)
  while (high - low > 1e-12 * Math.abs(high)) {
    const middle = (low + high) / 2
    if (middle === low || middle === high) break
    if (waterCoverage(Math.exp(middle), coldK, isotherm).theta < held) low = middle
    else high = middle
  }
  return Math.exp(high)
}
