import { and, eq, lte, or, sql } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { scheduleOwner, scheduleTask } from '../schema/index.ts'

/** The owner's row exists in every database from the first call on; nobody owns it yet. */
export async function ensureOwnerRow(db: DbOrTx, machine: Date): Promise<void> {
  await db
    .insert(scheduleOwner)
    .values({ id: 1, owner: '', leaseUntil: machine })
    .onDuplicateKeyUpdate({ set: { id: sql`id` } })
}

/** Takes or renews the lease; false while somebody else holds it. */
export async function takeOwnerLease(
  db: DbOrTx,
  owner: string,
  machine: Date,
  leaseUntil: Date,
): Promise<boolean> {
  const [result] = await db
    .update(scheduleOwner)
    .set({ owner, leaseUntil })
    .where(
      and(
        eq(scheduleOwner.id, 1),
        or(eq(scheduleOwner.owner, owner), lte(scheduleOwner.leaseUntil, machine)),
      ),
    )
  return result.affectedRows === 1
}

/** Gives the lease back, if it is still this owner's. */
export async function dropOwnerLease(db: DbOrTx, owner: string, machine: Date): Promise<void> {
  await db
    .update(scheduleOwner)
    .set({ owner: '', leaseUntil: machine })
    .where(and(eq(scheduleOwner.id, 1), eq(scheduleOwner.owner, owner)))
}

/** When each task was last due, by name. */
export async function listTaskTimes(db: DbOrTx): Promise<Map<string, Date>> {
  const rows = await db.select().from(scheduleTask)
  return new Map(rows.map(({ name, lastDueAt }) => [name, lastDueAt]))
}

export async function noteTaskTime(db: DbOrTx, name: string, lastDueAt: Date): Promise<void> {
  await db.insert(scheduleTask).values({ name, lastDueAt }).onDuplicateKeyUpdate({ set: { lastDueAt } })
}
