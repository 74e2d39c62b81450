/** What a schedule of bakes is made from: its plans, the limits, sets, carts, crews and holidays of the register. */
import type { DbOrTx } from '../db/client.server.ts'
import { listCarts, listPlans, listSupplies, type PlanRow } from '../db/queries/bake-plans.server.ts'
import {
  listCrews,
  listHolidays,
  listPlacementsOf,
  type PlacementRow,
  type ScheduleRow,
} from '../db/queries/bake-schedules.server.ts'
import { type LineRow, listLimits, listLines } from '../db/queries/segments.server.ts'
import { ampsAndVolts } from '../domain/bake-load.ts'
import { PlanPredictionSchema } from '../domain/bake-plan-prediction.ts'
import { blockingItems, readiness } from '../domain/bake-plan-readiness.ts'
import { jobOfPlan } from '../domain/schedule/job-of-plan.ts'
import type { Extent, Placement, ScheduleJob, ScheduleProblem } from '../domain/schedule/problem.ts'
import { addWorkingDays, RosterSchema } from '../domain/schedule/rosters.ts'
import { bakedSegments, contentOf, planSegments, readPlanFacts } from './bake-plans-facts.server.ts'
import { getSite } from './site.server.ts'
import { limitFor } from './standing.server.ts'

const HOUR_MS = 3_600_000
/** Working days between the request for a permit and its issue. */
const LEAD_DAYS = 2
/** A set or cart is on its way and being fitted for half a day's work. */
const SETUP_HOURS = 4
const STEP_HOURS = 1

export interface ScheduleParts {
  problem: ScheduleProblem
  placements: Placement[]
  rows: PlacementRow[]
}

/** The problem of a schedule and where its bakes stand now. Bakes under way are in it, whether chosen or not. */
export async function readScheduleParts(db: DbOrTx, schedule: ScheduleRow): Promise<ScheduleParts> {
  const { timeZone, ambientC } = await getSite(db)
  const [limits, lines, holidays, rows, plans] = await Promise.all([
    listLimits(db, schedule.madeAt),
    listLines(db),
    listHolidays(db),
    listPlacementsOf(db, schedule.id),
    listPlans(db),
  ])
  const fromMs = schedule.fromAt.getTime()
  const leadMs = addWorkingDays(schedule.madeAt.getTime(), LEAD_DAYS, timeZone, holidays)
  const wanted = plans.filter(
    (plan) => plan.state === 'under-way' || rows.some(({ planId }) => planId === plan.id),
  )
  const around = { ambientC, lines, earliestH: Math.ceil((leadMs - fromMs) / HOUR_MS), at: schedule.madeAt }
  const jobs: ScheduleJob[] = []
  for (const plan of wanted) jobs.push(await jobOf(db, plan, around))
  const crews = (await listCrews(db)).map(({ code, size, roster, endsAt }) => ({
    code,
    size,
    roster: RosterSchema.parse(roster),
    endsMs: endsAt?.getTime() ?? null,
  }))
  const problem: ScheduleProblem = {
    fromMs,
    hours: Math.round((schedule.untilAt.getTime() - fromMs) / HOUR_MS),
    zone: timeZone,
    stepHours: STEP_HOURS,
    jobs,
    supplies: (await listSupplies(db)).map(({ tag, maxAmps, maxVolts }) => ({ tag, maxAmps, maxVolts })),
    carts: (await listCarts(db)).map(({ tag }) => tag),
    crews,
    holidays,
    rules: {
      dayKW: limitFor(limits, 'power-cap-day', null)?.value ?? null,
      nightKW: limitFor(limits, 'power-cap-night', null)?.value ?? null,
      baseKW: limitFor(limits, 'power-base', null)?.value ?? 0,
      dayFromHour: 6,
      dayToHour: 22,
      feederKW: {
        west: limitFor(limits, 'feeder-west', null)?.value ?? null,
        east: limitFor(limits, 'feeder-east', null)?.value ?? null,
      },
      exclusionM: limitFor(limits, 'exclusion-length', null)?.value ?? 0,
      setupHours: SETUP_HOURS,
      attendHours: 1,
    },
  }
  const placements = wanted.map((plan) => placementOf(plan, rows, fromMs))
  return { problem, placements, rows }
}

interface Around {
  ambientC: number
  lines: readonly LineRow[]
  earliestH: number
  at: Date
}

async function jobOf(db: DbOrTx, plan: PlanRow, around: Around): Promise<ScheduleJob> {
  const content = contentOf(plan.content)
  const prediction = PlanPredictionSchema.parse(plan.predicted)
  const segments = await planSegments(db, content.segments, around.at)
  const baked = await bakedSegments(db, segments)
  const underWay = plan.state === 'under-way'
  const facts = underWay ? null : await readPlanFacts(db, { id: plan.id, content, prediction }, around.at)
  // Ticks are given when the work is done, on the days before heating; what is computed has to be known by now.
  const missing =
    facts === null
      ? []
      : blockingItems(readiness(facts))
          .filter(({ kind }) => kind === 'computed')
          .map(missingWords)
  return jobOfPlan({
    id: plan.id,
    content,
    prediction,
    places: segments.map(({ lineId, startM, endM, feeder }) => ({
      extents: extentsOf(around.lines, lineId, startM, endM),
      feeder,
      lengthM: endM - startM,
    })),
    load: ampsAndVolts(baked, around.ambientC, content.celsius, content.upKH),
    missing,
    underWay,
    earliestH: around.earliestH,
    earliestWhy: `${LEAD_DAYS} working days after its permit is asked for`,
  })
}

/** A label says what would be right; of a step that is missing, a sentence on what is wrong says more. */
function missingWords({ label, detail }: { label: string; detail: string }): string {
  if (detail.endsWith('.')) return detail
  return `not met yet: ${label}${detail === '' ? '' : ` (${detail})`}`
}

/** A spur's first metre lies beside the line it leaves. */
function extentsOf(lines: readonly LineRow[], lineId: number, startM: number, endM: number): Extent[] {
  const line = lines.find(({ id }) => id === lineId)
  const own: Extent = { line: line?.code ?? String(lineId), fromM: startM, toM: endM }
  const joined = lines.find(({ id }) => id === line?.joinsLineId)
  const at = line?.joinsAtM
  if (startM > 0 || joined === undefined || at === null || at === undefined) return [own]
  return [own, { line: joined.code, fromM: at, toM: at }]
}

function placementOf(plan: PlanRow, rows: readonly PlacementRow[], fromMs: number): Placement {
  const jobId = String(plan.id)
  if (plan.state === 'under-way') {
    const { startsAt, supply, cart } = contentOf(plan.content)
    const startH = startsAt === null ? 0 : Math.round((Date.parse(startsAt) - fromMs) / HOUR_MS)
    return { jobId, startH, supply, cart, pinned: false }
  }
  const row = rows.find(({ planId }) => planId === plan.id)
  const startsAt = row?.startsAt ?? null
  return {
    jobId,
    startH: startsAt === null ? null : Math.round((startsAt.getTime() - fromMs) / HOUR_MS),
    supply: row?.supply ?? null,
    cart: row?.cart ?? null,
    pinned: row?.pinned ?? false,
  }
}
