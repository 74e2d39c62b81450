/**
 * The physical model of a segment, made from what the register says of it. The register holds facts about hardware;
 * app/physics holds equations; this is the only place where one becomes the other.
 */
import type { PlacedPump, SegmentWithState } from '../db/queries/segments.server.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'
import { molecularSpecific } from '../physics/conductance.ts'
import { hydrogenDiffusivity, MILL_AGE_M2 } from '../physics/hydrogen.ts'
import { bakeHoursToReach, predictPumpDown, type SegmentModel, steadyProfile } from '../physics/predict.ts'
import { WATER_FLOOR_PA } from '../physics/water.ts'
import type { StandingSegment } from './standing.server.ts'

const ROOM_K = 293.15
/** Steel that was never baked is taken to have lain at room temperature for ten years since the mill: an assumption. */
const STORED_S = 10 * 365.25 * 86_400
/** The bake that a baked, unfired segment is taken to have had: 150 °C for a week, the site's usual one. */
const USUAL_BAKE_K = 423.15
const USUAL_BAKE_S = 168 * 3600

/** Whether water, rather than hydrogen from the steel, decides the pressure: never baked, or vented since. */
function isUnbaked(segment: SegmentWithState): boolean {
  return segment.lastBakeYear === null
}

/**
 * The model of a segment with the pumps given, cold; null when no high-vacuum pump works on it or its register entry
 * lacks what the model needs.
 */
export function coldModel(segment: SegmentWithState, pumps: readonly PlacedPump[]): SegmentModel | null {
  const working = pumps.filter(({ kind }) => kind !== 'roughing-set')
  if (working.length === 0 || !takesEveryGas(segment, working)) return null
  const hydrogen = hydrogenOf(segment)
  if (hydrogen === null) return null
  return {
    lengthM: segment.endM - segment.startM,
    diameterM: segment.innerDiameterM,
    wallM: segment.wallM,
    temperatureK: ROOM_K,
    pumps: working.map(({ offsetM, speeds }) => ({ atM: offsetM, speedM3S: speeds })),
    hydrogen,
    water: isUnbaked(segment)
      ? { state: 'unbaked', capacityPerM2: segment.waterCapacity }
      : { state: 'baked', floorPa: WATER_FLOOR_PA },
  }
}

/** Whether the pumps take all that the wall gives; without a speed for a gas the register does not say what becomes of it. */
function takesEveryGas(segment: SegmentWithState, pumps: readonly PlacedPump[]): boolean {
  const gases = isUnbaked(segment) ? (['H2', 'H2O'] as const) : (['H2'] as const)
  return gases.every((gas) => pumps.some(({ speeds }) => (speeds[gas] ?? 0) > 0))
}

function hydrogenOf(segment: SegmentWithState): SegmentModel['hydrogen'] | null {
  if (segment.hydrogenModel === 'low-hydrogen') {
    return segment.hydrogenQ20 === null
      ? null
      : { kind: 'low-hydrogen', qPaMS: segment.hydrogenQ20, atK: ROOM_K }
  }
  if (segment.hydrogenC0 === null) return null
  const agedTauM2 = isUnbaked(segment)
    ? MILL_AGE_M2 + hydrogenDiffusivity(ROOM_K) * STORED_S
    : MILL_AGE_M2 + hydrogenDiffusivity(USUAL_BAKE_K) * USUAL_BAKE_S
  return { kind: 'diffusion', c0PerM3: segment.hydrogenC0, agedTauM2 }
}

/**
 * Pressure at the ends over pressure at the pump for hydrogen from the whole wall and one pump at mid-length:
 * 1 + L·S/(8c), with c the specific conductance (parabolic profile of a tube outgassing evenly toward its middle).
 *
 * @returns null when no pump works, more than one does, or it does not stand at mid-length
 */
export function endToCrossRatio(segment: SegmentWithState, pumps: readonly PlacedPump[]): number | null {
  const lengthM = segment.endM - segment.startM
  const [pump, second] = pumps.filter(({ kind }) => kind !== 'roughing-set')
  if (pump === undefined || second !== undefined || segment.state === 'isolated-test') return null
  if (Math.abs(pump.offsetM - lengthM / 2) > 0.1 * lengthM) return null
  const speed = pump.speeds.H2
  if (speed === undefined) return null
  const specific = molecularSpecific('H2', segment.innerDiameterM, ROOM_K)
  return 1 + (lengthM * speed) / (8 * specific)
}

/** Pressure expected along a segment now, nitrogen-equivalent; null in states for which there is no model. */
export function predictedProfile(
  { segment, pumps }: StandingSegment,
  at: Date,
): { offsetM: number; pa: number }[] | null {
  const facts = SEGMENT_STATES[segment.state]
  if (facts.hot || !facts.highVacuum || segment.state === 'isolated-test') return null
  const model = coldModel(segment, pumps)
  if (model === null) return null
  if (model.water.state === 'baked') {
    return steadyProfile(model).map(({ offsetM, n2EquivalentPa }) => ({ offsetM, pa: n2EquivalentPa }))
  }
  const hours = segment.since === null ? null : (at.getTime() - segment.since.getTime()) / 3_600_000
  if (segment.state !== 'pumping' || hours === null || hours <= 0) return null
  const points = 13
  return Array.from({ length: points }, (_, index) => {
    const offsetM = (model.lengthM * index) / (points - 1)
    return {
      offsetM,
      pa: predictPumpDown(model, { hours: [hours], atM: offsetM }).n2EquivalentPa[0] ?? Number.NaN,
    }
  }).filter(({ pa }) => Number.isFinite(pa))
}

type Soak = { hours: number; limitedBy: 'water' | 'hydrogen' }

export interface BakeAnswer {
  /** Soak that brings the ends to the target; null when none does. Never baked steel counts as fresh from the mill. */
  soak: Soak | null
  /** The same for never baked steel that has lain for years, which has lost hydrogen meanwhile; null for baked steel. */
  soakAtBest: Soak | null
  /** How many times the register's hydrogen was taken to explain the present reading; 1 when the model explains it. */
  hydrogenTimes: number
}

/** A reading this much above the model is no longer scatter of gauges. */
const UNEXPLAINED = 1.3

/**
 * Soak at a temperature that would bring the ends of the segment to a target, with the pump it has in service. Where a
 * baked segment reads above its model, hydrogen is scaled to the reading, as if it were all hydrogen; a leak would not
 * yield to a bake.
 *
 * @param crossPa fresh reading at the pump, nitrogen-equivalent; null without one
 * @returns null when the register lacks what the model needs
 */
export function bakeToReach(
  segment: SegmentWithState,
  everPlaced: readonly PlacedPump[],
  crossPa: number | null,
  target: { pa: number; bakeC: number },
): BakeAnswer | null {
  const own = everPlaced.filter(({ kind }) => kind === 'getter-ion')
  // One pump holds a segment in service; of several placements over the years the last one counts.
  const model = coldModel(segment, (own.length > 0 ? own : everPlaced).slice(-1))
  if (model === null) return null
  const hydrogenTimes = hydrogenExcess(model, crossPa)
  const soakOf = (hydrogen: SegmentModel['hydrogen']) =>
    bakeHoursToReach(
      { ...model, hydrogen: scaleHydrogen(hydrogen, hydrogenTimes) },
      { targetPa: target.pa, bakeK: target.bakeC + 273.15, atM: 0 },
    )
  const fresh = freshFromMill(model)
  return {
    soak: soakOf(fresh ?? model.hydrogen),
    soakAtBest: fresh === null ? null : soakOf(model.hydrogen),
    hydrogenTimes,
  }
}

/** The hydrogen of never baked steel before it lay about; null for steel that has been baked. */
function freshFromMill({ hydrogen, water }: SegmentModel): SegmentModel['hydrogen'] | null {
  if (water.state !== 'unbaked' || hydrogen.kind !== 'diffusion') return null
  return { ...hydrogen, agedTauM2: MILL_AGE_M2 }
}

/**
 * How many times a model's hydrogen explains the present reading at the cross, as if all of it were hydrogen; 1 when the
 * model explains it, and for a wall whose water decides.
 *
 * @param crossPa fresh reading at the pump, nitrogen-equivalent; null without one
 */
export function hydrogenExcess(model: SegmentModel, crossPa: number | null): number {
  if (crossPa === null || model.water.state === 'unbaked') return 1
  const expected = Math.min(...steadyProfile(model).map(({ n2EquivalentPa }) => n2EquivalentPa))
  const times = crossPa / expected
  return times > UNEXPLAINED ? times : 1
}

/** The same hydrogen, so many times as much of it. */
export function scaleHydrogen(hydrogen: SegmentModel['hydrogen'], times: number): SegmentModel['hydrogen'] {
  return hydrogen.kind === 'diffusion'
    ? { ...hydrogen, c0PerM3: hydrogen.c0PerM3 * times }
    : { ...hydrogen, qPaMS: hydrogen.qPaMS * times }
}
