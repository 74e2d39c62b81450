/** Deleting ended permits by policy: what may go, what goes with it, and the runs. */
import { and, asc, desc, eq, inArray, isNull, lt, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { PermitState } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  attachment,
  attachmentChunk,
  boxLock,
  isolationPoint,
  lockInUse,
  permit,
  permitAct,
  permitRound,
  permitRuling,
  permitSegment,
  permitTest,
  permitVersion,
  person,
  retentionRun,
  safetyEvent,
  segment,
} from '../schema/index.ts'

const asker = alias(person, 'asker')
const agreer = alias(person, 'agreer')
const PHOTOS = 'permit-photo'

/**
 * Numbers of permits that ended before an instant, are not held, have no lock hanging and no event open.
 *
 * @param of only these numbers, for another look
 */
export async function listDeletable(
  db: DbOrTx,
  before: Date,
  states: readonly PermitState[],
  of?: readonly string[],
): Promise<string[]> {
  if (of?.length === 0) return []
  const rows = await db
    .select({ number: permit.number })
    .from(permit)
    .where(
      and(
        inArray(permit.state, [...states]),
        lt(permit.endedAt, before),
        eq(permit.held, false),
        sql`NOT EXISTS (SELECT 1 FROM ${lockInUse} WHERE ${lockInUse.permitId} = ${permit.id})`,
        sql`NOT EXISTS (SELECT 1 FROM ${safetyEvent} WHERE ${safetyEvent.permitId} = ${permit.id} AND ${safetyEvent.endedAt} IS NULL)`,
        of === undefined ? undefined : inArray(permit.number, [...of]),
      ),
    )
    .orderBy(asc(permit.number))
  return rows.map(({ number }) => number)
}

/** Everything that is kept of a permit, row by row as it is stored, in a fixed order. Photos by name and hash. */
export async function readWholePermit(db: DbOrTx, permitId: number) {
  const [own] = await db.select().from(permit).where(eq(permit.id, permitId))
  if (own === undefined) return null
  const segments = await db
    .select({ tag: segment.tag })
    .from(permitSegment)
    .innerJoin(segment, eq(segment.id, permitSegment.segmentId))
    .where(eq(permitSegment.permitId, permitId))
    .orderBy(asc(segment.tag))
  const rows = {
    versions: await db
      .select()
      .from(permitVersion)
      .where(eq(permitVersion.permitId, permitId))
      .orderBy(asc(permitVersion.id)),
    acts: await db
      .select()
      .from(permitAct)
      .where(eq(permitAct.permitId, permitId))
      .orderBy(asc(permitAct.id)),
    points: await db
      .select()
      .from(isolationPoint)
      .where(eq(isolationPoint.permitId, permitId))
      .orderBy(asc(isolationPoint.id)),
    boxLocks: await db.select().from(boxLock).where(eq(boxLock.permitId, permitId)).orderBy(asc(boxLock.id)),
    tests: await db
      .select()
      .from(permitTest)
      .where(eq(permitTest.permitId, permitId))
      .orderBy(asc(permitTest.id)),
    rounds: await db
      .select()
      .from(permitRound)
      .where(eq(permitRound.permitId, permitId))
      .orderBy(asc(permitRound.id)),
    rulings: await db
      .select()
      .from(permitRuling)
      .where(eq(permitRuling.permitId, permitId))
      .orderBy(asc(permitRuling.id)),
    photos: await db
      .select({
        id: attachment.id,
        fileName: attachment.fileName,
        contentType: attachment.contentType,
        byteSize: attachment.byteSize,
        sha256: attachment.sha256,
        createdAt: attachment.createdAt,
      })
      .from(attachment)
      .where(and(eq(attachment.subjectKind, PHOTOS), eq(attachment.subjectId, own.number)))
      .orderBy(asc(attachment.id)),
  }
  return { permit: own, segments: segments.map(({ tag }) => tag), ...rows }
}
export type WholePermit = NonNullable<Awaited<ReturnType<typeof readWholePermit>>>

/**
 * Deletes a permit with everything that is its own. Its safety events stay, without it; so do the record and the
 * signatures. Refused by the triggers unless `underRun` is around it.
 */
export async function deletePermit(tx: DbOrTx, permitId: number, number: string): Promise<void> {
  const photos = (
    await tx
      .select({ id: attachment.id })
      .from(attachment)
      .where(and(eq(attachment.subjectKind, PHOTOS), eq(attachment.subjectId, number)))
  ).map(({ id }) => id)
  if (photos.length > 0) {
    await tx.delete(attachmentChunk).where(inArray(attachmentChunk.attachmentId, photos))
    await tx.delete(attachment).where(inArray(attachment.id, photos))
  }
  await tx.update(safetyEvent).set({ permitId: null }).where(eq(safetyEvent.permitId, permitId))
  await tx.delete(permitRuling).where(eq(permitRuling.permitId, permitId))
  await tx.delete(permitRound).where(eq(permitRound.permitId, permitId))
  await tx.delete(permitTest).where(eq(permitTest.permitId, permitId))
  await tx.delete(boxLock).where(eq(boxLock.permitId, permitId))
  await tx.delete(isolationPoint).where(eq(isolationPoint.permitId, permitId))
  await tx.delete(permitAct).where(eq(permitAct.permitId, permitId))
  await tx.delete(permitVersion).where(eq(permitVersion.permitId, permitId))
  await tx.delete(permitSegment).where(eq(permitSegment.permitId, permitId))
  await tx.delete(permit).where(eq(permit.id, permitId))
}

/**
 * Does work in which rows may be deleted that triggers otherwise keep, and takes that leave back whatever happens: the
 * connection goes on to others.
 */
export async function underRun<Result>(
  tx: DbOrTx,
  runId: number,
  work: () => Promise<Result>,
): Promise<Result> {
  await tx.execute(sql`SET @ebbline_retention_run = ${runId}`)
  try {
    return await work()
  } finally {
    await tx.execute(sql`SET @ebbline_retention_run = NULL`)
  }
}

function select(db: DbOrTx) {
  return db
    .select({ run: retentionRun, askedByName: asker.name, agreedByName: agreer.name })
    .from(retentionRun)
    .innerJoin(asker, eq(asker.id, retentionRun.askedBy))
    .leftJoin(agreer, eq(agreer.id, retentionRun.agreedBy))
}

function read({ run, ...names }: Awaited<ReturnType<typeof select>>[number]) {
  return { ...run, ...names }
}
export type RetentionRunRow = ReturnType<typeof read>

/** Runs, the newest first. */
export async function listRuns(db: DbOrTx, limit: number): Promise<RetentionRunRow[]> {
  return (await select(db).orderBy(desc(retentionRun.id)).limit(limit)).map(read)
}

/** A run, or null. */
export async function findRun(db: DbOrTx, id: number): Promise<RetentionRunRow | null> {
  const rows = await select(db).where(eq(retentionRun.id, id))
  return rows[0] === undefined ? null : read(rows[0])
}

/** Locks a run for the rest of the transaction and gives it as it is now, or null. */
export async function lockRun(
  tx: DbOrTx,
  id: number,
): Promise<Pick<
  typeof retentionRun.$inferSelect,
  'manifest' | 'agreedAt' | 'doneAt' | 'calledOffAt'
> | null> {
  const rows = await tx
    .select({
      manifest: retentionRun.manifest,
      agreedAt: retentionRun.agreedAt,
      doneAt: retentionRun.doneAt,
      calledOffAt: retentionRun.calledOffAt,
    })
    .from(retentionRun)
    .where(eq(retentionRun.id, id))
    .for('update')
  return rows[0] ?? null
}

/** Ids of runs that nobody has called off and that have not come to their end; the table stays locked for others. */
export async function lockOpenRuns(tx: DbOrTx): Promise<number[]> {
  const rows = await tx
    .select({ id: retentionRun.id })
    .from(retentionRun)
    .where(and(isNull(retentionRun.doneAt), isNull(retentionRun.calledOffAt)))
    .for('update')
  return rows.map(({ id }) => id)
}

/** Ids of runs that were agreed to and have not come to their end. */
export async function listAgreedRuns(db: DbOrTx): Promise<number[]> {
  const rows = await db
    .select({ id: retentionRun.id })
    .from(retentionRun)
    .where(
      and(
        sql`${retentionRun.agreedAt} IS NOT NULL`,
        isNull(retentionRun.doneAt),
        isNull(retentionRun.calledOffAt),
      ),
    )
  return rows.map(({ id }) => id)
}

/** Adds a run. @returns its id */
export async function insertRun(tx: DbOrTx, row: typeof retentionRun.$inferInsert): Promise<number> {
  const [result] = await tx.insert(retentionRun).values(row)
  return result.insertId
}

/** Changes a run that still is at the revision somebody saw, and counts it up. @returns whether it was */
export async function updateRun(
  tx: DbOrTx,
  seen: { id: number; revision: number },
  change: Partial<Omit<typeof retentionRun.$inferInsert, 'id' | 'revision'>>,
): Promise<boolean> {
  const [result] = await tx
    .update(retentionRun)
    .set({ ...change, revision: sql`${retentionRun.revision} + 1` })
    .where(and(eq(retentionRun.id, seen.id), eq(retentionRun.revision, seen.revision)))
  return result.affectedRows === 1
}

/** Writes down how far a run has come; the caller holds it locked. */
export async function noteRun(
  tx: DbOrTx,
  id: number,
  change: Partial<Pick<typeof retentionRun.$inferInsert, 'manifest' | 'doneAt'>>,
): Promise<void> {
  await tx.update(retentionRun).set(change).where(eq(retentionRun.id, id))
}

/** Holds a permit back from deletion, or releases it. @returns whether it was not so already */
export async function setHeld(
  tx: DbOrTx,
  number: string,
  hold: { held: boolean; reason: string },
): Promise<boolean> {
  const [result] = await tx
    .update(permit)
    .set({ held: hold.held, heldReason: hold.reason.slice(0, 500) })
    .where(and(eq(permit.number, number), eq(permit.held, !hold.held)))
  return result.affectedRows === 1
}

/** Permits that are held back from deletion. */
export async function listHeld(
  db: DbOrTx,
): Promise<{ number: string; state: PermitState; reason: string; endedAt: Date | null }[]> {
  return db
    .select({
      number: permit.number,
      state: permit.state,
      reason: permit.heldReason,
      endedAt: permit.endedAt,
    })
    .from(permit)
    .where(eq(permit.held, true))
    .orderBy(desc(permit.number))
}
