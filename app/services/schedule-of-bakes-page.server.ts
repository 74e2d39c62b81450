/** What the page of the schedule shows, and the same as a table and as a calendar. */
import ical from 'ical-generator'
import Papa from 'papaparse'
import type { Db } from '../db/client.server.ts'
import { listPlans } from '../db/queries/bake-plans.server.ts'
import { listSchedules } from '../db/queries/bake-schedules.server.ts'
import { listSegments, listStates } from '../db/queries/segments.server.ts'
import { type Actor, may } from '../domain/actor.ts'
import { bakesIn } from '../domain/bake-history.ts'
import type { ScheduleObjective, ScheduleState } from '../domain/planning.ts'
import { type ScheduleOutcome, ScheduleOutcomeSchema } from '../domain/schedule/forms.ts'
import type { Placement, ScheduleProblem } from '../domain/schedule/problem.ts'
import { contentOf } from './bake-plans-facts.server.ts'
import { findSchedule } from './schedule-of-bakes.server.ts'
import { readScheduleParts } from './schedule-of-bakes-problem.server.ts'
import { getSite } from './site.server.ts'

const HOUR_MS = 3_600_000

/** Heating that really was, hours from the start of the window. */
export interface ActualBake {
  segment: string
  fromH: number
  untilH: number
}

export interface ShownSchedule {
  id: number
  title: string
  state: ScheduleState
  objective: ScheduleObjective
  progress: number
  fault: string | null
  outcome: ScheduleOutcome | null
  madeBy: string
  madeAt: Date
  revision: number
  problem: ScheduleProblem
  placements: Placement[]
  trouble: { jobId: string; reasons: string[] }[]
  actual: ActualBake[]
}

export interface SchedulePageData {
  schedules: { id: number; title: string; state: ScheduleState }[]
  shown: ShownSchedule | null
  openPlans: { id: number; title: string; segments: string }[]
  mayPlan: boolean
}

/**
 * The schedule asked for, else the current one, else the newest.
 *
 * @throws DomainError not-found
 */
export async function readSchedulePage(
  db: Db,
  actor: Actor,
  now: Date,
  id: number | null,
): Promise<SchedulePageData> {
  const [all, plans] = await Promise.all([listSchedules(db), listPlans(db)])
  const first = all.find(({ state }) => state === 'current') ?? all[0]
  const wanted = id ?? first?.id ?? null
  return {
    schedules: all.map((one) => ({ id: one.id, title: one.title, state: one.state })),
    shown: wanted === null ? null : await shownSchedule(db, now, wanted),
    openPlans: plans
      .filter(({ state }) => state === 'draft' || state === 'ready')
      .map((plan) => ({
        id: plan.id,
        title: plan.title,
        segments: contentOf(plan.content).segments.join('+'),
      })),
    mayPlan: may(actor, 'bake:plan'),
  }
}

async function shownSchedule(db: Db, now: Date, id: number): Promise<ShownSchedule> {
  const schedule = await findSchedule(db, id)
  const { problem, placements, rows } = await readScheduleParts(db, schedule)
  return {
    id,
    title: schedule.title,
    state: schedule.state,
    objective: schedule.objective,
    progress: schedule.progress,
    fault: schedule.fault,
    outcome: schedule.outcome === null ? null : ScheduleOutcomeSchema.parse(schedule.outcome),
    madeBy: schedule.madeByName,
    madeAt: schedule.madeAt,
    revision: schedule.revision,
    problem,
    placements,
    trouble: rows.map(({ planId, trouble }) => ({ jobId: String(planId), reasons: trouble ?? [] })),
    actual: await actualBakes(db, now, problem),
  }
}

async function actualBakes(db: Db, now: Date, problem: ScheduleProblem): Promise<ActualBake[]> {
  const wanted = new Set(problem.jobs.flatMap(({ label }) => label.split('+')))
  const segments = (await listSegments(db, now)).filter(({ tag }) => wanted.has(tag))
  const found: ActualBake[] = []
  for (const { id, tag } of segments) {
    for (const bake of bakesIn(await listStates(db, id))) {
      const fromH = (bake.heatingFrom.getTime() - problem.fromMs) / HOUR_MS
      const untilH = ((bake.coldFrom ?? now).getTime() - problem.fromMs) / HOUR_MS
      if (untilH > 0 && fromH < problem.hours) found.push({ segment: tag, fromH, untilH })
    }
  }
  return found
}

/** Placements as CSV, one line a bake; times in UTC. */
export async function scheduleCsv(db: Db, id: number): Promise<string> {
  const { problem, placements, rows } = await readScheduleParts(db, await findSchedule(db, id))
  const at = (hour: number | null): string =>
    hour === null ? '' : new Date(problem.fromMs + hour * HOUR_MS).toISOString()
  const lines = placements.map((one) => {
    const job = problem.jobs.find(({ id: jobId }) => jobId === one.jobId)
    const plus = (hours: number): number | null => (one.startH === null ? null : one.startH + hours)
    return {
      plan: one.jobId,
      segments: job?.label ?? '',
      preparation_from_utc: at(plus(-(job?.prepHours ?? 0))),
      heating_from_utc: at(one.startH),
      ramp_end_utc: at(plus(job?.rampEndH ?? 0)),
      soak_end_utc: at(plus(job?.soakEndH ?? 0)),
      cold_utc: at(plus(job?.coldH ?? 0)),
      over_utc: at(plus(job?.endH ?? 0)),
      supply: one.supply ?? '',
      cart: one.cart ?? '',
      pinned: one.pinned ? 'yes' : 'no',
      under_way: job?.underWay === true ? 'yes' : 'no',
      trouble: rows.find(({ planId }) => String(planId) === one.jobId)?.trouble?.join(' ') ?? '',
    }
  })
  return `${Papa.unparse(lines, { newline: '\r\n' })}\r\n`
}

/** The bakes that have a place, as a calendar (RFC 5545): one event for preparation and one for the hot time of each. */
export async function scheduleCalendar(db: Db, id: number, now: Date): Promise<string> {
  const schedule = await findSchedule(db, id)
  const { problem, placements } = await readScheduleParts(db, schedule)
  const { code, name } = await getSite(db)
  const calendar = ical({
    name: `${schedule.title}, ${name}`,
    prodId: { company: 'ebbline', product: 'bake-schedule' },
  })
  const at = (hour: number): Date => new Date(problem.fromMs + hour * HOUR_MS)
  for (const { jobId, startH, supply, cart } of placements) {
    const job = problem.jobs.find((one) => one.id === jobId)
    if (job === undefined || startH === null) continue
    const event = (key: string, fromH: number, untilH: number, summary: string) =>
      calendar.createEvent({
        id: `bake-schedule-${id}-${jobId}-${key}@${code.toLowerCase()}.ebbline.invalid`,
        sequence: schedule.revision,
        stamp: now,
        start: at(fromH),
        end: at(untilH),
        summary,
        description: `Plan ${jobId}. Supply ${supply ?? 'not named'}, cart ${cart ?? 'not named'}.`,
        location: job.label,
      })
    if (job.prepHours > 0) event('prep', startH - job.prepHours, startH, `Preparation: ${job.label}`)
    event('hot', startH, startH + job.coldH, `Hot: ${job.label}`)
  }
  return calendar.toString()
}
