/**
 * Austenitic steel 304L between -20 and 650 degrees Celsius. Heat capacity, conductivity and expansion follow the
 * stainless formulas of EN 1993-1-2 annex C (from memory, not verified; data sheets agree at room temperature to 5-10 %).
 */
import { requireFinite, requireWithin } from './argument-checks.ts'
import { ZERO_CELSIUS_K } from './constants.ts'

/** Density, kg/m3 (data sheets give 7930 to 8000). */
export const STEEL_DENSITY_KG_M3 = 7930
/** Young's modulus at room temperature, Pa (data sheets). */
const STEEL_MODULUS_PA = 193e9

function celsius(kelvin: number): number {
  requireWithin('kelvin', kelvin, 200, 1300)
  return kelvin - ZERO_CELSIUS_K
}

/** Specific heat, J/(kg K). */
export function steelHeatCapacity(kelvin: number): number {
  const c = celsius(kelvin)
  return 450 + 0.28 * c - 2.91e-4 * c ** 2 + 1.34e-7 * c ** 3
}

/** Thermal conductivity, W/(m K). */
export function steelConductivity(kelvin: number): number {
  return 14.6 + 0.0127 * celsius(kelvin)
}

/** Resistivity, ohm m: the chord between the data-sheet values at 20 and 650 degrees; the true curve bends a little. */
export function steelResistivity(kelvin: number): number {
  return 0.72e-6 * (1 + 9.7e-4 * (celsius(kelvin) - 20))
}

/** Length gained per length when free, from one temperature to another (negative on cooling). */
export function steelStrain(fromK: number, toK: number): number {
  const strainFromZero = (c: number): number => (16 + 4.79e-3 * c - 1.243e-6 * c ** 2) * c * 1e-6
  return strainFromZero(celsius(toK)) - strainFromZero(celsius(fromK))
}

/** Stress in Pa where an expansion `strain` is blocked, elastic: past about 2e8 Pa the steel has long since yielded. */
export function blockedStress(strain: number): number {
  requireFinite('strain', strain)
  return STEEL_MODULUS_PA * strain
}
