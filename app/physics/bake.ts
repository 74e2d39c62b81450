/**
 * What a bake leaves behind, how long it must be held for a target, and the choices between temperature, time and
 * energy. Pressures in Pa after cooling; water by the emptying front, hydrogen by the age of the sheet, ramps counted.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { GAS_CONSTANT } from './constants.ts'
import { nitrogenEquivalent } from './gauges.ts'
import { AUSTENITIC_DIFFUSIVITY, transformedTime } from './hydrogen.ts'
import {
  airPressure,
  hydrogenRate,
  isothermOf,
  requireModel,
  type SegmentModel,
  unbakedTemperature,
  unitPressure,
  waterAfterHold,
} from './segment-gas.ts'
import { emptyingFront, WATER_FLOOR_PA, waterRateTime, waterScalePressure } from './water.ts'

const HOUR_S = 3600
/** Nobody holds a bake longer than a year, h. */
const LONGEST_HOLD_H = 8766

export interface BakeProgramme {
  bakeK: number
  holdHours: number
  /** Kelvins per hour up and down; the same down as up unless given. */
  upKH: number
  downKH?: number
  /** Hours of pumping at the cold temperature that count too, before the bake or after it; none unless given. */
  coldHours?: number
  /** Pumps that take over once the segment is cold; those of the model stay unless given. */
  afterPumps?: SegmentModel['pumps']
}

export interface BakeOutcome {
  waterPa: number
  /** True where nothing but "at or below the floor" can be said of the water. */
  waterAtFloor: boolean
  hydrogenPa: number
  airPa: number
  n2EquivalentPa: number
  limitedBy: 'water' | 'hydrogen' | 'air'
}

/**
 * Pressures at `atM` once the segment is cold again after the bake. The water closed form takes each place at its own
 * pressure while hot; it agrees with full transport along a
 * 150 m tube to a few per cent while the front lies inside the energies, and is not knowable beyond (see the tests).
 */
export function afterBake(model: SegmentModel, programme: BakeProgramme, atM: number): BakeOutcome {
  requireProgramme(model, programme)
  return outcomeAt(model, atM, programme.bakeK, rampsOf(programme))(programme.holdHours)
}

/**
 * Least hours of hold after which the cold segment reads `targetPa` (as nitrogen) at `atM`; 0 where the ramps alone do;
 * null where a year would not.
 */
export function holdToMeet(
  model: SegmentModel,
  programme: Omit<BakeProgramme, 'holdHours'>,
  targetPa: number,
  atM: number,
): { holdHours: number; outcome: BakeOutcome } | null {
  requirePositive('targetPa', targetPa)
  requireProgramme(model, { ...programme, holdHours: 0 })
  const outcome = outcomeAt(model, atM, programme.bakeK, rampsOf(programme))
  const meets = (hours: number): boolean => outcome(hours).n2EquivalentPa <= targetPa
  if (!meets(LONGEST_HOLD_H)) return null
  if (meets(0)) return { holdHours: 0, outcome: outcome(0) }
  let low = Math.log(1e-3)
  let high = Math.log(LONGEST_HOLD_H)
  while (high - low > 1e-9) {
    const middle = (low + high) / 2
    if (meets(Math.exp(middle))) high = middle
    else low = middle
  }
  return { holdHours: Math.exp(high), outcome: outcome(Math.exp(high)) }
}

/**
 * Seconds at `otherK` that do for one gas what `seconds` at `hotK` did: hydrogen by equal age, water by an equally deep
 * emptying front at a wall area over pumping speed `areaOverSpeed` in s/m.
 */
export function equivalentHold(
  gas: 'hydrogen' | 'water',
  hotK: number,
  seconds: number,
  otherK: number,
  areaOverSpeed: number,
): number {
  requirePositive('seconds', seconds)
  requireWithin('hotK', hotK, 250, 1300)
  requireWithin('otherK', otherK, 250, 1300)
  if (gas === 'hydrogen') {
    return seconds * Math.exp((AUSTENITIC_DIFFUSIVITY.energyJMol / GAS_CONSTANT) * (1 / otherK - 1 / hotK))
  }
  requirePositive('areaOverSpeed', areaOverSpeed)
  const front = emptyingFront((areaOverSpeed * waterRateTime(hotK)) / seconds, hotK)
  const otherPa = waterScalePressure(otherK) * Math.exp(-front / (GAS_CONSTANT * otherK))
  return (areaOverSpeed * waterRateTime(otherK)) / otherPa
}

interface Ramps {
  upKH: number
  downKH: number
  coldHours: number
  afterPumps: SegmentModel['pumps'] | undefined
}

function rampsOf(programme: Omit<BakeProgramme, 'holdHours'>): Ramps {
  const { upKH, downKH = upKH, coldHours = 0, afterPumps } = programme
  return { upKH, downKH, coldHours, afterPumps }
}

function requireProgramme(model: SegmentModel, programme: BakeProgramme): void {
  requireModel(model)
  requireWithin('bakeK', programme.bakeK, model.temperatureK, 1300)
  requireWithin('holdHours', programme.holdHours, 0, 1e6)
  requireWithin('upKH', programme.upKH, 0.1, 1000)
  if (programme.downKH !== undefined) requireWithin('downKH', programme.downKH, 0.1, 1000)
  if (programme.coldHours !== undefined) requireWithin('coldHours', programme.coldHours, 0, 1e6)
  if (programme.afterPumps !== undefined) requireModel({ ...model, pumps: programme.afterPumps })
}

function outcomeAt(
  model: SegmentModel,
  atM: number,
  bakeK: number,
  ramps: Ramps,
): (holdHours: number) => BakeOutcome {
  // What the wall still holds sets the water when the pumps change; hydrogen and air follow the new pumps at once.
  const later = ramps.afterPumps === undefined ? model : { ...model, pumps: ramps.afterPumps }
  const water = waterAfter(model, later, atM, bakeK, ramps)
  const hydrogen = hydrogenAfter(later, atM, bakeK, ramps)
  const airPa = airPressure(later, atM)
  return (holdHours) => {
    const { waterPa, waterAtFloor } = water(holdHours)
    const hydrogenPa = hydrogen(holdHours)
    const shares = {
      water: nitrogenEquivalent({ H2O: waterPa }),
      hydrogen: nitrogenEquivalent({ H2: hydrogenPa }),
      air: airPa,
    }
    // Water at its floor is no measured gas: it may add to the sum but never counts as what limits.
    let limitedBy: BakeOutcome['limitedBy'] = shares.hydrogen >= shares.air ? 'hydrogen' : 'air'
    if (!waterAtFloor && shares.water > shares[limitedBy]) limitedBy = 'water'
    return {
      waterPa,
      waterAtFloor,
      hydrogenPa,
      airPa,
      n2EquivalentPa: shares.water + shares.hydrogen + shares.air,
      limitedBy,
    }
  }
}

function waterAfter(
  model: SegmentModel,
  later: SegmentModel,
  atM: number,
  bakeK: number,
  ramps: Ramps,
): (holdHours: number) => { waterPa: number; waterAtFloor: boolean } {
  const { water, temperatureK } = model
  if (water.state === 'baked') return () => ({ waterPa: water.floorPa, waterAtFloor: true })
  const isotherm = isothermOf(water.capacityPerM2)
  const held = waterAfterHold(model, water.capacityPerM2, bakeK, atM)
  const coldRateTime = unitPressure(later, 'H2O', atM, temperatureK) * waterRateTime(temperatureK, isotherm)
  return (holdHours) => {
    // Near the top of a ramp the release falls by e every RT2/E: so many kelvins of each ramp work like the hold.
    let seconds = Math.max(holdHours, 0) * HOUR_S
    let energy = 0.9 * isotherm.highJMol
    for (let round = 0; round < 6; round++) {
      const near = (GAS_CONSTANT * bakeK ** 2) / energy
      seconds = (holdHours + near / ramps.upKH + near / ramps.downKH) * HOUR_S
      const found = emptyingFront(held.hotPa(seconds), bakeK, isotherm)
      energy = Math.min(isotherm.highJMol, Math.max(isotherm.lowJMol, found))
    }
    // Cold pumping goes on along the 1/t line from the time that would have brought the unbaked wall here.
    const sameAsSeconds = coldRateTime / held.coldPa(seconds)
    const waterPa = coldRateTime / (sameAsSeconds + ramps.coldHours * HOUR_S)
    return { waterPa: Math.max(WATER_FLOOR_PA, waterPa), waterAtFloor: waterPa <= WATER_FLOOR_PA }
  }
}

function hydrogenAfter(
  model: SegmentModel,
  atM: number,
  bakeK: number,
  ramps: Ramps,
): (holdHours: number) => number {
  const { temperatureK } = model
  const perRate = unitPressure(model, 'H2', atM, temperatureK)
  const rampsTo = (topK: number): number => {
    const rise = bakeK - temperatureK
    return transformedTime([
      { seconds: (rise / ramps.upKH) * HOUR_S, fromK: temperatureK, toK: topK },
      { seconds: (rise / ramps.downKH) * HOUR_S, fromK: topK, toK: temperatureK },
      { seconds: ramps.coldHours * HOUR_S, fromK: temperatureK, toK: temperatureK },
    ])
  }
  const unbakedK = unbakedTemperature(model, bakeK)
  const ramped = rampsTo(bakeK)
  const cooler = rampsTo(unbakedK)
  return (holdHours) => {
    const heldAt = (kelvin: number): number =>
      transformedTime([{ seconds: holdHours * HOUR_S, fromK: kelvin, toK: kelvin }])
    return perRate * hydrogenRate(model, ramped + heldAt(bakeK), cooler + heldAt(unbakedK))
  }
}
