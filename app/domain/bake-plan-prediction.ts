/**
 * What the model expects of a plan: wall temperature, power, pressure by gas and stroke of the joints over time.
 *
 * Pressures come from the full simulation with the pumps of the bake. After the change of pumps the same outgassing is
 * taken to meet the pump at the cross: each gas is scaled by how the two pump it. That holds while the wall decides the
 * rate, as hydrogen does always and water does on a wall that a bake has emptied.
 */
import { z } from 'zod'
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { type SegmentModel, unitPressure } from '../physics/segment-gas.ts'
import { type Simulation, simulateSegment } from '../physics/simulate.ts'
import { expansionM } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import { type BakedSegment, heatedTube, powerW } from './bake-load.ts'
import {
  type BakePlanContent,
  type PlanStep,
  type PlanSurroundings,
  planSteps,
  type RampHold,
  setpointCurve,
  stepOf,
  wallCurveDown,
} from './bake-plan.ts'

const GASES = ['H2O', 'H2', 'N2'] as const

const series = z.array(z.number())
const SegmentPredictionSchema = z.object({
  tag: z.string(),
  /** Nitrogen-equivalent reading and partial pressures, Pa; empty where the register lacks what the model needs. */
  n2Pa: series,
  byGasPa: z.object({ H2O: series, H2: series, N2: series }),
  /** Stroke of one joint, mm, and what it may take. */
  strokeMm: series,
  travelMm: z.number(),
  ratedMm: z.number(),
  /** What the cold segment reads at the end of the test, Pa; null without a model. */
  afterPa: z.number().nullable(),
})

export const PlanPredictionSchema = z.object({
  ambientC: z.number(),
  /** Hours from the start of heating; at most 200 of them. */
  hours: series,
  setpointC: z.array(z.number().nullable()),
  wallC: series,
  /** Heat given to all segments of the plan, kW. */
  powerKW: series,
  segments: z.array(SegmentPredictionSchema),
  steps: z.array(
    z.object({
      kind: z.enum(['preparation', 'ramp', 'soak', 'cool-down', 'post-bake-test']),
      fromH: z.number(),
      toH: z.number(),
    }),
  ),
  /** Stops of the ramp that the pressure is expected to force. */
  holds: z.array(z.object({ celsius: z.number(), hours: z.number() })),
  /** More stops than were looked for, or one that would not end: the ramp is not expected to get through. */
  stuck: z.boolean(),
  peakKW: z.number(),
  soakKW: z.number(),
  energyKWh: z.number(),
})
export type PlanPrediction = z.infer<typeof PlanPredictionSchema>

/** A segment of a plan: its heat, and its vacuum with the pumps of the bake and with those after it. */
export interface PlannedSegment {
  baked: BakedSegment
  /** On the cart; null where the register lacks what the model needs. */
  hot: SegmentModel | null
  /** On the pump at the cross; null where there is none: the cart is taken to stay. */
  after: SegmentModel | null
  /** Hours of cold pumping that lie before the start of heating: the wall gives off water all that time. */
  coldHours: number
}

/** Stops of a ramp that are looked for: each costs two solves. */
const MOST_HOLDS = 4
/** A hold that has not brought the pressure down by then is none, h. */
const LONGEST_HOLD_H = 72
/** A hold ends when the pressure is this share of its limit, so that the next kelvin does not start another. */
const RELEASE_SHARE = 0.8

/**
 * Predicts a plan.
 *
 * @throws PhysicsError for a segment or a temperature that cannot be; RangeError for a plan without segments
 */
export function predictPlan(
  content: BakePlanContent,
  planned: readonly PlannedSegment[],
  ambientC: number,
): PlanPrediction {
  const [first] = planned
  if (first === undefined) throw new RangeError('a plan without segments cannot be predicted')
  const around: PlanSurroundings = { ambientC, tube: heatedTube(first.baked, ambientC) }
  const { holds, stuck } = expectedHolds(content, planned, around)
  const steps = planSteps(content, around, holds)
  const hours = outputHours(steps)
  const corners = wallCorners(content, around, holds)
  const wallC = hours.map((hour) => along(corners, hour))
  const setpoint = setpointCurve(content, around, holds)
  const lastSetH = setpoint.at(-1)?.hours ?? 0
  const power = hours.map((hour, i) =>
    heatKW(planned, content, ambientC, wallC[i] ?? ambientC, hour, steps, corners),
  )
  const segments = planned.map((one) => predictSegment(one, content, hours, wallC, corners, steps, ambientC))
  return {
    ambientC,
    hours,
    setpointC: hours.map((hour) => (hour > lastSetH + 1e-9 ? null : round(along(setpoint, hour), 2))),
    wallC: wallC.map((value) => round(value, 2)),
    powerKW: power.map((value) => round(value, 3)),
    segments,
    steps,
    holds,
    stuck,
    peakKW: round(Math.max(...power), 3),
    soakKW: round(
      planned.reduce((sum, { baked }) => sum + powerW(baked, ambientC, content.celsius, 0).totalW, 0) / 1000,
      3,
    ),
    energyKWh: round(energyOf(hours, power), 1),
  }
}

interface Corner {
  hours: number
  celsius: number
}

/** The wall follows the setpoint up and through the soak; on the way down nature may be slower. */
function wallCorners(
  content: BakePlanContent,
  around: PlanSurroundings,
  holds: readonly RampHold[],
): Corner[] {
  const up = setpointCurve({ ...content, cooling: { kind: 'natural' } }, around, holds)
  const endH = up.at(-1)?.hours ?? 0
  const down = wallCurveDown(content, around).slice(1)
  // Below the touch limit nobody watches the last kelvins; the tube is taken to come to rest within a day.
  const coldH = endH + (down.at(-1)?.hours ?? 0)
  const corners = [...up, ...down.map(({ hours, celsius }) => ({ hours: endH + hours, celsius }))]
  return content.testHours > 0
    ? [...corners, { hours: coldH + Math.min(24, content.testHours), celsius: around.ambientC }]
    : corners
}

function along(corners: readonly Corner[], hour: number): number {
  let before = corners[0]
  if (before === undefined) throw new RangeError('a curve without corners')
  for (const corner of corners) {
    if (corner.hours >= hour) {
      const span = corner.hours - before.hours
      return span <= 0
        ? corner.celsius
        : before.celsius + ((hour - before.hours) / span) * (corner.celsius - before.celsius)
    }
    before = corner
  }
  return before.celsius
}

// Close together where something happens, and never more than 200 in all.
function outputHours(steps: readonly PlanStep[]): number[] {
  const counts = { ramp: 52, soak: 60, 'cool-down': 50, 'post-bake-test': 30 } as const
  const hours: number[] = [0]
  for (const step of steps) {
    if (step.kind === 'preparation') continue
    const span = step.toH - step.fromH
    if (span <= 0) continue
    const count = counts[step.kind]
    for (let i = 1; i <= count; i += 1) {
      // The first hours of a soak are where the pressure falls fastest.
      const share = step.kind === 'soak' ? (i / count) ** 1.6 : i / count
      hours.push(round(step.fromH + share * span, 4))
    }
  }
  return hours.filter((hour, i) => i === 0 || hour > (hours[i - 1] ?? 0))
}

function heatKW(
  planned: readonly PlannedSegment[],
  content: BakePlanContent,
  ambientC: number,
  celsius: number,
  hour: number,
  steps: readonly PlanStep[],
  corners: readonly Corner[],
): number {
  const soakEnd = stepOf(steps, 'soak').toH
  const off =
    hour > soakEnd + 1e-9 && (content.cooling.kind === 'natural' || hour > stepOf(steps, 'cool-down').toH)
  if (off) return 0
  // The rate that led here: at the top of the ramp the climb still counts, which is the peak.
  const backH = Math.min(hour, 0.05)
  const rateKH = backH <= 0 ? content.upKH : (celsius - along(corners, hour - backH)) / backH
  return planned.reduce((sum, { baked }) => {
    const { totalW } = powerW(baked, ambientC, celsius, rateKH)
    return sum + Math.max(0, totalW) / 1000
  }, 0)
}

function energyOf(hours: readonly number[], powerKW: readonly number[]): number {
  let sum = 0
  for (let i = 1; i < hours.length; i += 1) {
    const span = (hours[i] ?? 0) - (hours[i - 1] ?? 0)
    sum += (span * ((powerKW[i] ?? 0) + (powerKW[i - 1] ?? 0))) / 2
  }
  return sum
}

/** Where the gauge that matters sits: at the end farther from the pump, where the reading is highest. */
function worstEndM(model: SegmentModel): number {
  const distance = (atM: number) => Math.min(...model.pumps.map((pump) => Math.abs(pump.atM - atM)))
  return distance(0) >= distance(model.lengthM) ? 0 : model.lengthM
}

function solve(
  { model, coldHours }: { model: SegmentModel; coldHours: number },
  corners: readonly Corner[],
  hours: readonly number[],
): Simulation {
  // The solver's time begins with high vacuum; the plan's with heating.
  const leadH = Math.max(1, coldHours)
  return simulateSegment(model, {
    corners: corners
      .filter((corner, i) => i === 0 || corner.hours > (corners[i - 1]?.hours ?? 0) + 1e-9)
      .map((corner) => ({ atS: (leadH + corner.hours) * 3600, kelvin: celsiusToKelvin(corner.celsius) })),
    hours: hours.map((hour) => leadH + hour),
    atM: worstEndM(model),
  })
}

/** Stops of the ramp that the hold limit will force, the segments of a pair together. */
function expectedHolds(
  content: BakePlanContent,
  planned: readonly PlannedSegment[],
  around: PlanSurroundings,
): { holds: RampHold[]; stuck: boolean } {
  const models = planned.flatMap(({ hot, coldHours }) => (hot === null ? [] : [{ model: hot, coldHours }]))
  const holds: RampHold[] = []
  if (models.length === 0) return { holds, stuck: false }
  const highest = (corners: readonly Corner[], hours: readonly number[]): number[] => {
    const runs = models.map((model) => solve(model, corners, hours).n2EquivalentPa)
    return hours.map((_, i) => Math.max(...runs.map((run) => run[i] ?? 0)))
  }
  for (;;) {
    const corners = wallCorners(content, around, holds)
    const ramp = stepOf(planSteps(content, around, holds), 'ramp')
    const hours = Array.from({ length: 80 }, (_, i) => ((i + 1) / 80) * ramp.toH)
    const pressure = highest(corners, hours)
    const at = hours.findIndex((hour, i) => {
      const climbing = along(corners, hour) > along(corners, hour - 0.05) + 1e-6
      return (
        climbing &&
        (pressure[i] ?? 0) > content.holdPa &&
        along(corners, hour) > (holds.at(-1)?.celsius ?? 0) + 1
      )
    })
    if (at < 0) return { holds, stuck: false }
    if (holds.length >= MOST_HOLDS) return { holds, stuck: true }
    const hour = hours[at] ?? 0
    const celsius = along(corners, hour)
    const trial = wallCorners(content, around, [...holds, { celsius, hours: LONGEST_HOLD_H }])
    const waiting = Array.from({ length: 72 }, (_, i) => hour + ((i + 1) / 72) ** 2 * LONGEST_HOLD_H)
    const calm = highest(trial, waiting).findIndex((pa) => pa < content.holdPa * RELEASE_SHARE)
    if (calm < 0) return { holds: [...holds, { celsius, hours: LONGEST_HOLD_H }], stuck: true }
    holds.push({ celsius: round(celsius, 1), hours: round((waiting[calm] ?? hour) - hour, 2) })
  }
}

function predictSegment(
  { baked, hot, after, coldHours }: PlannedSegment,
  content: BakePlanContent,
  hours: readonly number[],
  wallC: readonly number[],
  corners: readonly Corner[],
  steps: readonly PlanStep[],
  ambientC: number,
): PlanPrediction['segments'][number] {
  const lengthM = baked.endM - baked.startM
  const strokeMm = wallC.map((celsius) =>
    round(
      (expansionM(lengthM, celsiusToKelvin(ambientC), celsiusToKelvin(celsius)) * 1000) / baked.bellowsCount,
      2,
    ),
  )
  const common = { tag: baked.tag, strokeMm, travelMm: baked.bellowsTravelMm, ratedMm: baked.bellowsRatedMm }
  if (hot === null) return { ...common, n2Pa: [], byGasPa: { H2O: [], H2: [], N2: [] }, afterPa: null }
  const run = solve({ model: hot, coldHours }, corners, hours)
  const soakEnd = stepOf(steps, 'soak').toH
  const changed = (i: number): boolean =>
    after !== null && (hours[i] ?? 0) > soakEnd && (wallC[i] ?? 0) <= content.pumpChangeC
  const scale = (gas: (typeof GASES)[number]): number => (after === null ? 1 : pumpedAlike(hot, after, gas))
  const byGas = (gas: (typeof GASES)[number]): number[] => {
    const factor = scale(gas)
    return hours.map((_, i) => {
      const pa = run.byGasPa[gas][i] ?? 0
      return significant(changed(i) ? pa * factor : pa)
    })
  }
  const byGasPa = { H2O: byGas('H2O'), H2: byGas('H2'), N2: byGas('N2') }
  const n2Pa = hours.map((_, i) =>
    significant(
      nitrogenEquivalent({ H2O: byGasPa.H2O[i] ?? 0, H2: byGasPa.H2[i] ?? 0, N2: byGasPa.N2[i] ?? 0 }),
    ),
  )
  return { ...common, n2Pa, byGasPa, afterPa: n2Pa.at(-1) ?? null }
}

/** Pressure that the same outgassing gives on the later pump over that on the cart. */
function pumpedAlike(hot: SegmentModel, after: SegmentModel, gas: (typeof GASES)[number]): number {
  // Without a leak no air is solved for, and nothing need be known of how it is pumped.
  if (gas === 'N2' && (hot.airLeaks ?? []).length === 0) return 1
  const later = unitPressure(after, gas, worstEndM(after))
  const now = unitPressure(hot, gas, worstEndM(hot))
  return Number.isFinite(later) && later > 0 && now > 0 ? later / now : 1
}

function round(value: number, digits: number): number {
  const power = 10 ** digits
  return Math.round(value * power) / power
}

function significant(value: number): number {
  return value === 0 ? 0 : Number(value.toPrecision(5))
}
