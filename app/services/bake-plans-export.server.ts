/** A plan as files: a table for a spreadsheet, and a calendar of its steps. */
import ical from 'ical-generator'
import Papa from 'papaparse'
import type { Db } from '../db/client.server.ts'
import { type BakePlanContent, PLAN_STEP_LABELS, type PlanStep, permitWindows } from '../domain/bake-plan.ts'
import { DomainError } from '../domain/errors.ts'
import { readPlan } from './bake-plans.server.ts'
import { getSite } from './site.server.ts'

const HOUR_MS = 3_600_000

/** The predicted curves by the hour, one line a point; cells that are not known stay empty. */
export async function planCsv(db: Db, planId: number): Promise<string> {
  const { plan, content, prediction } = await readPlan(db, planId)
  const start = content.startsAt === null ? null : Date.parse(content.startsAt)
  const lines = prediction.hours.map((hour, i) => ({
    plan: plan.id,
    version: plan.version,
    hours_from_heating: hour,
    time_utc: start === null ? '' : new Date(start + hour * HOUR_MS).toISOString(),
    step: stepAt(prediction.steps, hour),
    setpoint_degC: prediction.setpointC[i] ?? '',
    wall_degC: prediction.wallC[i],
    power_kW: prediction.powerKW[i],
    ...Object.fromEntries(
      prediction.segments.flatMap((one) => [
        [`${one.tag}_pressure_N2eq_Pa`, one.n2Pa[i] ?? ''],
        [`${one.tag}_water_Pa`, one.byGasPa.H2O[i] ?? ''],
        [`${one.tag}_hydrogen_Pa`, one.byGasPa.H2[i] ?? ''],
        [`${one.tag}_joint_stroke_mm`, one.strokeMm[i] ?? ''],
      ]),
    ),
  }))
  return `${Papa.unparse(lines, { newline: '\r\n' })}\r\n`
}

function stepAt(steps: readonly PlanStep[], hour: number): string {
  // A step ends where the next begins; that instant belongs to the one that ends.
  const found = steps.find(({ kind, fromH, toH }) => kind !== 'preparation' && hour >= fromH && hour <= toH)
  return found?.kind ?? ''
}

/**
 * The steps and permits of a plan as a calendar (RFC 5545).
 *
 * @throws DomainError not-found; not-acceptable-now while the plan has no start, because a calendar needs dates
 */
export async function planCalendar(db: Db, planId: number, now: Date): Promise<string> {
  const { plan, content, prediction } = await readPlan(db, planId)
  const { name, code } = await getSite(db)
  if (content.startsAt === null) {
    throw new DomainError(
      'not-acceptable-now',
      'This plan has no start of heating yet, so its steps have no dates. Give it one in a new version.',
    )
  }
  const start = Date.parse(content.startsAt)
  const calendar = ical({
    name: `${plan.title}, ${name}`,
    prodId: { company: 'ebbline', product: 'bake-plans' },
  })
  const what = content.segments.join(' + ')
  const add = (key: string, fromH: number, toH: number, summary: string, description: string) =>
    calendar.createEvent({
      // The same step of a later version replaces the earlier one in the reader's calendar.
      id: `bake-plan-${plan.id}-${key}@${code.toLowerCase()}.ebbline.invalid`,
      sequence: plan.version,
      stamp: now,
      start: new Date(start + fromH * HOUR_MS),
      end: new Date(start + toH * HOUR_MS),
      summary,
      description,
      location: what,
    })
  for (const { kind, fromH, toH } of prediction.steps) {
    if (toH <= fromH) continue
    add(kind, fromH, toH, `${PLAN_STEP_LABELS[kind]}: ${what}`, stepDescription(kind, content, plan.version))
  }
  const permits = permitWindows(prediction.steps)
  for (const { number, fromH, toH } of permits) {
    const text = `Permit ${number} of ${permits.length}: ${what}`
    add(`permit-${number}`, fromH, toH, text, 'The hot time that this permit has to cover.')
  }
  return calendar.toString()
}

function stepDescription(kind: PlanStep['kind'], content: BakePlanContent, version: number): string {
  const made = `Bake plan version ${version}.`
  switch (kind) {
    case 'preparation':
      return `${made} Cart ${content.cart ?? 'not named'}, supply ${content.supply ?? 'not named'}.`
    case 'ramp':
      return `${made} ${content.upKH} °C/h to ${content.celsius} °C; waits above ${content.holdPa} Pa or ${content.spreadK} °C of spread. Two people at first energising.`
    case 'soak':
      return `${made} ${content.celsius} °C for ${content.soakHours} h, and until the pressure falls by less than ${content.soakEnd.fallPercent} % in 12 h.`
    case 'cool-down':
      return `${made} Change of pumps at ${content.pumpChangeC} °C; cold below ${content.coldC} °C, measured.`
    case 'post-bake-test':
      return `${made} Target ${content.targetPa} Pa.`
  }
}
