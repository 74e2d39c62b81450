/**
 * What a bake plan says, and what follows from it by arithmetic alone: its steps, its setpoint over time, the permits
 * it needs. Hours count from the start of heating; preparation lies before hour 0.
 */
import { z } from 'zod'
import { coolSeconds, type HeatedTube } from '../physics/thermal.ts'
import { celsiusToKelvin } from '../physics/units.ts'
import type { BakePlanState, PlanPriority } from './planning.ts'

/** A permit is issued for at most so many days; a longer bake is handed over from one permit to the next. */
const PERMIT_DAYS = 10
const PERMIT_HOURS = PERMIT_DAYS * 24
/** Hours during which two permits of a chain are both in force, so that the handover leaves no gap (own choice). */
const PERMIT_OVERLAP_HOURS = 12

const hours = z.number().min(0).max(8766)

export const BakePlanContentSchema = z.object({
  /** One segment, or two in series. */
  segments: z.array(z.string().min(1).max(12)).min(1).max(2),
  /** When heating is meant to begin; null until somebody has placed it. */
  startsAt: z.iso.datetime().nullable(),
  prepHours: hours,
  celsius: z.number().min(40).max(300),
  upKH: z.number().min(0.5).max(60),
  /** The ramp waits while the pressure is above this, Pa nitrogen-equivalent. */
  holdPa: z.number().positive(),
  /** Heating is switched off above this, Pa; null where nobody has set one. */
  abortPa: z.number().positive().nullable(),
  /** The ramp waits while hottest and coldest thermocouple are further apart, kelvins. */
  spreadK: z.number().positive().max(200),
  soakHours: hours,
  /** The soak ends when its time is over and the curve agrees. */
  soakEnd: z.object({
    /** Pressure at temperature falls by less than this in twelve hours, %. */
    fallPercent: z.number().positive().max(100),
    /** Water gives less of the reading than hydrogen does. */
    waterBehind: z.boolean(),
  }),
  cooling: z.discriminatedUnion('kind', [
    z.object({ kind: z.literal('natural') }),
    z.object({ kind: z.literal('controlled'), downKH: z.number().min(0.5).max(60) }),
  ]),
  /** On the way down the cart hands over to the pump at the cross at this temperature. */
  pumpChangeC: z.number().min(20).max(300),
  /** Touch limit: cooling is over when the tube is below it. */
  coldC: z.number().min(25).max(80),
  testHours: hours,
  supply: z.string().max(12).nullable(),
  cart: z.string().max(12).nullable(),
  /** Nitrogen-equivalent reading that the cold segment is to meet, Pa. */
  targetPa: z.number().positive(),
  remarks: z.string().max(2000),
})

/** See the fields above for units. */
export type BakePlanContent = z.infer<typeof BakePlanContentSchema>

export const BAKE_PLAN_STATE_LABELS: Record<BakePlanState, string> = {
  draft: 'Draft',
  ready: 'Ready',
  'under-way': 'Under way',
  done: 'Done',
  withdrawn: 'Withdrawn',
}

export const PLAN_PRIORITY_LABELS: Record<PlanPriority, string> = {
  normal: 'Normal',
  urgent: 'Urgent',
  'can-wait': 'Can wait',
}

export const PLAN_STEP_LABELS = {
  preparation: 'Preparation',
  ramp: 'Ramp',
  soak: 'Soak',
  'cool-down': 'Cool-down',
  'post-bake-test': 'Post-bake test',
} as const
export type PlanStepKind = keyof typeof PLAN_STEP_LABELS

export interface PlanStep {
  kind: PlanStepKind
  /** Hours from the start of heating. */
  fromH: number
  toH: number
}

/** A stop of the ramp that the prediction expects, and how long it lasts. */
export interface RampHold {
  celsius: number
  hours: number
}

/** Room and tube that a plan's times depend on. */
export interface PlanSurroundings {
  ambientC: number
  tube: HeatedTube
}

/**
 * The steps of a plan with their hours.
 *
 * @param holds stops of the ramp that are expected, which make it longer
 */
export function planSteps(
  content: BakePlanContent,
  around: PlanSurroundings,
  holds: readonly RampHold[] = [],
): PlanStep[] {
  const rampH =
    (content.celsius - around.ambientC) / content.upKH + holds.reduce((sum, hold) => sum + hold.hours, 0)
  const coolH = coolHoursOf(content, around)
  const lengths: [PlanStepKind, number][] = [
    ['ramp', rampH],
    ['soak', content.soakHours],
    ['cool-down', coolH],
    ['post-bake-test', content.testHours],
  ]
  const steps: PlanStep[] = [{ kind: 'preparation', fromH: -content.prepHours, toH: 0 }]
  let at = 0
  for (const [kind, length] of lengths) {
    steps.push({ kind, fromH: at, toH: at + length })
    at += length
  }
  return steps
}

/** The step of a kind: every plan has all five. */
export function stepOf(steps: readonly PlanStep[], kind: PlanStepKind): PlanStep {
  const found = steps.find((step) => step.kind === kind)
  if (found === undefined) throw new RangeError(`a plan without the step ${kind}`)
  return found
}

/**
 * Hours from the end of the soak until the tube is below `coldC`. A tube cannot follow a setpoint that falls faster than
 * it cools by itself: then the free cooling counts from there on.
 */
function coolHoursOf(content: BakePlanContent, around: PlanSurroundings): number {
  return wallCurveDown(content, around).at(-1)?.hours ?? 0
}

interface CurvePoint {
  hours: number
  celsius: number
}

const COOL_STEPS = 60

/** Temperature of the wall on the way down, hours from the end of the soak; as slow as the slower of setpoint and nature. */
export function wallCurveDown(content: BakePlanContent, { tube, ambientC }: PlanSurroundings): CurvePoint[] {
  const points: CurvePoint[] = [{ hours: 0, celsius: content.celsius }]
  const lowest = Math.max(content.coldC, ambientC + 1)
  const step = Math.max(0, content.celsius - lowest) / COOL_STEPS
  if (step === 0) return points
  let at = 0
  for (let i = 1; i <= COOL_STEPS; i += 1) {
    const fromC = content.celsius - (i - 1) * step
    const toC = content.celsius - i * step
    const free = coolSeconds(tube, celsiusToKelvin(fromC), celsiusToKelvin(toC)) / 3600
    const set = content.cooling.kind === 'controlled' ? step / content.cooling.downKH : 0
    at += Math.max(free, set)
    points.push({ hours: at, celsius: toC })
  }
  return points
}

/**
 * What the controller is asked for: corners of straight pieces. While the tube cools by itself there is no setpoint and
 * the last corner is the end of the soak.
 */
export function setpointCurve(
  content: BakePlanContent,
  around: PlanSurroundings,
  holds: readonly RampHold[] = [],
): CurvePoint[] {
  const points: CurvePoint[] = [{ hours: 0, celsius: around.ambientC }]
  let at = 0
  let celsius = around.ambientC
  for (const hold of holds) {
    at += (hold.celsius - celsius) / content.upKH
    celsius = hold.celsius
    points.push({ hours: at, celsius }, { hours: at + hold.hours, celsius })
    at += hold.hours
  }
  at += (content.celsius - celsius) / content.upKH
  points.push({ hours: at, celsius: content.celsius })
  at += content.soakHours
  points.push({ hours: at, celsius: content.celsius })
  if (content.cooling.kind === 'controlled') {
    points.push({
      hours: at + (content.celsius - content.coldC) / content.cooling.downKH,
      celsius: content.coldC,
    })
  }
  return points
}

export interface PermitWindow {
  number: number
  fromH: number
  toH: number
}

/**
 * Permits that the hot time of a plan needs, from the start of heating until the tube is cold. A time longer than one
 * window is cut into a chain in which the next permit begins before the last one ends.
 */
export function permitWindows(steps: readonly PlanStep[]): PermitWindow[] {
  const endH = stepOf(steps, 'cool-down').toH
  const windows: PermitWindow[] = []
  let fromH = 0
  for (;;) {
    const toH = Math.min(endH, fromH + PERMIT_HOURS)
    windows.push({ number: windows.length + 1, fromH, toH })
    if (toH >= endH) return windows
    fromH = toH - PERMIT_OVERLAP_HOURS
  }
}

/** The chain of permits in a sentence; null where one permit covers the bake. */
export function permitChainText(windows: readonly PermitWindow[]): string | null {
  if (windows.length < 2) return null
  const days = (windows.at(-1)?.toH ?? 0) / 24
  return `The tube is hot for ${days.toFixed(1)} days and a permit covers at most ${PERMIT_DAYS}: this bake needs a chain of ${windows.length} permits, each taking over from the one before while that one is still in force.`
}
