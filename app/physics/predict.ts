/**
 * What a segment will do: pump-down in hours, the profile along it, and how long it or a bake takes to a target.
 *
 * The wall gives its gas slowly against the minutes that gas needs along a segment, so each gas stands at the steady
 * profile of the present outgassing: water on the plateau of its isotherm falls as 1/t everywhere alike, hydrogen
 * follows the age of the sheet. Pressures are nitrogen-equivalent, as an ion gauge shows them.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { nitrogenEquivalent } from './gauges.ts'
import { hydrogenDiffusivity } from './hydrogen.ts'
import {
  airPressure,
  hydrogenRate,
  hydrogenRateAfter,
  isothermOf,
  type ModelGas,
  requireModel,
  type SegmentModel,
  segmentLine,
  unbakedTemperature,
  unitPressure,
  waterAfterHold,
} from './segment-gas.ts'
import { linePositions, steadyPressures } from './steady.ts'
import { WATER_FLOOR_PA, waterRateTime } from './water.ts'

export type { SegmentModel } from './segment-gas.ts'

const HOUR_S = 3600
/** Lead time of the 1/t law of water: the wall has been giving gas for a minute when high vacuum starts (own choice). */
const WATER_LEAD_S = 60
/** A target not reached in twenty years of pumping is not reached, h. */
const LONGEST_PUMPING_H = 20 * 8766
/** Nor does anyone hold a bake longer than a year, h. */
const LONGEST_HOLD_H = 8766

export interface PumpDownPrediction {
  hours: Float64Array
  n2EquivalentPa: Float64Array
  byGasPa: Record<ModelGas, Float64Array>
}

/**
 * Pressure at `atM` over hours since the start of high vacuum. Air that is still in the gas phase then leaves within
 * minutes and is not counted. Throws on a gas that comes in but is pumped nowhere.
 */
export function predictPumpDown(
  model: SegmentModel,
  options: { hours: readonly number[]; atM: number },
): PumpDownPrediction {
  requireModel(model)
  const at = pressuresAt(model, options.atM)
  const count = options.hours.length
  const result: PumpDownPrediction = {
    hours: Float64Array.from(options.hours),
    n2EquivalentPa: new Float64Array(count),
    byGasPa: { H2O: new Float64Array(count), H2: new Float64Array(count), N2: new Float64Array(count) },
  }
  for (const [i, hours] of options.hours.entries()) {
    requireWithin('hours', hours, 0, 1e7)
    const partial = at(hours * HOUR_S)
    for (const gas of ['H2O', 'H2', 'N2'] as const) result.byGasPa[gas][i] = partial[gas]
    result.n2EquivalentPa[i] = nitrogenEquivalent(partial)
  }
  return result
}

/**
 * Profile of hydrogen and air leaks along the segment at t = 0, without water: what stands long after a bake. About
 * 41 points, among them both ends, every pump and every leak.
 */
export function steadyProfile(model: SegmentModel): { offsetM: number; n2EquivalentPa: number }[] {
  requireModel(model)
  const even = Array.from({ length: 41 }, (_, i) => (model.lengthM * i) / 40)
  const leaks = (model.airLeaks ?? []).map((leak) => ({ atM: leak.atM, loadPaM3S: leak.qPaM3S }))
  const positions = linePositions({ ...segmentLine(model, 'N2', 0), leaks }, even)
  const hydrogen = steadyPressures(segmentLine(model, 'H2', hydrogenRateAfter(model, 0)), positions)
  const air = steadyPressures({ ...segmentLine(model, 'N2', 0), leaks }, positions)
  return positions.map((offsetM, i) => ({
    offsetM,
    n2EquivalentPa: nitrogenEquivalent({ H2: hydrogen[i]!, N2: air[i]! }),
  }))
}

/** Hours of high vacuum until the reading at `atM` is at the target; null if not within twenty years. */
export function hoursToReach(model: SegmentModel, targetPa: number, atM: number): number | null {
  requireModel(model)
  requirePositive('targetPa', targetPa)
  const at = pressuresAt(model, atM)
  return firstTime((hours) => nitrogenEquivalent(at(hours * HOUR_S)) <= targetPa, LONGEST_PUMPING_H)
}

/**
 * Hours of hold at `bakeK` after which the cooled segment reads the target at `atM`, and the gas that decides it;
 * null if a year would not do. Ramps are not counted: they shorten the hold. The water closed form holds while
 * sites are still full at the highest energy; beyond, it promises too little, and never below the floor.
 */
export function bakeHoursToReach(
  model: SegmentModel,
  options: { targetPa: number; bakeK: number; atM: number },
): { hours: number; limitedBy: 'water' | 'hydrogen' } | null {
  requireModel(model)
  requirePositive('targetPa', options.targetPa)
  requireWithin('bakeK', options.bakeK, model.temperatureK, 1300)
  const after = pressuresAfterBake(model, options.bakeK, options.atM)
  const reached = (hours: number): boolean => nitrogenEquivalent(after(hours * HOUR_S)) <= options.targetPa
  const hours = firstTime(reached, LONGEST_HOLD_H)
  if (hours === null) return null
  const partial = after(Math.max(hours, 1e-3) * HOUR_S)
  const water = nitrogenEquivalent({ H2O: partial.H2O })
  return { hours, limitedBy: water > nitrogenEquivalent({ H2: partial.H2 }) ? 'water' : 'hydrogen' }
}

function pressuresAt(model: SegmentModel, atM: number): (seconds: number) => Record<ModelGas, number> {
  const { water } = model
  const hydrogenPerRate = unitPressure(model, 'H2', atM)
  const air = airPressure(model, atM)
  const hydrogen = (seconds: number): number => hydrogenPerRate * hydrogenRateAfter(model, seconds)
  if (water.state === 'baked') {
    return (seconds) => ({ H2O: water.floorPa, H2: hydrogen(seconds), N2: air })
  }
  const waterPerRate = unitPressure(model, 'H2O', atM)
  const rateTime = waterRateTime(model.temperatureK, isothermOf(water.capacityPerM2))
  return (seconds) => ({
    H2O: (waterPerRate * rateTime) / (seconds + WATER_LEAD_S),
    H2: hydrogen(seconds),
    N2: air,
  })
}

// Hot, each place stands at its own water pressure; cooled, it keeps its coverage.
function pressuresAfterBake(
  model: SegmentModel,
  bakeK: number,
  atM: number,
): (holdSeconds: number) => Record<ModelGas, number> {
  const { water } = model
  const hydrogenPerRate = unitPressure(model, 'H2', atM)
  const air = airPressure(model, atM)
  const hot = hydrogenDiffusivity(bakeK)
  const cooler = hydrogenDiffusivity(unbakedTemperature(model, bakeK))
  const held = water.state === 'unbaked' ? waterAfterHold(model, water.capacityPerM2, bakeK, atM) : null
  return (seconds) => ({
    H2O: water.state === 'baked' ? water.floorPa : Math.max(WATER_FLOOR_PA, held!.coldPa(seconds)),
    H2: hydrogenPerRate * hydrogenRate(model, hot * seconds, cooler * seconds),
    N2: air,
  })
}

/** Earliest time in (0, longest] at which a condition that stays true once it is holds; null if never. */
function firstTime(holds: (hours: number) => boolean, longest: number): number | null {
  const earliest = 1e-3
  if (!holds(longest)) return null
  if (holds(earliest)) return 0
  let low = Math.log(earliest)
  let high = Math.log(longest)
  while (high - low > 1e-10) {
    const middle = (low + high) / 2
    if (holds(Math.exp(middle))) high = middle
    else low = middle
  }
  return Math.exp(high)
}
