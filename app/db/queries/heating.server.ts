import { and, desc, eq, inArray, lte, or, sql } from 'drizzle-orm'
import { type Quality, qualityCode } from '../../domain/readings.ts'
import type { DbOrTx } from '../client.server.ts'
import { heatingStatement, person, reading, segment, supplySet } from '../schema/index.ts'
import { correctionsFor } from './clock-corrections.server.ts'
import { edgeReading } from './readings.server.ts'
import { usable } from './usable.server.ts'

/** How far back the beginning of a supply's run is looked for. */
const LOOK_BACK_DAYS = 45

export interface StatementRow {
  segmentId: number
  segment: string
  on: boolean
  at: Date
  recordedAt: Date
  supply: string | null
  how: string
  by: string
}

/** Statements about segments up to an instant, the newest first. Of two about one instant the one written last. */
export async function listHeatingStatements(
  db: DbOrTx,
  segmentIds: readonly number[],
  now: Date,
  limit: number,
): Promise<StatementRow[]> {
  if (segmentIds.length === 0) return []
  return db
    .select({
      segmentId: heatingStatement.segmentId,
      segment: segment.tag,
      on: heatingStatement.on,
      at: heatingStatement.at,
      recordedAt: heatingStatement.recordedAt,
      supply: supplySet.tag,
      how: heatingStatement.how,
      by: person.name,
    })
    .from(heatingStatement)
    .innerJoin(segment, eq(segment.id, heatingStatement.segmentId))
    .innerJoin(person, eq(person.id, heatingStatement.personId))
    .leftJoin(supplySet, eq(supplySet.id, heatingStatement.supplySetId))
    .where(and(inArray(heatingStatement.segmentId, [...segmentIds]), lte(heatingStatement.at, now)))
    .orderBy(desc(heatingStatement.at), desc(heatingStatement.id))
    .limit(limit)
}

/** The newest statement about each segment that has one. */
export async function lastHeatingStatements(
  db: DbOrTx,
  segmentIds: readonly number[],
  now: Date,
): Promise<StatementRow[]> {
  const found = await Promise.all(segmentIds.map((id) => listHeatingStatements(db, [id], now, 1)))
  return found.flat()
}

/** Segments about which somebody has ever said that they are heated. */
export async function listSegmentsSaidHeated(db: DbOrTx): Promise<{ id: number; tag: string }[]> {
  return db
    .selectDistinct({ id: segment.id, tag: segment.tag })
    .from(heatingStatement)
    .innerJoin(segment, eq(segment.id, heatingStatement.segmentId))
    .where(eq(heatingStatement.on, true))
}

/** Adds a statement. @returns its id */
export async function insertHeatingStatement(
  tx: DbOrTx,
  row: typeof heatingStatement.$inferInsert,
): Promise<number> {
  const [result] = await tx.insert(heatingStatement).values(row)
  return result.insertId
}

/** Supply sets of the register by tag. */
export async function listSupplySets(
  db: DbOrTx,
  tags?: readonly string[],
): Promise<{ id: number; tag: string; maxAmps: number; openCircuitVolts: number }[]> {
  if (tags?.length === 0) return []
  return db
    .select({
      id: supplySet.id,
      tag: supplySet.tag,
      maxAmps: supplySet.maxAmps,
      openCircuitVolts: supplySet.openCircuitVolts,
    })
    .from(supplySet)
    .where(tags === undefined ? undefined : inArray(supplySet.tag, [...tags]))
    .orderBy(supplySet.tag)
}

/** Segments by tag, in the order along the tube. */
export async function findSegments(
  db: DbOrTx,
  tags: readonly string[],
): Promise<{ id: number; tag: string; lineId: number; startM: number; endM: number }[]> {
  if (tags.length === 0) return []
  return db
    .select({
      id: segment.id,
      tag: segment.tag,
      lineId: segment.lineId,
      startM: segment.startM,
      endM: segment.endM,
    })
    .from(segment)
    .where(inArray(segment.tag, [...tags]))
    .orderBy(segment.startM)
}

/** A segment with its place, or null. */
export async function findSegmentById(
  db: DbOrTx,
  id: number,
): Promise<{ id: number; tag: string; lineId: number; startM: number; endM: number } | null> {
  const rows = await db
    .select({
      id: segment.id,
      tag: segment.tag,
      lineId: segment.lineId,
      startM: segment.startM,
      endM: segment.endM,
    })
    .from(segment)
    .where(eq(segment.id, id))
  return rows[0] ?? null
}

/**
 * The first reading of the run of equal answers that a channel ends with at an instant.
 *
 * @param run whether the run is of readings that show the output on, and from which figure on they do
 * @returns null where the run goes back as far as is looked
 */
export async function runStart(
  db: DbOrTx,
  channelId: number,
  at: Date,
  run: { on: boolean; from: number },
): Promise<Date | null> {
  const since = new Date(at.getTime() - LOOK_BACK_DAYS * 86_400_000)
  const corrections = (await correctionsFor(db, [channelId])).get(channelId) ?? []
  const off: Quality = 'off'
  const shows = run.on
    ? or(eq(reading.quality, qualityCode(off)), sql`(${usable} AND ABS(${reading.value}) < ${run.from})`)
    : sql`(${usable} AND ABS(${reading.value}) >= ${run.from})`
  const before = await edgeReading(db, { channelId, corrections, since, at }, 'last', shows)
  if (before === null) return null
  const after = { channelId, corrections, since: before.at, at }
  return (await edgeReading(db, after, 'first', undefined))?.at ?? null
}
