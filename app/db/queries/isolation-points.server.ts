/** Locks at isolation points, personal locks on lock boxes, and where each lock hangs. */
import { and, asc, eq, isNull, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { DbOrTx } from '../client.server.ts'
import { isDuplicate } from '../errors.server.ts'
import { boxLock, isolationPoint, lockInUse, permit, person } from '../schema/index.ts'

const applier = alias(person, 'applier')
const applyWitness = alias(person, 'apply_witness')
const verifier = alias(person, 'verifier')
const verifyWitness = alias(person, 'verify_witness')
const remover = alias(person, 'remover')
const removeWitness = alias(person, 'remove_witness')

function selectPoints(db: DbOrTx) {
  return db
    .select({
      point: isolationPoint,
      permitNumber: permit.number,
      appliedByName: applier.name,
      appliedWitnessName: applyWitness.name,
      verifiedByName: verifier.name,
      verifiedWitnessName: verifyWitness.name,
      removedByName: remover.name,
      removedWitnessName: removeWitness.name,
    })
    .from(isolationPoint)
    .innerJoin(permit, eq(permit.id, isolationPoint.permitId))
    .innerJoin(applier, eq(applier.id, isolationPoint.appliedBy))
    .leftJoin(applyWitness, eq(applyWitness.id, isolationPoint.appliedWitness))
    .leftJoin(verifier, eq(verifier.id, isolationPoint.verifiedBy))
    .leftJoin(verifyWitness, eq(verifyWitness.id, isolationPoint.verifiedWitness))
    .leftJoin(remover, eq(remover.id, isolationPoint.removedBy))
    .leftJoin(removeWitness, eq(removeWitness.id, isolationPoint.removedWitness))
}

function readPoint({ point, ...names }: Awaited<ReturnType<typeof selectPoints>>[number]) {
  return { ...point, ...names }
}

/** One application of a lock, with the names of everybody who had a hand in it. */
export type PointRow = ReturnType<typeof readPoint>

/** Every lock that ever hung for a permit, in the order in which they were applied. */
export async function listPointRows(db: DbOrTx, permitId: number): Promise<PointRow[]> {
  const rows = await selectPoints(db)
    .where(eq(isolationPoint.permitId, permitId))
    .orderBy(asc(isolationPoint.id))
  return rows.map(readPoint)
}

/** Adds an application of a lock. @returns its id */
export async function insertPointRow(tx: DbOrTx, row: typeof isolationPoint.$inferInsert): Promise<number> {
  const [result] = await tx.insert(isolationPoint).values(row)
  return result.insertId
}

/** Changes a lock's row that still is as it was seen, and counts its revision up; false when it no longer was. */
export async function updatePointRow(
  tx: DbOrTx,
  seen: { id: number; revision: number },
  change: Partial<Omit<typeof isolationPoint.$inferInsert, 'id' | 'permitId' | 'revision'>>,
): Promise<boolean> {
  const [result] = await tx
    .update(isolationPoint)
    .set({ ...change, revision: sql`${isolationPoint.revision} + 1` })
    .where(
      and(
        eq(isolationPoint.id, seen.id),
        eq(isolationPoint.revision, seen.revision),
        isNull(isolationPoint.removedAt),
      ),
    )
  return result.affectedRows === 1
}

const owner = alias(person, 'owner')
const offPerson = alias(person, 'off_person')

/** Personal locks that are or were on a permit's lock box, in the order in which they went on. */
export async function listBoxRows(db: DbOrTx, permitId: number) {
  const rows = await db
    .select({ box: boxLock, ownerName: owner.name, offByName: offPerson.name })
    .from(boxLock)
    .innerJoin(owner, eq(owner.id, boxLock.ownerId))
    .leftJoin(offPerson, eq(offPerson.id, boxLock.offBy))
    .where(eq(boxLock.permitId, permitId))
    .orderBy(asc(boxLock.id))
  return rows.map(({ box, ...names }) => ({ ...box, ...names }))
}
export type BoxRow = Awaited<ReturnType<typeof listBoxRows>>[number]

/** Adds a personal lock on a box. @returns its id */
export async function insertBoxRow(tx: DbOrTx, row: typeof boxLock.$inferInsert): Promise<number> {
  const [result] = await tx.insert(boxLock).values(row)
  return result.insertId
}

/** Writes down that a personal lock came off; false when it was off already. */
export async function updateBoxOff(
  tx: DbOrTx,
  id: number,
  change: Pick<
    typeof boxLock.$inferInsert,
    'offAt' | 'offBy' | 'offWitness' | 'offHow' | 'offSignedActId' | 'removalDetail'
  >,
): Promise<boolean> {
  const [result] = await tx
    .update(boxLock)
    .set(change)
    .where(and(eq(boxLock.id, id), isNull(boxLock.offAt)))
  return result.affectedRows === 1
}

export interface LockUseRow {
  permit: string
  place: string
  since: Date
}

/** Where a lock hangs, or null. */
export async function findLockUse(db: DbOrTx, lockNumber: string): Promise<LockUseRow | null> {
  const rows = await db
    .select({
      permit: permit.number,
      tag: isolationPoint.tag,
      boxCode: boxLock.boxCode,
      since: lockInUse.since,
    })
    .from(lockInUse)
    .innerJoin(permit, eq(permit.id, lockInUse.permitId))
    .leftJoin(isolationPoint, eq(isolationPoint.id, lockInUse.pointId))
    .leftJoin(boxLock, eq(boxLock.id, lockInUse.boxLockId))
    .where(eq(lockInUse.lockNumber, lockNumber))
  const row = rows[0]
  if (row === undefined) return null
  return { permit: row.permit, since: row.since, place: row.tag ?? `lock box ${row.boxCode}` }
}

/**
 * Claims a lock number for one place. Of two who claim it at once the second waits for the first and is told no.
 *
 * @returns whether it was free
 */
export async function claimLock(tx: DbOrTx, row: typeof lockInUse.$inferInsert): Promise<boolean> {
  try {
    await tx.insert(lockInUse).values(row)
    return true
  } catch (error) {
    if (isDuplicate(error)) return false
    throw error
  }
}

/** Gives a lock's claim to the row of another permit. It hangs where it hung, and since when it did. */
export async function moveLock(
  tx: DbOrTx,
  lockNumber: string,
  to: { permitId: number; pointId: number },
): Promise<boolean> {
  const [result] = await tx.update(lockInUse).set(to).where(eq(lockInUse.lockNumber, lockNumber))
  return result.affectedRows === 1
}

/** Frees a lock number. */
export async function freeLock(tx: DbOrTx, lockNumber: string): Promise<boolean> {
  const [result] = await tx.delete(lockInUse).where(eq(lockInUse.lockNumber, lockNumber))
  return result.affectedRows === 1
}
