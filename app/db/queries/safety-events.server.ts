import { and, asc, desc, eq, gte, inArray, isNotNull, isNull, or, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { SafetyEventKind } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import { permit, permitAct, permitSegment, person, safetyEvent, segment } from '../schema/index.ts'

const tolerater = alias(person, 'tolerater')
const ender = alias(person, 'ender')

export interface SafetyEventRow {
  id: number
  kind: SafetyEventKind
  permit: string | null
  segment: string | null
  startedAt: Date
  noticedAt: Date
  text: string
  endedAt: Date | null
  endedBy: string | null
  endReason: string
  /** Why an officer lets it go on; null where nobody has said so. */
  tolerated: { reason: string; by: string; at: Date } | null
}

/** Events that stand open, and with `since` those that ended after it too; the newest first. */
export async function listSafetyEvents(
  db: DbOrTx,
  filter: { permitIds?: readonly number[]; segmentIds?: readonly number[]; since?: Date; limit?: number },
): Promise<SafetyEventRow[]> {
  const { permitIds, segmentIds, since } = filter
  const place =
    permitIds === undefined && segmentIds === undefined
      ? undefined
      : or(
          inArray(safetyEvent.permitId, [...(permitIds ?? []), 0]),
          inArray(safetyEvent.segmentId, [...(segmentIds ?? []), 0]),
        )
  const rows = await db
    .select({
      event: safetyEvent,
      permit: permit.number,
      segment: segment.tag,
      toleratedByName: tolerater.name,
      endedByName: ender.name,
    })
    .from(safetyEvent)
    .leftJoin(permit, eq(permit.id, safetyEvent.permitId))
    .leftJoin(segment, eq(segment.id, safetyEvent.segmentId))
    .leftJoin(tolerater, eq(tolerater.id, safetyEvent.toleratedBy))
    .leftJoin(ender, eq(ender.id, safetyEvent.endedBy))
    .where(
      and(
        place,
        since === undefined
          ? isNull(safetyEvent.endedAt)
          : or(isNull(safetyEvent.endedAt), gte(safetyEvent.endedAt, since)),
      ),
    )
    .orderBy(desc(safetyEvent.startedAt), desc(safetyEvent.id))
    .limit(filter.limit ?? 500)
  return rows.map(({ event, permit: number, segment: tag, toleratedByName, endedByName }) => ({
    id: event.id,
    kind: event.kind,
    permit: number,
    segment: tag,
    startedAt: event.startedAt,
    noticedAt: event.noticedAt,
    text: event.text,
    endedAt: event.endedAt,
    endedBy: endedByName,
    endReason: event.endReason,
    tolerated:
      event.toleratedAt === null
        ? null
        : { reason: event.toleratedReason, by: toleratedByName ?? '', at: event.toleratedAt },
  }))
}

/** Open events of a permit, or of a segment beside any permit, locked: what another transaction has added is seen. */
export async function lockOpenEvents(
  tx: DbOrTx,
  of: { permitId: number } | { segmentId: number },
): Promise<{ id: number; kind: SafetyEventKind; occurrenceKey: string }[]> {
  const place =
    'permitId' in of
      ? eq(safetyEvent.permitId, of.permitId)
      : and(isNull(safetyEvent.permitId), eq(safetyEvent.segmentId, of.segmentId))
  return tx
    .select({ id: safetyEvent.id, kind: safetyEvent.kind, occurrenceKey: safetyEvent.occurrenceKey })
    .from(safetyEvent)
    .where(and(place, isNull(safetyEvent.endedAt)))
    .orderBy(asc(safetyEvent.id))
    .for('update')
}

/** When the last event of a kind ended; null where none has. */
export async function lastEnd(
  db: DbOrTx,
  of: { permitId: number } | { segmentId: number },
  kind: SafetyEventKind,
): Promise<Date | null> {
  const rows = await db
    .select({ at: safetyEvent.endedAt })
    .from(safetyEvent)
    .where(
      and(
        'permitId' in of ? eq(safetyEvent.permitId, of.permitId) : eq(safetyEvent.segmentId, of.segmentId),
        eq(safetyEvent.kind, kind),
        isNotNull(safetyEvent.endedAt),
      ),
    )
    .orderBy(desc(safetyEvent.endedAt))
    .limit(1)
  return rows[0]?.at ?? null
}

/**
 * Writes an event down. An occurrence that stands there already, open or ended, is left as it is.
 *
 * @returns its id, of the old row where there is one
 */
export async function insertSafetyEvent(tx: DbOrTx, row: typeof safetyEvent.$inferInsert): Promise<number> {
  const [result] = await tx
    .insert(safetyEvent)
    .values(row)
    .onDuplicateKeyUpdate({ set: { id: sql`LAST_INSERT_ID(id)` } })
  return result.insertId
}

/** Ends an open event. @returns whether it was open */
export async function endSafetyEvent(
  tx: DbOrTx,
  id: number,
  end: { at: Date; by: number | null; reason: string },
): Promise<boolean> {
  const [result] = await tx
    .update(safetyEvent)
    .set({ endedAt: end.at, endedBy: end.by, endReason: end.reason.slice(0, 1000) })
    .where(and(eq(safetyEvent.id, id), isNull(safetyEvent.endedAt)))
  return result.affectedRows === 1
}

/** Writes down why an open event is let go on. @returns whether it was open */
export async function tolerateSafetyEvent(
  tx: DbOrTx,
  id: number,
  word: { at: Date; by: number; reason: string },
): Promise<boolean> {
  const [result] = await tx
    .update(safetyEvent)
    .set({ toleratedReason: word.reason, toleratedBy: word.by, toleratedAt: word.at })
    .where(and(eq(safetyEvent.id, id), isNull(safetyEvent.endedAt)))
  return result.affectedRows === 1
}

/** One event, or null. */
export async function findSafetyEvent(
  db: DbOrTx,
  id: number,
): Promise<{ kind: SafetyEventKind; endedAt: Date | null; toleratedReason: string; text: string } | null> {
  const rows = await db
    .select({
      kind: safetyEvent.kind,
      endedAt: safetyEvent.endedAt,
      toleratedReason: safetyEvent.toleratedReason,
      text: safetyEvent.text,
    })
    .from(safetyEvent)
    .where(eq(safetyEvent.id, id))
  return rows[0] ?? null
}

/** When a permit last came into the state it is in; null where it has been in it from the start. */
export async function stateBegan(db: DbOrTx, permitId: number): Promise<Date | null> {
  const rows = await db
    .select({ at: permitAct.at })
    .from(permitAct)
    .where(
      and(
        eq(permitAct.permitId, permitId),
        // An act that leaves the state as it was does not begin it.
        sql`${permitAct.toState} <> ${permitAct.fromState}`,
      ),
    )
    .orderBy(desc(permitAct.revision))
    .limit(1)
  return rows[0]?.at ?? null
}

/** Numbers of the permits on segments that are under way, and of those that still have an open event. */
export async function listWatchedPermits(
  db: DbOrTx,
  filter: { segmentIds?: readonly number[]; ended: readonly (typeof permit.$inferSelect.state)[] },
): Promise<string[]> {
  const openEvent = db
    .select({ id: safetyEvent.permitId })
    .from(safetyEvent)
    .where(and(isNull(safetyEvent.endedAt), isNotNull(safetyEvent.permitId)))
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
  const rows = await db
    .select({ number: permit.number })
    .from(permit)
    .where(
      and(onSegments, or(sql`${permit.state} NOT IN ${[...filter.ended]}`, inArray(permit.id, openEvent))),
    )
    .orderBy(asc(permit.number))
  return rows.map(({ number }) => number)
}

/** Segments of which an event stands open beside any permit. */
export async function listSegmentsWithOpenEvent(db: DbOrTx): Promise<{ id: number; tag: string }[]> {
  return db
    .selectDistinct({ id: segment.id, tag: segment.tag })
    .from(safetyEvent)
    .innerJoin(segment, eq(segment.id, safetyEvent.segmentId))
    .where(and(isNull(safetyEvent.endedAt), isNull(safetyEvent.permitId)))
}

/** Holds a segment's row for the rest of the transaction. */
export async function lockSegment(tx: DbOrTx, segmentId: number): Promise<void> {
  await tx.select({ id: segment.id }).from(segment).where(eq(segment.id, segmentId)).for('update')
}
