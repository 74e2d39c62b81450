/**
 * Units at the edge: everything inside the model is SI. Factors are exact by definition (SI Brochure, 9th edition,
 * 2019; NIST SP 811), so each is written as the arithmetic that defines it.
 */
import { requireFinite, requirePositive } from './argument-checks.ts'
import { ATMOSPHERE_PA, BOLTZMANN, T20_K, ZERO_CELSIUS_K } from './constants.ts'

const TORR_PA = ATMOSPHERE_PA / 760

/** One unit of pressure in Pa. `mmHg` and `inHg` are the conventional mercury columns, not the torr. */
export const PRESSURE_PA = {
  Pa: 1,
  hPa: 100,
  kPa: 1000,
  mbar: 100,
  bar: 1e5,
  atm: ATMOSPHERE_PA,
  Torr: TORR_PA,
  mTorr: TORR_PA / 1000,
  micron: TORR_PA / 1000,
  mmHg: 13595.1 * 9.80665 * 1e-3,
  inHg: 13595.1 * 9.80665 * 25.4e-3,
  psi: (0.45359237 * 9.80665) / 0.0254 ** 2,
} as const

/** One unit of throughput in Pa m3/s. */
export const THROUGHPUT_PA_M3_S = {
  'Pa·m³/s': 1,
  'mbar·l/s': 0.1,
  'Torr·l/s': TORR_PA / 1000,
  'atm·cm³/s': ATMOSPHERE_PA * 1e-6,
} as const

/** One unit of outgassing rate per geometric area in Pa m/s. */
export const OUTGASSING_PA_M_S = {
  'Pa·m/s': 1,
  'mbar·l/(s·cm²)': 1000,
  'Torr·l/(s·cm²)': TORR_PA * 10,
} as const

export type PressureUnit = keyof typeof PRESSURE_PA
export type ThroughputUnit = keyof typeof THROUGHPUT_PA_M3_S
export type OutgassingUnit = keyof typeof OUTGASSING_PA_M_S

/** Pressure in Pa of `value` in `unit`. */
export function toPascal(value: number, unit: PressureUnit): number {
  requireFinite('value', value)
  return value * PRESSURE_PA[unit]
}

/** Value in `unit` of a pressure in Pa. */
export function fromPascal(pressurePa: number, unit: PressureUnit): number {
  requireFinite('pressurePa', pressurePa)
  return pressurePa / PRESSURE_PA[unit]
}

/** Throughput in Pa m3/s of `value` in `unit`. */
export function toPaM3S(value: number, unit: ThroughputUnit): number {
  requireFinite('value', value)
  return value * THROUGHPUT_PA_M3_S[unit]
}

/** Outgassing rate in Pa m/s of `value` in `unit`. */
export function toPaMS(value: number, unit: OutgassingUnit): number {
  requireFinite('value', value)
  return value * OUTGASSING_PA_M_S[unit]
}

/** Kelvin of a temperature in degrees Celsius. Throws below absolute zero. */
export function celsiusToKelvin(celsius: number): number {
  const kelvin = celsius + ZERO_CELSIUS_K
  requirePositive('kelvin', kelvin)
  return kelvin
}

/** Degrees Celsius of a temperature in K. */
export function kelvinToCelsius(kelvin: number): number {
  requirePositive('kelvin', kelvin)
  return kelvin - ZERO_CELSIUS_K
}

/** Degrees Celsius of a temperature in degrees Fahrenheit. */
export function fahrenheitToCelsius(fahrenheit: number): number {
  requireFinite('fahrenheit', fahrenheit)
  return ((fahrenheit - 32) * 5) / 9
}

/**
 * Molecules per second carried by a throughput in Pa m3/s measured at `gasK` (293.15 K unless given). A throughput
 * without its temperature is not an amount: the same flow reads 44 % higher in gas at 423 K.
 */
export function moleculesPerSecond(throughputPaM3S: number, gasK: number = T20_K): number {
  requireFinite('throughputPaM3S', throughputPaM3S)
  requirePositive('gasK', gasK)
  return throughputPaM3S / (BOLTZMANN * gasK)
}
