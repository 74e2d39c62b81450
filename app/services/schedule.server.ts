/**
 * What recurs. Any number of workers may run; one at a time owns the schedule, by a lease it renews at every look.
 * A tick becomes a job whose key is made of the task and its due time, so that even two owners that overlap for a
 * moment ask for the same job.
 */
import type { Db } from '../db/client.server.ts'
import {
  dropOwnerLease,
  ensureOwnerRow,
  listTaskTimes,
  noteTaskTime,
  takeOwnerLease,
} from '../db/queries/schedule.server.ts'
import { tx } from '../db/transaction.server.ts'
import { lastDue, SCHEDULED_TASKS, type ScheduledTask } from '../domain/job-kinds.ts'
import { machineNow } from '../machine-time.server.ts'
import { enqueue } from './jobs.server.ts'

/** A worker that has not looked for so long has lost the schedule. */
export const OWNER_LEASE_MS = 30_000

/**
 * Looks once: asks for the jobs whose time has come since the last look, if this worker owns the schedule or can take
 * it over. Call it every few seconds.
 *
 * @param now the product's time, which decides what is due
 * @returns the names of the tasks asked for; null when another worker owns the schedule
 */
export async function runSchedule(
  db: Db,
  owner: string,
  now: Date,
  options: { machine?: Date; tasks?: readonly ScheduledTask[] } = {},
): Promise<string[] | null> {
  const machine = options.machine ?? machineNow()
  await ensureOwnerRow(db, machine)
  return tx(db, async (inside) => {
    // The owner's row stays locked until the jobs are in: a takeover waits for that.
    const mine = await takeOwnerLease(inside, owner, machine, new Date(machine.getTime() + OWNER_LEASE_MS))
    if (!mine) return null
    const times = await listTaskTimes(inside)
    const asked: string[] = []
    for (const task of options.tasks ?? SCHEDULED_TASKS) {
      const due = lastDue(task, now)
      const before = times.get(task.name)
      if (before !== undefined && before >= due) continue
      await enqueue(inside, {
        kind: task.kind,
        payload: {},
        runAt: machine,
        uniqueKey: `${task.name}@${due.toISOString()}`,
      })
      await noteTaskTime(inside, task.name, due)
      asked.push(task.name)
    }
    return asked
  })
}

/** Gives the schedule back when a worker stops, so that the next one need not wait for the lease to run out. */
export async function releaseSchedule(db: Db, owner: string, machine: Date = machineNow()): Promise<void> {
  await dropOwnerLease(db, owner, machine)
}
