/** The schedule that the demo's planner has begun: its drafts, placed by the product's own search. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { listPlans } from '../../app/db/queries/bake-plans.server.ts'
import { insertSchedule, putPlacement } from '../../app/db/queries/bake-schedules.server.ts'
import { solve } from '../../app/domain/schedule/solve.ts'
import { findSchedule, writeSolution } from '../../app/services/schedule-of-bakes.server.ts'
import { readScheduleParts } from '../../app/services/schedule-of-bakes-problem.server.ts'
import { at } from '../demo-time.ts'
import { PERSON_ID } from '../people.ts'

/** Writes the schedule and looks for places. Nobody has made it the current one. Plans and crews are there before. */
export async function seedBakeSchedule(db: DbOrTx): Promise<void> {
  const scheduleId = await insertSchedule(db, {
    title: 'November and December',
    state: 'draft',
    objective: 'earliest-finish',
    fromAt: at('2026-11-09 06:00'),
    untilAt: at('2027-01-01 06:00'),
    madeBy: PERSON_ID.bram,
    madeAt: at('2026-11-09 07:30'),
  })
  const drafts = (await listPlans(db)).filter(({ state }) => state === 'draft')
  for (const { id: planId } of drafts) await putPlacement(db, { scheduleId, planId, trouble: [] })
  const schedule = await findSchedule(db, scheduleId)
  const parts = await readScheduleParts(db, schedule)
  const found = solve(parts.problem, parts.placements, schedule.objective, { seed: 1, budget: 30 })
  if (found === null) throw new Error('a search that nobody stopped has no answer')
  await writeSolution(db, schedule, parts, found)
}
