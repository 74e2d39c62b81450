/**
 * The gases of a beam tube and what kinetic theory says of them. Viscosities are a power law through the 200 K and
 * 300 K values of the CRC Handbook table "Viscosity of Gases" (Huber and Harvey); molar masses follow the IUPAC
 * weights. Diameter and mean free path are derived from the viscosity, so the three never disagree.
 */
import { requireFinite, requirePositive, requireWithin } from './argument-checks.ts'
import { AVOGADRO, BOLTZMANN, GAS_CONSTANT, T20_K } from './constants.ts'

export const GASES = ['H2', 'He', 'CH4', 'H2O', 'N2', 'CO', 'Ar', 'O2', 'CO2', 'air'] as const

export type Gas = (typeof GASES)[number]

interface GasData {
  /** Molar mass, kg/mol. */
  readonly molarMass: number
  /** Viscosity at 293.15 K, Pa s. */
  readonly viscosity20: number
  /** Exponent of viscosity over temperature. */
  readonly viscosityExponent: number
  /** Ratio of specific heats near room temperature: 5/3, 7/5, or the value of the polyatomic gas (from memory). */
  readonly heatRatio: number
}

export const GAS_DATA: Readonly<Record<Gas, GasData>> = {
  H2: { molarMass: 2.01588e-3, viscosity20: 8.764591e-6, viscosityExponent: 0.66375, heatRatio: 1.41 },
  He: { molarMass: 4.002602e-3, viscosity20: 19.589535e-6, viscosityExponent: 0.68076, heatRatio: 5 / 3 },
  CH4: { molarMass: 16.0425e-3, viscosity20: 10.871133e-6, viscosityExponent: 0.90199, heatRatio: 1.31 },
  H2O: { molarMass: 18.01528e-3, viscosity20: 9.556885e-6, viscosityExponent: 1.08756, heatRatio: 1.33 },
  N2: { molarMass: 28.0134e-3, viscosity20: 17.569069e-6, viscosityExponent: 0.8079, heatRatio: 1.4 },
  CO: { molarMass: 28.0101e-3, viscosity20: 17.476494e-6, viscosityExponent: 0.79408, heatRatio: 1.4 },
  Ar: { molarMass: 39.948e-3, viscosity20: 22.244219e-6, viscosityExponent: 0.87812, heatRatio: 5 / 3 },
  O2: { molarMass: 31.9988e-3, viscosity20: 20.300281e-6, viscosityExponent: 0.84418, heatRatio: 1.4 },
  CO2: { molarMass: 44.0095e-3, viscosity20: 14.665811e-6, viscosityExponent: 0.97546, heatRatio: 1.29 },
  air: { molarMass: 28.9647e-3, viscosity20: 18.155459e-6, viscosityExponent: 0.8139, heatRatio: 1.4 },
}

/** Mole fractions of dry air (standard dry air; the traces beyond argon are left out). */
export const DRY_AIR = { N2: 0.7808, O2: 0.2095, Ar: 0.0093 } as const

/** Mass of one molecule, kg. */
export function moleculeMass(gas: Gas): number {
  return GAS_DATA[gas].molarMass / AVOGADRO
}

/** Mean molecular speed sqrt(8RT/(pi M)), m/s (Maxwell). */
export function meanSpeed(gas: Gas, temperatureK: number): number {
  requirePositive('temperatureK', temperatureK)
  return Math.sqrt((8 * GAS_CONSTANT * temperatureK) / (Math.PI * GAS_DATA[gas].molarMass))
}

/** Viscosity, Pa s. Good to about 3 % between 200 K and 450 K. */
export function viscosity(gas: Gas, temperatureK: number): number {
  requirePositive('temperatureK', temperatureK)
  const { viscosity20, viscosityExponent } = GAS_DATA[gas]
  return viscosity20 * (temperatureK / T20_K) ** viscosityExponent
}

/** Number density p/(kT), 1/m3. */
export function numberDensity(pressurePa: number, temperatureK: number): number {
  requireWithin('pressurePa', pressurePa, 0, 1e9)
  requirePositive('temperatureK', temperatureK)
  return pressurePa / (BOLTZMANN * temperatureK)
}

/** Impingement rate p/sqrt(2 pi m k T), molecules per m2 and s (Hertz and Knudsen). */
export function impingementRate(gas: Gas, pressurePa: number, temperatureK: number): number {
  requireWithin('pressurePa', pressurePa, 0, 1e9)
  requirePositive('temperatureK', temperatureK)
  return pressurePa / Math.sqrt(2 * Math.PI * moleculeMass(gas) * BOLTZMANN * temperatureK)
}

/** Seconds until `sitesPerM2` are struck once each when a share `sticking` of the impinging molecules stays. */
export function monolayerTime(
  gas: Gas,
  pressurePa: number,
  temperatureK: number,
  sitesPerM2 = 1e19,
  sticking = 1,
): number {
  requirePositive('sitesPerM2', sitesPerM2)
  requirePositive('pressurePa', pressurePa)
  requirePositive('sticking', sticking)
  return sitesPerM2 / (sticking * impingementRate(gas, pressurePa, temperatureK))
}

/** Hard-sphere diameter in m that gives the gas its viscosity, sqrt((5/16) sqrt(mkT/pi)/eta) (Chapman, Enskog). */
export function viscosityDiameter(gas: Gas, temperatureK: number): number {
  const thermal = Math.sqrt((moleculeMass(gas) * BOLTZMANN * temperatureK) / Math.PI)
  return Math.sqrt((5 / 16) * (thermal / viscosity(gas, temperatureK)))
}

/** Mean free path times pressure, Pa m: kT/(sqrt(2) pi d2) with the viscosity diameter. Water only to 15 %. */
export function meanFreePathPressure(gas: Gas, temperatureK: number): number {
  const diameter = viscosityDiameter(gas, temperatureK)
  return (BOLTZMANN * temperatureK) / (Math.SQRT2 * Math.PI * diameter ** 2)
}

/** Knudsen number: mean free path over the inner diameter. */
export function knudsenNumber(gas: Gas, pressurePa: number, temperatureK: number, diameterM: number): number {
  requirePositive('pressurePa', pressurePa)
  requirePositive('diameterM', diameterM)
  return meanFreePathPressure(gas, temperatureK) / (pressurePa * diameterM)
}

export type FlowRegime = 'molecular' | 'transitional' | 'viscous'

/** Limits between the regimes, for words on the screen only: the conductance formula needs no switch. */
export interface RegimeLimits {
  molecularAbove: number
  viscousBelow: number
}

/** Name of the flow regime at a Knudsen number. Authors differ about the limits (0.5 or 1), so they can be set. */
export function flowRegime(
  knudsen: number,
  limits: RegimeLimits = { molecularAbove: 0.5, viscousBelow: 0.01 },
): FlowRegime {
  requirePositive('molecularAbove', limits.molecularAbove)
  requirePositive('viscousBelow', limits.viscousBelow)
  requirePositive('knudsen', knudsen)
  if (knudsen > limits.molecularAbove) return 'molecular'
  return knudsen < limits.viscousBelow ? 'viscous' : 'transitional'
}

/** Reynolds number 4MQ/(pi d eta R T) of a throughput (Pa m3/s at the gas temperature): laminar below 2300. */
export function reynoldsNumber(
  gas: Gas,
  throughputPaM3S: number,
  diameterM: number,
  temperatureK: number,
): number {
  requireFinite('throughputPaM3S', throughputPaM3S)
  requirePositive('temperatureK', temperatureK)
  requirePositive('diameterM', diameterM)
  const massFlow = (GAS_DATA[gas].molarMass * throughputPaM3S) / (GAS_CONSTANT * temperatureK)
  return (4 * massFlow) / (Math.PI * diameterM * viscosity(gas, temperatureK))
}
