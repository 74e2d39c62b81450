/**
 * What the worker process does until it is told to stop: it keeps the product clock, looks at the schedule, and does
 * one job after another. Each of the three has its own pace; none is held up by an error of another.
 */
import { randomUUID } from 'node:crypto'
import { setTimeout as sleep } from 'node:timers/promises'
import { type Db, getDb } from '../db/client.server.ts'
import { isUnreachable } from '../db/errors.server.ts'
import { SCHEDULED_TASKS } from '../domain/job-kinds.ts'
import { log } from '../log.server.ts'
import { keepClock, productNow, resumeClock } from '../services/clock.server.ts'
import { claimJob, type JobHandlers, runJob } from '../services/jobs.server.ts'
import { releaseSchedule, runSchedule } from '../services/schedule.server.ts'
import { feederTasks } from './jobs/feeder.server.ts'
import { JOB_HANDLERS } from './jobs/handlers.server.ts'

const CLOCK_MS = 2_000
const SCHEDULE_MS = 5_000
const IDLE_MS = 1_000
/** After an error, so that a database that is away is not hammered. */
const TROUBLE_MS = 5_000

export interface WorkerOptions {
  /** Stops the worker: no new job is begun, the present one is told and waited for. */
  signal: AbortSignal
  db?: Db
  handlers?: JobHandlers
}

/** Runs the worker until the signal; resolves when everything begun has ended and the schedule is given back. */
export async function runWorker({
  signal,
  db = getDb(),
  handlers = JOB_HANDLERS,
}: WorkerOptions): Promise<void> {
  // First of all, and before anything asks for the time: keeping a clock that has not been resumed would jump it ahead.
  if (!(await resume(db, signal))) return
  const owner = randomUUID()
  await Promise.all([
    repeat('keep the clock', signal, async () => {
      await keepClock(db)
      return CLOCK_MS
    }),
    repeat('look at the schedule', signal, async () => {
      await runSchedule(db, owner, await productNow(db), { tasks: [...SCHEDULED_TASKS, ...feederTasks()] })
      return SCHEDULE_MS
    }),
    repeat('do jobs', signal, () => doOneJob(db, handlers, signal)),
  ])
  await endWell(db, owner)
}

/** Tries until the database answers; false when told to stop before that. */
async function resume(db: Db, signal: AbortSignal): Promise<boolean> {
  const resumed = new AbortController()
  await repeat('resume the clock', AbortSignal.any([signal, resumed.signal]), async () => {
    await resumeClock(db)
    resumed.abort()
    return 0
  })
  return resumed.signal.aborted
}

async function doOneJob(db: Db, handlers: JobHandlers, signal: AbortSignal): Promise<number> {
  const held = await claimJob(db)
  if (held === null) return IDLE_MS
  const outcome = await runJob(db, held, handlers, { signal })
  log.debug('job ended', { job: held.id, kind: held.kind, outcome })
  return 0
}

/** Calls `step` again and again, after the pause it asks for, until the signal. An error is logged and waited out. */
async function repeat(what: string, signal: AbortSignal, step: () => Promise<number>): Promise<void> {
  while (!signal.aborted) {
    let pause: number
    try {
      pause = await step()
    } catch (error) {
      pause = TROUBLE_MS
      if (isUnreachable(error)) log.warn(`could not ${what}: the database does not answer`)
      else log.error(`could not ${what}`, { error })
    }
    await interruptible(pause, signal)
  }
}

async function interruptible(ms: number, signal: AbortSignal): Promise<void> {
  try {
    await sleep(ms, undefined, { signal })
  } catch (error) {
    if (!signal.aborted) throw error
  }
}

/** The clock's last moment is kept and the schedule handed on; without a database neither can be done, nor matters. */
async function endWell(db: Db, owner: string): Promise<void> {
  try {
    await keepClock(db)
    await releaseSchedule(db, owner)
  } catch (error) {
    log.warn('the worker stopped without a word to the database', { error })
  }
}
