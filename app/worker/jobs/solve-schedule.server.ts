import type { JobContext } from '../../services/jobs.server.ts'
import { solveSchedule } from '../../services/schedule-of-bakes.server.ts'

/** Looks for places for the bakes of a schedule. Stopped, it is begun again: the search says the same each time. */
export async function solveScheduleJob({ db, payload, signal }: JobContext<'solve-schedule'>): Promise<void> {
  await solveSchedule(db, payload.scheduleId, signal)
}
