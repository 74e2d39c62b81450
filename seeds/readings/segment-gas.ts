/**
 * Gas in the segments of the demo by app/physics: what the wall gives off, what leaks in and what the pump takes away
 * make true partial pressures at three gauges, and those make a nitrogen-equivalent reading.
 */
import { molecularSpecific } from '../../app/physics/conductance.ts'
import { ION_SENSITIVITY, nitrogenEquivalent } from '../../app/physics/gauges.ts'
import { hydrogenDiffusivity, lowHydrogenRate, MILL_AGE_M2, slabRate } from '../../app/physics/hydrogen.ts'
import type { SegmentModel } from '../../app/physics/predict.ts'
import { linePositions, type SteadyLine, steadyPressures } from '../../app/physics/steady.ts'
import { DEFAULT_WATER, waterRateTime } from '../../app/physics/water.ts'
import { CART, GETTER_ION } from '../register/pump-speeds.ts'
import { type DemoSegment, HYDROGEN_C0, HYDROGEN_Q20, WATER_CAPACITY } from '../register/segments.ts'

/** West end, cross, east end. */
export type Gauge = 'A' | 'B' | 'C'
export type AtGauges = Record<Gauge, number>
export type PumpAtCross = 'own' | 'cart'

const ROOM_K = 291.15
/** Gauges stand this far from the end flanges, m. */
const INSET_M = 1
/** The bake that every baked segment has had: 150 °C for a week. */
const BAKE_AGE_M2 = hydrogenDiffusivity(423.15) * 168 * 3600
/** Share of argon in air by volume; a getter leaves it to the ion pump. */
const ARGON_SHARE = 0.0093
/** Nitrogen from a bottle brings less water to the wall than air does (own choice). */
const DRY_SHARE = 0.2
/** High vacuum finds the wall already giving off for a minute, as app/physics/predict.ts takes it. */
const LEAD_S = 60

const lengthOf = (segment: DemoSegment) => segment.endM - segment.startM

function gaugePositions(segment: DemoSegment): Record<Gauge, number> {
  const length = lengthOf(segment)
  return { A: INSET_M, B: length / 2, C: length - INSET_M }
}

/** Pressures at the gauges of one gas, Pa, with a wall rate in Pa·m/s or a leak in Pa·m³/s. */
function profile(
  segment: DemoSegment,
  pump: PumpAtCross,
  gas: 'H2' | 'H2O' | 'N2' | 'Ar',
  from: { wall?: number; leak?: { atM: number; loadPaM3S: number } },
): AtGauges {
  const speeds = pump === 'own' ? GETTER_ION : CART
  const gauges = gaugePositions(segment)
  const line: SteadyLine = {
    lengthM: lengthOf(segment),
    specific: molecularSpecific(gas, segment.diameterM, ROOM_K),
    sourcePerM: (from.wall ?? 0) * Math.PI * segment.diameterM,
    pumps: [{ atM: gauges.B, speedM3S: speeds[gas] ?? 0 }],
    ...(from.leak === undefined ? {} : { leaks: [from.leak] }),
  }
  const positions = linePositions(line, Object.values(gauges))
  const pressures = steadyPressures(line, positions)
  const at = (x: number) => pressures[positions.findIndex((one) => Math.abs(one - x) < 1e-6)] as number
  return { A: at(gauges.A), B: at(gauges.B), C: at(gauges.C) }
}

/** Diffusive age of the wall's hydrogen after a number of bakes, m². */
function hydrogenAge(bakes: number): number {
  return MILL_AGE_M2 + bakes * BAKE_AGE_M2
}

/** What the cold wall gives off, Pa·m/s, if the register is right about the steel. */
function wallHydrogen(segment: DemoSegment, bakes: number): number {
  if (segment.fired) return lowHydrogenRate(HYDROGEN_Q20, 293.15, ROOM_K)
  return slabRate({ c0PerM3: HYDROGEN_C0, wallM: segment.wallM }, ROOM_K, hydrogenAge(bakes), ROOM_K)
}

/** Hydrogen at the gauges as they read it, Pa nitrogen-equivalent. */
export function hydrogenReading(segment: DemoSegment, pump: PumpAtCross, bakes: number): AtGauges {
  const rate = wallHydrogen(segment, bakes)
  return mapGauges(profile(segment, pump, 'H2', { wall: rate }), (pa) => nitrogenEquivalent({ H2: pa }))
}

/** Water at the gauges as they read it, times the hours since high vacuum began, Pa·h. */
export function waterReading(segment: DemoSegment, pump: PumpAtCross, dry: boolean): AtGauges {
  const capacityPerM2 = WATER_CAPACITY * (dry ? DRY_SHARE : 1)
  const rateTime = waterRateTime(ROOM_K, { ...DEFAULT_WATER, capacityPerM2 })
  const unit = profile(segment, pump, 'H2O', { wall: 1 })
  return mapGauges(unit, (pa) => (nitrogenEquivalent({ H2O: pa }) * rateTime) / 3600)
}

/** What is left of the hours after the start, with the lead of the wall. */
export function waterHours(hours: number): number {
  return Math.max(0, hours) + LEAD_S / 3600
}

/** Air from a leak at the gauges as they read it, Pa nitrogen-equivalent: most of it nitrogen, and a little argon. */
export function leakReading(
  segment: DemoSegment,
  pump: PumpAtCross,
  leak: { offsetM: number; sizePaM3S: number },
): AtGauges {
  const air = profile(segment, pump, 'N2', {
    leak: { atM: leak.offsetM, loadPaM3S: leak.sizePaM3S * (1 - ARGON_SHARE) },
  })
  const argon = profile(segment, pump, 'Ar', {
    leak: { atM: leak.offsetM, loadPaM3S: leak.sizePaM3S * ARGON_SHARE },
  })
  return mapGauges(air, (pa, gauge) => pa + ION_SENSITIVITY.Ar * argon[gauge])
}

/** Rise of the closed segment, Pa nitrogen-equivalent an hour: what the wall gives off over the volume it fills. */
export function isolatedRise(segment: DemoSegment, bakes: number): number {
  return nitrogenEquivalent({ H2: wallHydrogen(segment, bakes) * (4 / segment.diameterM) * 3600 })
}

/** The segment for the full simulation of a bake, on a cart, with water as a vent leaves it. */
export function bakeModel(
  segment: DemoSegment,
  facts: { bakes: number; steel: number; waterShare: number },
): SegmentModel {
  return {
    lengthM: lengthOf(segment),
    diameterM: segment.diameterM,
    wallM: segment.wallM,
    temperatureK: ROOM_K,
    pumps: [{ atM: lengthOf(segment) / 2, speedM3S: CART }],
    hydrogen: segment.fired
      ? { kind: 'low-hydrogen', qPaMS: HYDROGEN_Q20 * facts.steel, atK: 293.15 }
      : { kind: 'diffusion', c0PerM3: HYDROGEN_C0 * facts.steel, agedTauM2: hydrogenAge(facts.bakes) },
    water: { state: 'unbaked', capacityPerM2: WATER_CAPACITY * facts.waterShare },
  }
}

/** The same for each gauge. */
export function mapGauges(values: AtGauges, change: (value: number, gauge: Gauge) => number): AtGauges {
  return { A: change(values.A, 'A'), B: change(values.B, 'B'), C: change(values.C, 'C') }
}
