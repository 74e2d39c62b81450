/**
 * What gauges show of a gas mixture. An ion gauge calibrated for nitrogen shows the sum of r_i p_i; a reading is not
 * a pressure until the gas is known.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { PhysicsError } from './errors.ts'

/** Gases with a known ion gauge sensitivity. */
export type GaugedGas = 'H2' | 'He' | 'Ne' | 'CH4' | 'H2O' | 'CO' | 'N2' | 'O2' | 'Ar' | 'Kr' | 'CO2'

/**
 * Ion gauge sensitivity relative to nitrogen: Redhead, relative sensitivity of Bayard-Alpert gauges, CRC Handbook;
 * single gauges differ by 15 %. Cold-cathode gauges follow about the same numbers within 30 %.
 */
export const ION_SENSITIVITY: Readonly<Record<GaugedGas, number>> = {
  H2: 0.43,
  He: 0.18,
  Ne: 0.31,
  CH4: 1.6,
  H2O: 0.93,
  CO: 1,
  N2: 1,
  O2: 0.96,
  Ar: 1.4,
  Kr: 1.9,
  CO2: 1.4,
}

/**
 * A second table, Summers, NASA TN D-5285 (1969), as tabulated in a manual. It differs from the first for argon, and
 * both are kept: the difference is what is not known.
 */
export const ION_SENSITIVITY_SUMMERS: Readonly<Partial<Record<GaugedGas, number>>> = {
  CH4: 1.6,
  CO: 1.05,
  N2: 1,
  O2: 1,
  Ar: 1.2,
  CO2: 1.4,
}

/** Factor C of a thermal-conductivity gauge: true = C times indicated, below about 100 Pa (two manuals agree). */
export const THERMAL_FACTOR: Readonly<Partial<Record<GaugedGas, number>>> = {
  H2: 0.5,
  He: 0.8,
  H2O: 0.5,
  CO: 1,
  N2: 1,
  O2: 1,
  Ar: 1.7,
  CO2: 0.9,
}

/** Above this pressure convection makes a thermal-conductivity gauge depend strongly on the gas, Pa. */
const THERMAL_LIMIT_PA = 100

/** Nitrogen-equivalent reading of an ion gauge in a mixture of true partial pressures, Pa. */
export function nitrogenEquivalent(partialPa: Readonly<Partial<Record<GaugedGas, number>>>): number {
  let sum = 0
  for (const [gas, pressurePa] of Object.entries(partialPa)) {
    requireWithin(`partial pressure of ${gas}`, pressurePa, 0, 1e6)
    sum += ION_SENSITIVITY[gas as GaugedGas] * pressurePa
  }
  return sum
}

/** True total pressure behind a nitrogen-equivalent reading of a mixture with these mole shares (any scale), Pa. */
export function truePressure(
  readingPa: number,
  shares: Readonly<Partial<Record<GaugedGas, number>>>,
): number {
  requirePositive('readingPa', readingPa)
  const total = Object.values(shares).reduce((sum, share) => sum + share, 0)
  requirePositive('sum of the shares', total)
  return (readingPa * total) / nitrogenEquivalent(shares)
}

/** True pressure behind a thermal-conductivity reading in one gas, Pa. Refuses where convection rules. */
export function thermalTruePressure(readingPa: number, gas: GaugedGas): number {
  requireWithin('readingPa', readingPa, 0, THERMAL_LIMIT_PA)
  const factor = THERMAL_FACTOR[gas]
  if (factor === undefined)
    throw new PhysicsError(`factor for ${gas}`, Number.NaN, 'a gas with a known factor')
  return readingPa * factor
}

/** Ion current K I_e p in A, with the sensitivity K per Pa and the emission current in A. */
export function ionCurrent(pressurePa: number, sensitivityPerPa: number, emissionA: number): number {
  requirePositive('sensitivityPerPa', sensitivityPerPa)
  requireWithin('emissionA', emissionA, 0, 10)
  requireWithin('pressurePa', pressurePa, 0, 1e3)
  return sensitivityPerPa * emissionA * pressurePa
}

export type GaugeKind =
  | 'capacitance'
  | 'thermal-conductivity'
  | 'cold-cathode'
  | 'hot-cathode'
  | 'extractor'
  | 'spinning-rotor'

/** Nominal range of each kind of gauge, Pa (makers' common figures; take the part's own data where known). */
export const GAUGE_RANGE_PA: Readonly<Record<GaugeKind, readonly [number, number]>> = {
  capacitance: [1e-3, 1.33e5],
  'thermal-conductivity': [1e-1, 1e4],
  'cold-cathode': [1e-9, 1],
  'hot-cathode': [1e-9, 0.1],
  extractor: [1e-10, 1e-2],
  'spinning-rotor': [1e-5, 10],
}

/** Nitrogen-equivalent reading that X-rays alone cause in a hot-cathode gauge, Pa (from memory, not verified). */
export const X_RAY_LIMIT_PA: Readonly<Partial<Record<GaugeKind, number>>> = {
  'hot-cathode': 3e-9,
  extractor: 1e-10,
}

/**
 * What an ionisation gauge shows in this mixture: the X-ray current adds to every reading, and outside its range it
 * shows no number.
 */
export function ionGaugeReading(
  kind: 'hot-cathode' | 'cold-cathode' | 'extractor',
  partialPa: Readonly<Partial<Record<GaugedGas, number>>>,
): { state: 'reading'; readingPa: number } | { state: 'over-range' | 'under-range'; limitPa: number } {
  const readingPa = nitrogenEquivalent(partialPa) + (X_RAY_LIMIT_PA[kind] ?? 0)
  const [lowest, highest] = GAUGE_RANGE_PA[kind]
  if (readingPa > highest) return { state: 'over-range', limitPa: highest }
  return readingPa < lowest ? { state: 'under-range', limitPa: lowest } : { state: 'reading', readingPa }
}

/**
 * Pressure in a tube at `tubeK` behind a gauge at `gaugeK` in molecular flow, where p/sqrt(T) is equal at both
 * (Knudsen 1910).
 */
export function tubePressureBehindGauge(gaugePa: number, gaugeK: number, tubeK: number): number {
  requireWithin('gaugePa', gaugePa, 0, 1e6)
  requirePositive('gaugeK', gaugeK)
  requirePositive('tubeK', tubeK)
  return gaugePa * Math.sqrt(tubeK / gaugeK)
}
