/**
 * Conductances in m3/s and specific conductances (conductance times length) in m4/s, from molecular flow to
 * continuum flow in one continuous formula.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { GAS_CONSTANT } from './constants.ts'
import { GAS_DATA, type Gas, meanSpeed, viscosity } from './gases.ts'

/** Molecular conductance of a thin aperture, A v/4. */
export function apertureConductance(gas: Gas, areaM2: number, temperatureK: number): number {
  requirePositive('areaM2', areaM2)
  return (areaM2 * meanSpeed(gas, temperatureK)) / 4
}

/** Cross-section of a round tube, m2. */
export function crossSection(diameterM: number): number {
  requirePositive('diameterM', diameterM)
  return (Math.PI * diameterM ** 2) / 4
}

/**
 * Chance that a molecule entering a round tube leaves at the far end, (14 + 4x)/(14 + 18x + 3x2) with x = L/d.
 * The same as Santeler's equivalent length (J. Vac. Sci. Technol. A 4 (1986) 338, from memory). Within 0.64 % of
 * the solved integral equation for x of 0.05 to 500 (measured in the tests).
 */
export function transmission(lengthOverDiameter: number): number {
  requireWithin('lengthOverDiameter', lengthOverDiameter, 0, 1e9)
  const x = lengthOverDiameter
  return (14 + 4 * x) / (14 + 18 * x + 3 * x * x)
}

/**
 * Berman's closed form (J. Appl. Phys. 36 (1965) 3356, from memory), within 0.07 % but losing its digits to
 * cancellation in long tubes: refused above L/d = 250.
 */
export function transmissionBerman(lengthOverDiameter: number): number {
  requireWithin('lengthOverDiameter', lengthOverDiameter, 0, 250)
  const l = 2 * lengthOverDiameter
  if (l === 0) return 1
  const s = Math.sqrt(l * l + 4)
  const top = ((8 - l * l) * s + l ** 3 - 16) ** 2
  return 1 + (l * l) / 4 - (l * s) / 4 - top / (72 * l * s - 288 * Math.log(l + s) + 288 * Math.LN2)
}

/** Molecular conductance of a round tube of any length between two large volumes, W A v/4. */
export function tubeConductance(gas: Gas, diameterM: number, lengthM: number, temperatureK: number): number {
  requireWithin('lengthM', lengthM, 0, 1e7)
  const open = apertureConductance(gas, crossSection(diameterM), temperatureK)
  return transmission(lengthM / diameterM) * open
}

/** Specific molecular conductance of a long tube, pi d3 v/12 (Knudsen 1909), m4/s. */
export function molecularSpecific(gas: Gas, diameterM: number, temperatureK: number): number {
  requirePositive('diameterM', diameterM)
  return ((Math.PI * diameterM ** 3) / 12) * meanSpeed(gas, temperatureK)
}

/** Specific laminar conductance pi d4 p/(128 eta) at the mean pressure (Hagen and Poiseuille), m4/s. */
export function viscousSpecific(diameterM: number, meanPressurePa: number, viscosityPaS: number): number {
  requirePositive('diameterM', diameterM)
  requireWithin('meanPressurePa', meanPressurePa, 0, 1e9)
  requirePositive('viscosityPaS', viscosityPaS)
  return (Math.PI * diameterM ** 4 * meanPressurePa) / (128 * viscosityPaS)
}

/**
 * The numbers of Knudsen's transitional formula that do not change with pressure, so that a solver need not work
 * them out again at every face.
 */
export interface TransitionalFlow {
  /** Specific molecular conductance, m4/s. */
  readonly molecular: number
  /** Viscous part per pascal, m4/(s Pa). */
  readonly viscousPerPa: number
  /** X per pascal of the slip term. */
  readonly slipPerPa: number
}

/** X per pascal of Knudsen's formula, d sqrt(M/RT)/eta. */
export function slipPerPascal(
  gas: Gas,
  diameterM: number,
  temperatureK: number,
  viscosityPaS: number,
): number {
  requirePositive('diameterM', diameterM)
  requirePositive('temperatureK', temperatureK)
  requirePositive('viscosityPaS', viscosityPaS)
  return (diameterM * Math.sqrt(GAS_DATA[gas].molarMass / (GAS_CONSTANT * temperatureK))) / viscosityPaS
}

/** Prepares Knudsen's formula for one gas, diameter and temperature; `viscosityPaS` overrides the table. */
export function transitionalFlow(
  gas: Gas,
  diameterM: number,
  temperatureK: number,
  viscosityPaS: number = viscosity(gas, temperatureK),
): TransitionalFlow {
  return {
    molecular: molecularSpecific(gas, diameterM, temperatureK),
    viscousPerPa: viscousSpecific(diameterM, 1, viscosityPaS),
    slipPerPa: slipPerPascal(gas, diameterM, temperatureK, viscosityPaS),
  }
}

/**
 * Specific conductance at a mean pressure, m4/s: pi d4 p/(128 eta) + c_mol (1 + X)/(1 + 1.24 X) with
 * X = d p sqrt(M/RT)/eta (Knudsen 1909). Continuous and positive from molecular to laminar flow.
 */
export function transitionalSpecific(flow: TransitionalFlow, meanPressurePa: number): number {
  requireWithin('meanPressurePa', meanPressurePa, 0, 1e9)
  const x = flow.slipPerPa * meanPressurePa
  return flow.viscousPerPa * meanPressurePa + (flow.molecular * (1 + x)) / (1 + 1.24 * x)
}

/** Slope of `transitionalSpecific` over the mean pressure, m4/(s Pa). */
export function transitionalSlope(flow: TransitionalFlow, meanPressurePa: number): number {
  requireWithin('meanPressurePa', meanPressurePa, 0, 1e9)
  const x = flow.slipPerPa * meanPressurePa
  return flow.viscousPerPa - (0.24 * flow.molecular * flow.slipPerPa) / (1 + 1.24 * x) ** 2
}

/** Pressure ratio below which an aperture is choked, (2/(g + 1))^(g/(g - 1)). */
export function chokedRatio(heatRatio: number): number {
  requireWithin('heatRatio', heatRatio, 1.0001, 5 / 3)
  return (2 / (heatRatio + 1)) ** (heatRatio / (heatRatio - 1))
}

/**
 * Continuum flow through an ideal aperture, m3/s at the upstream pressure (de Saint-Venant and Wantzel), and never
 * more than the choked flow.
 */
export function apertureContinuumFlow(
  gas: Gas,
  areaM2: number,
  temperatureK: number,
  downOverUp: number,
): number {
  requirePositive('temperatureK', temperatureK)
  requirePositive('areaM2', areaM2)
  requireWithin('downOverUp', downOverUp, 0, 1)
  const { molarMass, heatRatio: g } = GAS_DATA[gas]
  const ratio = Math.max(downOverUp, chokedRatio(g))
  const thermal = (2 * g * GAS_CONSTANT * temperatureK) / ((g - 1) * molarMass)
  return areaM2 * Math.sqrt(thermal * (ratio ** (2 / g) - ratio ** ((g + 1) / g)))
}

/** What the flow through a valve's bore needs, prepared once for one gas, bore and temperature. */
export interface ApertureFlow {
  /** Molecular conductance, m3/s. */
  readonly molecular: number
  /** Choked flow per pascal upstream, m3/s. */
  readonly choked: number
  readonly chokedRatio: number
  /** Half-way between molecular and continuum flow, 1/Pa: the weight of the latter is x/(1 + x) with x = this times p. */
  readonly continuumPerPa: number
}

/** Rarefaction (radius p over viscosity and thermal speed) at which an aperture is half-way to continuum flow. */
const HALF_WAY_RAREFACTION = 5
/** Below this share of the pressure a difference drives its flow in proportion, so that its slope stays finite. */
const SMALL_DIFFERENCE = 1e-3

/** Prepares the flow through a round bore; `viscosityPaS` overrides the table. */
export function apertureFlow(
  gas: Gas,
  boreM: number,
  temperatureK: number,
  viscosityPaS: number = viscosity(gas, temperatureK),
): ApertureFlow {
  const area = crossSection(boreM)
  // slipPerPascal is d sqrt(M/RT)/eta; with the radius and sqrt(2RT/M) it is 2 sqrt(2) times less.
  const rarefaction = slipPerPascal(gas, boreM, temperatureK, viscosityPaS) / Math.sqrt(8)
  return {
    molecular: apertureConductance(gas, area, temperatureK),
    choked: apertureContinuumFlow(gas, area, temperatureK, 0),
    chokedRatio: chokedRatio(GAS_DATA[gas].heatRatio),
    continuumPerPa: rarefaction / HALF_WAY_RAREFACTION,
  }
}

/**
 * Flow through a bore from the higher to the lower pressure, Pa m3/s, from molecular to choked continuum flow. The
 * subcritical branch is the ellipse of ISO 6358 (within 1 % of de Saint-Venant and Wantzel, see the tests); the blend
 * over rarefaction rises from 1 to 1.7 times molecular flow as apertures into vacuum do (from memory, not verified:
 * 10 %). The short pipe that a real valve is would lower continuum flow by some 10 to 20 %.
 */
export function apertureThroughput(flow: ApertureFlow, upPa: number, downPa: number): number {
  requireWithin('upPa', upPa, 0, 1e9)
  requireWithin('downPa', downPa, 0, 1e9)
  if (upPa <= downPa) return 0
  const x = flow.continuumPerPa * upPa
  const fromChoked = Math.max(0, (downPa / upPa - flow.chokedRatio) / (1 - flow.chokedRatio))
  const drop = 1 - fromChoked * fromChoked
  const continuum = (flow.choked * upPa * drop) / Math.sqrt(drop + SMALL_DIFFERENCE * (1 - drop))
  return (flow.molecular * (upPa - downPa) + x * continuum) / (1 + x)
}

/** Conductance of parts one behind the other, 1/sum(1/C). Short unbaffled parts beam: good to about 10 % there. */
export function inSeries(...conductances: readonly number[]): number {
  let inverse = 0
  for (const value of conductances) {
    requirePositive('conductance', value)
    inverse += 1 / value
  }
  return 1 / inverse
}

/** Conductance of parts side by side. */
export function inParallel(...conductances: readonly number[]): number {
  for (const value of conductances) requireWithin('conductance', value, 0, 1e12)
  return conductances.reduce((sum, value) => sum + value, 0)
}

/** Factor from the molecular conductance of one gas and temperature to another, sqrt(T2 M1/(T1 M2)). */
export function molecularScale(from: { gas: Gas; atK: number }, to: { gas: Gas; atK: number }): number {
  return meanSpeed(to.gas, to.atK) / meanSpeed(from.gas, from.atK)
}

/** Pumping speed left behind a conductance, 1/(1/S + 1/C). A pump that is off (speed 0) stays 0. */
export function effectiveSpeed(speedM3S: number, conductanceM3S: number): number {
  requireWithin('speedM3S', speedM3S, 0, 1e6)
  return speedM3S === 0 ? 0 : inSeries(speedM3S, conductanceM3S)
}
