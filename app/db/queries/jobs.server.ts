import { and, asc, eq, inArray, lt, lte, sql } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { job } from '../schema/index.ts'

export type JobRow = typeof job.$inferSelect

/** Inserts a job; where one with its key exists, that one stays as it is and its id is returned. */
export async function insertJob(
  tx: DbOrTx,
  row: Pick<JobRow, 'kind' | 'payload' | 'dedupeKey' | 'runAt' | 'maxAttempts' | 'createdAt'>,
): Promise<number> {
  const [result] = await tx
    .insert(job)
    .values({ ...row, state: 'waiting' })
    .onDuplicateKeyUpdate({ set: { id: sql`LAST_INSERT_ID(id)` } })
  return result.insertId
}

/** Locks one due job, passing over those that somebody else has locked; null when there is none. */
export async function lockWaiting(tx: DbOrTx, machine: Date): Promise<JobRow | null> {
  const rows = await tx
    .select()
    .from(job)
    .where(and(eq(job.state, 'waiting'), lte(job.runAt, machine)))
    .orderBy(asc(job.runAt), asc(job.id))
    .limit(1)
    .for('update', { skipLocked: true })
  return rows[0] ?? null
}

/** Locks one job whose lease has run out: its worker died or lost the database. */
export async function lockAbandoned(tx: DbOrTx, machine: Date): Promise<JobRow | null> {
  const rows = await tx
    .select()
    .from(job)
    .where(and(eq(job.state, 'running'), lte(job.leaseUntil, machine)))
    .orderBy(asc(job.leaseUntil), asc(job.id))
    .limit(1)
    .for('update', { skipLocked: true })
  return rows[0] ?? null
}

export async function leaseJob(
  tx: DbOrTx,
  jobId: number,
  lease: { leaseOwner: string; leaseUntil: Date; attempts: number },
): Promise<void> {
  await tx
    .update(job)
    .set({ ...lease, state: 'running' })
    .where(eq(job.id, jobId))
}

/** Changes a running job only while the lease is still held; false when it is not. */
export async function updateLeased(
  db: DbOrTx,
  held: { id: number; leaseOwner: string },
  change: Partial<Pick<JobRow, 'state' | 'runAt' | 'leaseOwner' | 'leaseUntil' | 'lastError' | 'finishedAt'>>,
): Promise<boolean> {
  const [result] = await db
    .update(job)
    .set(change)
    .where(and(eq(job.id, held.id), eq(job.leaseOwner, held.leaseOwner), eq(job.state, 'running')))
  return result.affectedRows === 1
}

/** Ends a locked job for good. */
export async function closeJob(tx: DbOrTx, jobId: number, lastError: string, at: Date): Promise<void> {
  await tx
    .update(job)
    .set({ state: 'failed', leaseOwner: null, leaseUntil: null, lastError, finishedAt: at })
    .where(eq(job.id, jobId))
}

/** Deletes jobs that ended before an instant. */
export async function deleteFinishedJobs(
  db: DbOrTx,
  states: ('done' | 'failed')[],
  before: Date,
): Promise<number> {
  const [result] = await db.delete(job).where(and(inArray(job.state, states), lt(job.finishedAt, before)))
  return result.affectedRows
}
