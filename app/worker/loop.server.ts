/**
 * What the worker process does until it is told to stop: it keeps the product clock, looks at the schedule, does one
 * job after another, ends permits at the second their time is over, and sends mail. Each of the five has its own pace;
 * none is held up by an error of another, or by a long job.
 */
import { randomUUID } from 'node:crypto'
import { type Db, getDb } from '../db/client.server.ts'
import { SCHEDULED_TASKS } from '../domain/job-kinds.ts'
import { log } from '../log.server.ts'
import { productNow } from '../services/clock.server.ts'
import { keepClockGoing, resumeClockWhenAble } from '../services/clock-keeping.server.ts'
import { claimJob, type JobHandlers, runJob } from '../services/jobs.server.ts'
import { carryOutDue } from '../services/permit-watch.server.ts'
import { repeat } from '../services/repeat.server.ts'
import { releaseSchedule, runSchedule } from '../services/schedule.server.ts'
import { feederTasks } from './jobs/feeder.server.ts'
import { JOB_HANDLERS } from './jobs/handlers.server.ts'
import { sendMail } from './mail/send.server.ts'

const SCHEDULE_MS = 5_000
const IDLE_MS = 1_000
/** How late the worker may learn of a permit that has just become live, or that the demo clock has been moved. */
const LOOK_MS = 1_000

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
  if (!(await resumeClockWhenAble(db, signal))) return
  const owner = randomUUID()
  await Promise.all([
    keepClockGoing(db, signal),
    repeat('look at the schedule', signal, async () => {
      // What is new comes first; what is made of it follows.
      await runSchedule(db, owner, await productNow(db), { tasks: [...feederTasks(), ...SCHEDULED_TASKS] })
      return SCHEDULE_MS
    }),
    repeat('do jobs', signal, () => doOneJob(db, handlers, signal)),
    repeat('end permits in time', signal, () => endPermits(db)),
    sendMail(db, owner, signal),
  ])
  await endWell(db, owner)
}

async function doOneJob(db: Db, handlers: JobHandlers, signal: AbortSignal): Promise<number> {
  const held = await claimJob(db)
  if (held === null) return IDLE_MS
  const outcome = await runJob(db, held, handlers, { signal })
  log.debug('job ended', { job: held.id, kind: held.kind, outcome })
  return 0
}

/** @returns ms until the next look: until the next time passes by the product's clock, which runs as the machine's does */
async function endPermits(db: Db): Promise<number> {
  const { nextAt } = await carryOutDue(db, await productNow(db))
  if (nextAt === null) return LOOK_MS
  return Math.min(LOOK_MS, Math.max(1, nextAt.getTime() - (await productNow(db)).getTime()))
}

/** The schedule is handed on; without a database that can neither be done, nor does it matter. */
async function endWell(db: Db, owner: string): Promise<void> {
  try {
    await releaseSchedule(db, owner)
  } catch (error) {
    log.warn('the worker stopped without a word to the database', { error })
  }
}
