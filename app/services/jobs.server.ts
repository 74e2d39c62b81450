/**
 * The queue of work for the worker: rows in a table. A job is claimed in a short transaction that hands out a lease,
 * done outside any transaction, and marked as done only while the lease is still held. A worker that dies loses its
 * lease and somebody else takes the job, so what a job does must bear being done twice.
 *
 * Times here are the machine's: a demo clock that jumps must not make leases run out.
 */
import { randomUUID } from 'node:crypto'
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  closeJob,
  deleteFinishedJobs,
  insertJob,
  type JobRow,
  leaseJob,
  lockAbandoned,
  lockWaiting,
  updateLeased,
} from '../db/queries/jobs.server.ts'
import { tx } from '../db/transaction.server.ts'
import { isJobKind, JOB_PAYLOADS, type JobKind, type JobPayload, pauseAfter } from '../domain/job-kinds.ts'
import { log } from '../log.server.ts'
import { machineNow } from '../machine-time.server.ts'

/** How long a worker may stay silent before its job is given to another. */
export const LEASE_MS = 60_000
const MAX_ATTEMPTS = 5

export interface JobContext<Kind extends JobKind> {
  db: Db
  payload: JobPayload<Kind>
  /** Aborted when the product stops or the lease is lost: leave as soon as the work allows. */
  signal: AbortSignal
}

/** What does each kind of job. */
export type JobHandlers = { [Kind in JobKind]: (context: JobContext<Kind>) => Promise<void> }

export interface NewJob<Kind extends JobKind> {
  kind: Kind
  payload: JobPayload<Kind>
  /** Machine time before which it does not start; at once when left out. */
  runAt?: Date
  /** A second request with the same key is the same job, also while the first one's row is kept after its end. */
  uniqueKey?: string
  maxAttempts?: number
}

/** A job in the hands of one worker. */
export interface ClaimedJob {
  id: number
  kind: string
  payload: unknown
  attempts: number
  maxAttempts: number
  leaseOwner: string
}

/** Asks for a job, inside the transaction that gives rise to it. Returns its id, or that of the job with the same key. */
export async function enqueue<Kind extends JobKind>(inside: DbOrTx, request: NewJob<Kind>): Promise<number> {
  const machine = machineNow()
  return insertJob(inside, {
    kind: request.kind,
    payload: JOB_PAYLOADS[request.kind].parse(request.payload),
    dedupeKey: request.uniqueKey ?? null,
    runAt: request.runAt ?? machine,
    maxAttempts: request.maxAttempts ?? MAX_ATTEMPTS,
    createdAt: machine,
  })
}

/**
 * Takes the oldest due job, or one whose worker has gone silent; null when there is nothing to do. A job that went
 * silent on its last attempt is closed as failed: it may be what kills workers.
 */
export async function claimJob(db: Db, machine: Date = machineNow()): Promise<ClaimedJob | null> {
  return tx(db, async (inside) => {
    const waiting = await lockWaiting(inside, machine)
    if (waiting !== null) return lease(inside, waiting, machine)
    for (;;) {
      const abandoned = await lockAbandoned(inside, machine)
      if (abandoned === null) return null
      if (abandoned.attempts < abandoned.maxAttempts) return lease(inside, abandoned, machine)
      await closeJob(
        inside,
        abandoned.id,
        `Its worker went silent at attempt ${abandoned.attempts} of ${abandoned.maxAttempts}.`,
        machine,
      )
    }
  })
}

async function lease(inside: DbOrTx, row: JobRow, machine: Date): Promise<ClaimedJob> {
  // New for every claim, so that a worker that lost a job cannot mark the next holder's attempt as done.
  const leaseOwner = randomUUID()
  const attempts = row.attempts + 1
  await leaseJob(inside, row.id, {
    leaseOwner,
    leaseUntil: new Date(machine.getTime() + LEASE_MS),
    attempts,
  })
  const { id, kind, payload, maxAttempts } = row
  return { id, kind, payload, attempts, maxAttempts, leaseOwner }
}

/** Says that the job is still being worked on; false when the lease has gone to somebody else. */
export async function renewJob(db: Db, held: ClaimedJob, machine: Date = machineNow()): Promise<boolean> {
  return updateLeased(db, held, { leaseUntil: new Date(machine.getTime() + LEASE_MS) })
}

/** Marks a job as done; false when the lease was lost meanwhile. */
export async function completeJob(db: Db, held: ClaimedJob, machine: Date = machineNow()): Promise<boolean> {
  return updateLeased(db, held, {
    state: 'done',
    leaseOwner: null,
    leaseUntil: null,
    lastError: null,
    finishedAt: machine,
  })
}

/** Notes why a job failed: tried again after a growing pause, given up after its last attempt or when `final`. */
export async function failJob(
  db: Db,
  held: ClaimedJob,
  reason: string,
  options: { machine?: Date; final?: boolean } = {},
): Promise<'again' | 'failed' | 'lost'> {
  const machine = options.machine ?? machineNow()
  const over = options.final === true || held.attempts >= held.maxAttempts
  const common = { leaseOwner: null, leaseUntil: null, lastError: reason.slice(0, 10_000) }
  const kept = await updateLeased(
    db,
    held,
    over
      ? { ...common, state: 'failed', finishedAt: machine }
      : {
          ...common,
          state: 'waiting',
          runAt: new Date(machine.getTime() + pauseAfter(held.attempts) * 1000),
        },
  )
  if (!kept) return 'lost'
  return over ? 'failed' : 'again'
}

export type JobOutcome = 'done' | 'again' | 'failed' | 'lost'

/** Does one claimed job, renewing its lease meanwhile, and notes how it ended. Never throws for what the job threw. */
export async function runJob(
  db: Db,
  held: ClaimedJob,
  handlers: JobHandlers,
  options: { signal: AbortSignal; machine?: Date },
): Promise<JobOutcome> {
  const lost = new AbortController()
  const renewal = setInterval(() => {
    renewJob(db, held).then(
      (kept) => {
        if (!kept) lost.abort()
      },
      (error: unknown) => log.warn('could not renew the lease of a job', { job: held.id, error }),
    )
  }, LEASE_MS / 3)
  try {
    const signal = AbortSignal.any([options.signal, lost.signal])
    await dispatch(db, held, handlers, signal)
  } catch (error) {
    log.error('a job failed', { job: held.id, kind: held.kind, attempt: held.attempts, error })
    return await failJob(db, held, describe(error), {
      machine: options.machine,
      final: error instanceof BadJob,
    })
  } finally {
    clearInterval(renewal)
  }
  return (await completeJob(db, held, options.machine)) ? 'done' : 'lost'
}

/** A job that no attempt can do. */
class BadJob extends Error {}

async function dispatch(db: Db, held: ClaimedJob, handlers: JobHandlers, signal: AbortSignal): Promise<void> {
  if (!isJobKind(held.kind)) throw new BadJob(`This version knows no job of the kind "${held.kind}".`)
  await handle(held.kind, held.payload, handlers, { db, signal })
}

/** For one kind, so that its payload and its handler are known to belong together. */
async function handle<Kind extends JobKind>(
  kind: Kind,
  payload: unknown,
  handlers: JobHandlers,
  context: { db: Db; signal: AbortSignal },
): Promise<void> {
  const parsed = JOB_PAYLOADS[kind].safeParse(payload)
  if (!parsed.success) throw new BadJob(`The job's payload does not fit its kind: ${parsed.error.message}`)
  await handlers[kind]({ ...context, payload: parsed.data as JobPayload<Kind> })
}

function describe(error: unknown): string {
  return error instanceof Error ? (error.stack ?? error.message) : String(error)
}

/** Does every job that is due at an instant, one after another, and counts how they ended. */
export async function drainJobs(
  db: Db,
  handlers: JobHandlers,
  machine: Date = machineNow(),
): Promise<Record<JobOutcome, number>> {
  const counts: Record<JobOutcome, number> = { done: 0, again: 0, failed: 0, lost: 0 }
  const { signal } = new AbortController()
  for (;;) {
    const held = await claimJob(db, machine)
    if (held === null) return counts
    counts[await runJob(db, held, handlers, { signal, machine })] += 1
  }
}

const DONE_KEPT_MS = 7 * 86_400_000
const FAILED_KEPT_MS = 90 * 86_400_000

/** Deletes jobs done a week ago and jobs given up ninety days ago. Returns how many. */
export async function purgeJobs(db: Db, machine: Date = machineNow()): Promise<number> {
  const done = await deleteFinishedJobs(db, ['done'], new Date(machine.getTime() - DONE_KEPT_MS))
  const failed = await deleteFinishedJobs(db, ['failed'], new Date(machine.getTime() - FAILED_KEPT_MS))
  return done + failed
}
