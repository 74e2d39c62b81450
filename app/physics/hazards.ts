/** Figures of safety: what a hot, evacuated, current-carrying tube can do to the people beside it. SI units. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { ATMOSPHERE_PA } from './constants.ts'

/** Magnetic constant over two pi, T m/A: 2e-7 to nine digits (CODATA 2018). */
const FIELD_T_M_A = 2e-7
/** Oxygen in clean dry air, volume share in % (20.95 in tables of the atmosphere; 20.9 is what monitors are set to). */
export const AIR_OXYGEN_PERCENT = 20.9
/** Density times heat capacity of air near 20 °C, J/(m3 K): 1.20 kg/m3 and 1005 J/(kg K), textbook values. */
const AIR_HEAT_J_M3_K = 1.2 * 1005
/** Heat given off by an upright or round surface to still air, radiation included, W/(m2 K); common practice, no source. */
export const STILL_AIR_FILM_WM2K = 8
/** Mean thermal expansion of 304L from 0 to 100 °C, 1/K (data sheets). */
export const SHEET_EXPANSION_PER_K = 17.3e-6

/**
 * Temperature of the outside of a jacket round a tube, K: heat flows through the layer (Fourier, cylinder) and leaves
 * through the air film. Holds where the jacket is whole; seams, supports and flanges are hotter.
 */
export function jacketSkinK(
  tube: { diameterM: number; tubeK: number; ambientK: number },
  jacket: { thicknessM: number; conductivityWMK: number; filmWM2K?: number },
): number {
  const { filmWM2K = STILL_AIR_FILM_WM2K } = jacket
  requirePositive('diameterM', tube.diameterM)
  requireWithin('ambientK', tube.ambientK, 100, 1300)
  requireWithin('tubeK', tube.tubeK, tube.ambientK, 1300)
  requirePositive('thicknessM', jacket.thicknessM)
  requirePositive('conductivityWMK', jacket.conductivityWMK)
  requirePositive('filmWM2K', filmWM2K)
  const outerM = tube.diameterM / 2 + jacket.thicknessM
  const layer = Math.log((2 * outerM) / tube.diameterM) / (2 * Math.PI * jacket.conductivityWMK)
  const film = 1 / (2 * Math.PI * outerM * filmWM2K)
  return tube.ambientK + ((tube.tubeK - tube.ambientK) * film) / (layer + film)
}

/** Force on a round cover between two pressures `differencePa` apart, N; one atmosphere unless given. */
export function coverForce(diameterM: number, differencePa = ATMOSPHERE_PA): number {
  requirePositive('diameterM', diameterM)
  requireWithin('differencePa', differencePa, 0, 1e8)
  return (differencePa * Math.PI * diameterM ** 2) / 4
}

/** Work that the air outside can do on an evacuated volume, J: pressure times volume. */
export function evacuatedEnergy(volumeM3: number): number {
  requirePositive('volumeM3', volumeM3)
  return ATMOSPHERE_PA * volumeM3
}

/** Heat set free in a joint by a direct current, W. */
export function jointHeat(currentA: number, resistanceOhm: number): number {
  requireWithin('currentA', currentA, 0, 1e6)
  requireWithin('resistanceOhm', resistanceOhm, 0, 1e3)
  return currentA ** 2 * resistanceOhm
}

/** Flux density beside a long straight conductor whose return is far away, T. */
export function straightConductorField(currentA: number, distanceM: number): number {
  requireWithin('currentA', currentA, 0, 1e6)
  requirePositive('distanceM', distanceM)
  return (FIELD_T_M_A * currentA) / distanceM
}

/** Distance from a long straight conductor at which the field has fallen to `fieldT`, m. */
export function fieldDistance(currentA: number, fieldT: number): number {
  requireWithin('currentA', currentA, 0, 1e6)
  requirePositive('fieldT', fieldT)
  return (FIELD_T_M_A * currentA) / fieldT
}

/**
 * Oxygen left in a space after `gasM3` of gas without oxygen has flowed in and mixed while as much of the mixture left,
 * % by volume. Pits, the outlet and a space that does not mix lie far below it.
 */
export function oxygenAfterInflow(gasM3: number, spaceM3: number): number {
  requireWithin('gasM3', gasM3, 0, 1e9)
  requirePositive('spaceM3', spaceM3)
  return AIR_OXYGEN_PERCENT * Math.exp(-gasM3 / spaceM3)
}

/** Fresh air that carries off `heatW` while it warms by `riseK`, m3/s. */
export function airForRise(heatW: number, riseK: number): number {
  requireWithin('heatW', heatW, 0, 1e9)
  requirePositive('riseK', riseK)
  return heatW / (AIR_HEAT_J_M3_K * riseK)
}
