import { and, asc, desc, eq, gt, gte, inArray, isNotNull, isNull, lt } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { SafetyEventKind } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  bayClosure,
  equipment,
  fitting,
  instrument,
  line,
  person,
  position,
  safetyEvent,
  segment,
} from '../schema/index.ts'

const closer = alias(person, 'closer')
const releaser = alias(person, 'releaser')

function select(db: DbOrTx) {
  return db
    .select({
      id: bayClosure.id,
      lineId: bayClosure.lineId,
      line: line.code,
      fromM: bayClosure.fromM,
      toM: bayClosure.toM,
      reason: bayClosure.reason,
      eventId: bayClosure.eventId,
      eventText: safetyEvent.text,
      segment: segment.tag,
      closedAt: bayClosure.closedAt,
      closedBy: closer.name,
      releasedAt: bayClosure.releasedAt,
      releasedBy: releaser.name,
      releaseReadings: bayClosure.releaseReadings,
      releaseReason: bayClosure.releaseReason,
    })
    .from(bayClosure)
    .innerJoin(line, eq(line.id, bayClosure.lineId))
    .leftJoin(safetyEvent, eq(safetyEvent.id, bayClosure.eventId))
    .leftJoin(segment, eq(segment.id, safetyEvent.segmentId))
    .leftJoin(closer, eq(closer.id, bayClosure.closedBy))
    .leftJoin(releaser, eq(releaser.id, bayClosure.releasedBy))
}

export type BayClosureRow = Awaited<ReturnType<typeof select>>[number]

/** Stretches that are closed, in order along the tube; of one stretch of a line where that is asked. */
export async function listOpenClosures(
  db: DbOrTx,
  on?: { lineId: number; fromM: number; toM: number },
): Promise<BayClosureRow[]> {
  return select(db)
    .where(
      and(
        isNull(bayClosure.releasedAt),
        on === undefined
          ? undefined
          : and(eq(bayClosure.lineId, on.lineId), lt(bayClosure.fromM, on.toM), gt(bayClosure.toM, on.fromM)),
      ),
    )
    .orderBy(asc(bayClosure.lineId), asc(bayClosure.fromM), asc(bayClosure.id))
}

/** What is closed of a stretch, locked: what another transaction has closed or released is seen. */
export async function lockOpenClosures(
  tx: DbOrTx,
  on: { lineId: number; fromM: number; toM: number },
): Promise<{ fromM: number; toM: number }[]> {
  return tx
    .select({ fromM: bayClosure.fromM, toM: bayClosure.toM })
    .from(bayClosure)
    .where(
      and(
        isNull(bayClosure.releasedAt),
        eq(bayClosure.lineId, on.lineId),
        lt(bayClosure.fromM, on.toM),
        gt(bayClosure.toM, on.fromM),
      ),
    )
    .for('update')
}

/** The readings that releases of a stretch at or after an instant rested on, as they were kept. */
export async function releaseReadingsSince(
  tx: DbOrTx,
  on: { lineId: number; fromM: number; toM: number },
  at: Date,
): Promise<unknown[]> {
  const rows = await tx
    .select({ readings: bayClosure.releaseReadings })
    .from(bayClosure)
    .where(
      and(
        gte(bayClosure.releasedAt, at),
        eq(bayClosure.lineId, on.lineId),
        lt(bayClosure.fromM, on.toM),
        gt(bayClosure.toM, on.fromM),
      ),
    )
    .for('update')
  return rows.map(({ readings }) => readings)
}

/** Stretches that have been released, the last first. */
export async function listReleasedClosures(db: DbOrTx, limit: number): Promise<BayClosureRow[]> {
  return select(db)
    .where(isNotNull(bayClosure.releasedAt))
    .orderBy(desc(bayClosure.releasedAt), desc(bayClosure.id))
    .limit(limit)
}

/** A closure, or null. */
export async function findClosure(db: DbOrTx, id: number): Promise<BayClosureRow | null> {
  const rows = await select(db).where(eq(bayClosure.id, id))
  return rows[0] ?? null
}

/** Closes a stretch. @returns the closure's id */
export async function insertClosure(tx: DbOrTx, row: typeof bayClosure.$inferInsert): Promise<number> {
  const [result] = await tx.insert(bayClosure).values(row)
  return result.insertId
}

/** Releases a stretch that is closed. @returns whether it was */
export async function releaseClosure(
  tx: DbOrTx,
  id: number,
  release: Pick<
    typeof bayClosure.$inferInsert,
    'releasedAt' | 'releasedBy' | 'releaseReadings' | 'releaseReason' | 'signedActId'
  >,
): Promise<boolean> {
  const [result] = await tx
    .update(bayClosure)
    .set(release)
    .where(and(eq(bayClosure.id, id), isNull(bayClosure.releasedAt)))
  return result.affectedRows === 1
}

/** Open events of some kinds at a segment, locked, with or without a permit. */
export async function lockOpenEventsAt(
  tx: DbOrTx,
  segmentId: number,
  kinds: readonly SafetyEventKind[],
): Promise<{ id: number; kind: SafetyEventKind }[]> {
  return tx
    .select({ id: safetyEvent.id, kind: safetyEvent.kind })
    .from(safetyEvent)
    .where(
      and(
        eq(safetyEvent.segmentId, segmentId),
        inArray(safetyEvent.kind, [...kinds]),
        isNull(safetyEvent.endedAt),
      ),
    )
    .for('update')
}

/** What the register says about an instrument of that serial number, the one at a position of that tag, or a piece of equipment of that tag; null if none. */
export async function findMeter(
  db: DbOrTx,
  name: string,
): Promise<{ name: string; calibrationDue: Date | null } | null> {
  const [serial] = await db
    .select({ name: instrument.serial, calibrationDue: instrument.calibrationDue })
    .from(instrument)
    .where(eq(instrument.serial, name))
  if (serial !== undefined) return serial
  const [tag] = await db
    .select({ name: equipment.tag, calibrationDue: equipment.calibrationDue })
    .from(equipment)
    .where(eq(equipment.tag, name))
  if (tag !== undefined) return tag
  const [fitted] = await db
    .select({ name: position.tag, calibrationDue: instrument.calibrationDue })
    .from(position)
    .innerJoin(
      fitting,
      and(eq(fitting.positionId, position.id), isNull(fitting.endsAt), isNull(fitting.replacedAt)),
    )
    .innerJoin(instrument, eq(instrument.id, fitting.instrumentId))
    .where(eq(position.tag, name))
  return fitted ?? null
}
