/** Heat of one metre of insulated tube: what it stores and loses, what holds it and what brings it up. SI units. */
import { requireFinite, requirePositive, requireWithin } from './argument-checks.ts'
import { GAS_CONSTANT, STEFAN_BOLTZMANN } from './constants.ts'
import { PhysicsError } from './errors.ts'
import { GAS_DATA, type Gas, viscosity } from './gases.ts'
import { STEEL_DENSITY_KG_M3, steelHeatCapacity, steelResistivity, steelStrain } from './steel.ts'

export interface HeatedTube {
  diameterM: number
  wallM: number
  /** Loss per m2 of tube and K, insulation and supports included, W/(m2 K). */
  lossWM2K: number
  ambientK: number
  /** Fixed specific heat in J/(kg K); the temperature law of the steel without it. */
  specificHeatJKgK?: number
}

// Refuses a tube that cannot be, or surroundings where none stands.
function requireTube(tube: HeatedTube): void {
  requirePositive('diameterM', tube.diameterM)
  requirePositive('wallM', tube.wallM)
  requirePositive('lossWM2K', tube.lossWM2K)
  requireWithin('ambientK', tube.ambientK, 100, 1300)
  if (tube.specificHeatJKgK !== undefined) requirePositive('specificHeatJKgK', tube.specificHeatJKgK)
}

/** Cross-section of the wall (thin), m2. */
export function wallSection(tube: Pick<HeatedTube, 'diameterM' | 'wallM'>): number {
  requirePositive('diameterM', tube.diameterM)
  requirePositive('wallM', tube.wallM)
  return Math.PI * tube.diameterM * tube.wallM
}

/** Heat to warm one metre by one kelvin at `tubeK`, J/(m K). */
export function heatCapacityPerM(tube: HeatedTube, tubeK: number): number {
  requireTube(tube)
  return STEEL_DENSITY_KG_M3 * wallSection(tube) * (tube.specificHeatJKgK ?? steelHeatCapacity(tubeK))
}

/** Heat stored per metre between two temperatures, J/m (Simpson's rule, exact for the cubic law of the steel). */
export function storedHeatPerM(tube: HeatedTube, fromK: number, toK: number): number {
  const middle = heatCapacityPerM(tube, (fromK + toK) / 2)
  return ((heatCapacityPerM(tube, fromK) + 4 * middle + heatCapacityPerM(tube, toK)) / 6) * (toK - fromK)
}

/** Loss per metre and kelvin, W/(m K). */
export function lossPerMK(tube: HeatedTube): number {
  requireTube(tube)
  return tube.lossWM2K * Math.PI * tube.diameterM
}

/** Power per metre that holds the tube at `tubeK`, W/m. */
export function holdPower(tube: HeatedTube, tubeK: number): number {
  requireWithin('tubeK', tubeK, 100, 1300)
  return lossPerMK(tube) * (tubeK - tube.ambientK)
}

/** Power per metre at `tubeK` while the temperature climbs `rateKS` K/s, W/m; negative where cooling must be helped. */
export function rampPower(tube: HeatedTube, tubeK: number, rateKS: number): number {
  requireFinite('rateKS', rateKS)
  return holdPower(tube, tubeK) + heatCapacityPerM(tube, tubeK) * rateKS
}

/** Time constant of free cooling near `tubeK`, s. */
export function thermalTime(tube: HeatedTube, tubeK: number): number {
  return heatCapacityPerM(tube, tubeK) / lossPerMK(tube)
}

/**
 * Seconds from `fromK` to `toK` at constant power per metre. Small steps, each with its own heat capacity and exact in
 * between. Throws where the power would not even hold `toK`.
 */
export function heatUpSeconds(tube: HeatedTube, powerWM: number, fromK: number, toK: number): number {
  requireFinite('powerWM', powerWM)
  requireWithin('ambientK', tube.ambientK, 100, 1300)
  requireWithin('fromK', fromK, 100, 1300)
  requireWithin('toK', toK, fromK, 1300)
  const needed = holdPower(tube, toK)
  if (!(powerWM > needed))
    throw new PhysicsError('powerWM', powerWM, `more than the ${needed.toFixed(1)} W/m of loss`)
  return driftSeconds(tube, tube.ambientK + powerWM / lossPerMK(tube), fromK, toK)
}

/** Seconds to cool from `fromK` to `toK` with the heating off. Throws where `toK` is not above the surroundings. */
export function coolSeconds(tube: HeatedTube, fromK: number, toK: number): number {
  requireWithin('ambientK', tube.ambientK, 100, 1300)
  if (!(toK > tube.ambientK)) {
    throw new PhysicsError('toK', toK, `a temperature above the surroundings (${tube.ambientK} K)`)
  }
  requireWithin('fromK', fromK, toK, 1300)
  return driftSeconds(tube, tube.ambientK, fromK, toK)
}

function driftSeconds(tube: HeatedTube, restK: number, fromK: number, toK: number): number {
  const steps = Math.max(1, Math.ceil(Math.abs(toK - fromK)))
  let seconds = 0
  for (let i = 0; i < steps; i++) {
    const a = fromK + ((toK - fromK) * i) / steps
    const b = fromK + ((toK - fromK) * (i + 1)) / steps
    seconds += thermalTime(tube, (a + b) / 2) * Math.log((restK - a) / (restK - b))
  }
  return seconds
}

/** Energy per metre of a straight ramp of `rateKS` from `fromK` and a hold of `holdSeconds` at `toK`, J/m. */
export function bakeEnergyPerM(
  tube: HeatedTube,
  ramp: { fromK: number; toK: number; rateKS: number; holdSeconds: number },
): number {
  requireWithin('fromK', ramp.fromK, 100, 1300)
  requirePositive('rateKS', ramp.rateKS)
  requireWithin('holdSeconds', ramp.holdSeconds, 0, 1e9)
  requireWithin('toK', ramp.toK, ramp.fromK, 1300)
  const rampSeconds = (ramp.toK - ramp.fromK) / ramp.rateKS
  const meanLoss = (holdPower(tube, ramp.fromK) + holdPower(tube, ramp.toK)) / 2
  const lost = meanLoss * rampSeconds + holdPower(tube, ramp.toK) * ramp.holdSeconds
  return storedHeatPerM(tube, ramp.fromK, ramp.toK) + lost
}

/** Resistance per metre of wall, ohm/m. */
function resistancePerM(tube: Pick<HeatedTube, 'diameterM' | 'wallM'>, tubeK: number): number {
  return steelResistivity(tubeK) / wallSection(tube)
}

/** Power per metre that a current through the wall sets free, W/m. */
export function joulePower(
  tube: Pick<HeatedTube, 'diameterM' | 'wallM'>,
  currentA: number,
  tubeK: number,
): number {
  requireWithin('currentA', currentA, 0, 1e6)
  return currentA ** 2 * resistancePerM(tube, tubeK)
}

/** Current through the wall that sets free `powerWM` per metre at `tubeK`, A. */
export function currentFor(
  tube: Pick<HeatedTube, 'diameterM' | 'wallM'>,
  powerWM: number,
  tubeK: number,
): number {
  requireWithin('powerWM', powerWM, 0, 1e6)
  return Math.sqrt(powerWM / resistancePerM(tube, tubeK))
}

/** Volts across `tubes` equal tubes of `lengthM` in series (two for a pair that go and return), cables left out. */
export function seriesVolts(
  tube: Pick<HeatedTube, 'diameterM' | 'wallM'>,
  currentA: number,
  tubeK: number,
  lengthM: number,
  tubes = 2,
): number {
  requireWithin('currentA', currentA, 0, 1e6)
  requirePositive('tubes', tubes)
  requirePositive('lengthM', lengthM)
  return currentA * resistancePerM(tube, tubeK) * lengthM * tubes
}

/** Loss per m2 of tube and K through a layer of insulation and the air film on it, W/(m2 K). */
export function insulationLoss(
  diameterM: number,
  layer: { thicknessM: number; conductivityWMK: number; filmWM2K: number },
): number {
  requirePositive('thicknessM', layer.thicknessM)
  requirePositive('conductivityWMK', layer.conductivityWMK)
  requirePositive('filmWM2K', layer.filmWM2K)
  requirePositive('diameterM', diameterM)
  const outer = diameterM / 2 + layer.thicknessM
  const wool = Math.log((2 * outer) / diameterM) / (2 * Math.PI * layer.conductivityWMK)
  const film = 1 / (2 * Math.PI * outer * layer.filmWM2K)
  return 1 / ((wool + film) * Math.PI * diameterM)
}

/** Radiation of a bare surface to its surroundings, W/m2. */
export function radiationLoss(emissivity: number, surfaceK: number, ambientK: number): number {
  requireWithin('surfaceK', surfaceK, 0, 5000)
  requireWithin('ambientK', ambientK, 0, 5000)
  requireWithin('emissivity', emissivity, 0, 1)
  return emissivity * STEFAN_BOLTZMANN * (surfaceK ** 4 - ambientK ** 4)
}

/** Length over which a cold flange draws the wall down, sqrt(k w / U), m. */
export function finLength(conductivityWMK: number, wallM: number, lossWM2K: number): number {
  requirePositive('conductivityWMK', conductivityWMK)
  requirePositive('wallM', wallM)
  requirePositive('lossWM2K', lossWM2K)
  return Math.sqrt((conductivityWMK * wallM) / lossWM2K)
}

/** Temperature at `fromEndM` from an end held at `endK` on a long, evenly heated tube at `farK`. */
export function finTemperature(fromEndM: number, finM: number, endK: number, farK: number): number {
  requireWithin('fromEndM', fromEndM, 0, 1e6)
  requirePositive('endK', endK)
  requirePositive('farK', farK)
  requirePositive('finM', finM)
  return farK + (endK - farK) * Math.exp(-fromEndM / finM)
}

/** Free expansion of a length between two temperatures, m: the stroke its bellows must take. */
export function expansionM(lengthM: number, fromK: number, toK: number): number {
  requireWithin('lengthM', lengthM, 0, 1e6)
  return lengthM * steelStrain(fromK, toK)
}

/**
 * Tube over gauge pressure where tube and gauge differ in temperature: sqrt(T_tube/T_gauge) in molecular flow (Knudsen
 * 1910), 1 in viscous flow, half way at 2 eta v/d with v = sqrt(2RT/M) (after Daude and others 2013; which speed they
 * mean is not verified). `diameterM` is that of the connecting line.
 */
export function transpirationRatio(
  tubeK: number,
  gaugeK: number,
  line: { gas: Gas; diameterM: number; pressurePa: number },
): number {
  requirePositive('diameterM', line.diameterM)
  requirePositive('tubeK', tubeK)
  requirePositive('gaugeK', gaugeK)
  requireWithin('pressurePa', line.pressurePa, 0, 1e6)
  const meanK = (tubeK + gaugeK) / 2
  const speed = Math.sqrt((2 * GAS_CONSTANT * meanK) / GAS_DATA[line.gas].molarMass)
  const half = (2 * viscosity(line.gas, meanK) * speed) / line.diameterM
  return 1 + (Math.sqrt(tubeK / gaugeK) - 1) / (1 + line.pressurePa / half)
}
