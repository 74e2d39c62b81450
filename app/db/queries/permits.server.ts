import { and, asc, desc, eq, inArray, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import { type PermitContent, PermitContentSchema } from '../../domain/permit-content.ts'
import type { PermitAct, PermitState } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import { permit, permitAct, permitSegment, permitVersion, person, segment } from '../schema/index.ts'

const requester = alias(person, 'requester')
const approver = alias(person, 'approver')
const holder = alias(person, 'holder')
const author = alias(person, 'author')

function select(db: DbOrTx) {
  return db
    .select({
      permit,
      content: permitVersion.content,
      versionMadeBy: permitVersion.madeBy,
      versionMadeAt: permitVersion.madeAt,
      createdByName: author.name,
      requestedByName: requester.name,
      approvedByName: approver.name,
      holderName: holder.name,
    })
    .from(permit)
    .innerJoin(
      permitVersion,
      and(eq(permitVersion.permitId, permit.id), eq(permitVersion.version, permit.version)),
    )
    .innerJoin(author, eq(author.id, permit.createdBy))
    .leftJoin(requester, eq(requester.id, permit.requestedBy))
    .leftJoin(approver, eq(approver.id, permit.approvedBy))
    .leftJoin(holder, eq(holder.id, permit.holderId))
}

type Row = Awaited<ReturnType<typeof select>>[number]

function read({ permit: own, content, ...names }: Row) {
  return { ...own, ...names, content: PermitContentSchema.parse(content) }
}

/** A permit with what its newest version says and the names of its people. */
export type PermitRow = ReturnType<typeof read>

/** The permit of a number, or null. */
export async function findPermit(db: DbOrTx, number: string): Promise<PermitRow | null> {
  const rows = await select(db).where(eq(permit.number, number))
  return rows[0] === undefined ? null : read(rows[0])
}

/** The number that belongs to a printed short code, or null. */
export async function numberOfShortCode(db: DbOrTx, shortCode: string): Promise<string | null> {
  const rows = await db
    .select({ number: permit.number })
    .from(permit)
    .where(eq(permit.shortCode, shortCode.toUpperCase()))
  return rows[0]?.number ?? null
}

/** Permits in some states, or on some segments, newest number first. */
export async function listPermits(
  db: DbOrTx,
  filter: { states?: readonly PermitState[]; segmentIds?: readonly number[] } = {},
): Promise<PermitRow[]> {
  const onSegments =
    filter.segmentIds === undefined
      ? undefined
      : inArray(
          permit.id,
          db
            .select({ id: permitSegment.permitId })
            .from(permitSegment)
            .where(inArray(permitSegment.segmentId, [...filter.segmentIds, 0])),
        )
  const inStates = filter.states === undefined ? undefined : inArray(permit.state, [...filter.states])
  const rows = await select(db).where(and(inStates, onSegments)).orderBy(desc(permit.number))
  return rows.map(read)
}

/** Locks a permit's row for the rest of the transaction and gives it as it is now, or null. */
export async function lockPermit(tx: DbOrTx, number: string): Promise<PermitRow | null> {
  await tx.select({ id: permit.id }).from(permit).where(eq(permit.number, number)).for('update')
  return findPermit(tx, number)
}

/**
 * Changes a permit that still is at the revision somebody saw, and counts the revision up.
 *
 * @returns whether it was still at that revision; if not, nothing has been changed
 */
export async function updatePermit(
  tx: DbOrTx,
  permitId: number,
  seen: { revision: number; state: PermitState },
  change: Partial<Omit<typeof permit.$inferInsert, 'id' | 'number' | 'revision'>>,
): Promise<boolean> {
  const [result] = await tx
    .update(permit)
    .set({ ...change, revision: sql`${permit.revision} + 1` })
    .where(and(eq(permit.id, permitId), eq(permit.revision, seen.revision), eq(permit.state, seen.state)))
  return result.affectedRows === 1
}

/** Adds a permit with its first version. @returns its id */
export async function insertPermit(
  tx: DbOrTx,
  row: typeof permit.$inferInsert,
  first: { content: PermitContent; reason: string },
): Promise<number> {
  const [result] = await tx.insert(permit).values(row)
  await insertPermitVersion(tx, {
    permitId: result.insertId,
    version: row.version ?? 1,
    ...first,
    madeBy: row.createdBy,
    madeAt: row.createdAt,
  })
  await setPermitSegments(tx, result.insertId, first.content.segments)
  return result.insertId
}

/** Adds a version of what a permit says. */
export async function insertPermitVersion(
  tx: DbOrTx,
  row: typeof permitVersion.$inferInsert & { content: PermitContent },
): Promise<void> {
  await tx.insert(permitVersion).values({ ...row, content: PermitContentSchema.parse(row.content) })
}

/** Makes a permit's segments those of these tags. Tags that the register does not know are left out. */
export async function setPermitSegments(
  tx: DbOrTx,
  permitId: number,
  tags: readonly string[],
): Promise<void> {
  await tx.delete(permitSegment).where(eq(permitSegment.permitId, permitId))
  if (tags.length === 0) return
  const rows = await tx
    .select({ segmentId: segment.id })
    .from(segment)
    .where(inArray(segment.tag, [...tags]))
  if (rows.length > 0) {
    await tx.insert(permitSegment).values(rows.map(({ segmentId }) => ({ permitId, segmentId })))
  }
}

/** What a permit said at a version, or null. */
export async function findPermitVersion(
  db: DbOrTx,
  permitId: number,
  version: number,
): Promise<PermitContent | null> {
  const rows = await db
    .select({ content: permitVersion.content })
    .from(permitVersion)
    .where(and(eq(permitVersion.permitId, permitId), eq(permitVersion.version, version)))
  return rows[0] === undefined ? null : PermitContentSchema.parse(rows[0].content)
}

/** Adds something that was done to a permit. @returns its id */
export async function insertPermitAct(tx: DbOrTx, row: typeof permitAct.$inferInsert): Promise<number> {
  const [result] = await tx.insert(permitAct).values(row)
  return result.insertId
}

export interface PermitActRow {
  id: number
  act: PermitAct
  fromState: PermitState
  toState: PermitState
  revision: number
  version: number
  at: Date
  recordedAt: Date
  personId: number | null
  personName: string | null
  reason: string
  detail: unknown
  signed: boolean
}

/** Everything done to a permit, in order. */
export async function listPermitActs(db: DbOrTx, permitId: number): Promise<PermitActRow[]> {
  const rows = await db
    .select({ act: permitAct, personName: person.name })
    .from(permitAct)
    .leftJoin(person, eq(person.id, permitAct.personId))
    .where(eq(permitAct.permitId, permitId))
    .orderBy(asc(permitAct.revision))
  return rows.map(({ act: { signedActId, permitId: _, ...act }, personName }) => ({
    ...act,
    personName,
    signed: signedActId !== null,
  }))
}
