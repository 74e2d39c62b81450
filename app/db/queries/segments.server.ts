import { and, asc, eq, gt, inArray, isNull, lte, or } from 'drizzle-orm'
import type { SegmentState } from '../../domain/segment-states.ts'
import type { DbOrTx } from '../client.server.ts'
import { limitValue, line, person, pump, pumpPlacement, segment, segmentState } from '../schema/index.ts'

export type SegmentRow = typeof segment.$inferSelect
export type LineRow = typeof line.$inferSelect

export interface SegmentWithState extends SegmentRow {
  lineCode: string
  state: SegmentState
  since: Date | null
  stateReason: string
}

/** Every line in the order it is drawn. */
export async function listLines(db: DbOrTx): Promise<LineRow[]> {
  return db.select().from(line).orderBy(asc(line.sortOrder))
}

/** Segments in order along the tube with the state each had at an instant. */
export async function listSegments(db: DbOrTx, at: Date): Promise<SegmentWithState[]> {
  const rows = await db
    .select({
      segment,
      lineCode: line.code,
      state: segmentState.state,
      since: segmentState.since,
      reason: segmentState.reason,
    })
    .from(segment)
    .innerJoin(line, eq(line.id, segment.lineId))
    .leftJoin(
      segmentState,
      and(
        eq(segmentState.segmentId, segment.id),
        lte(segmentState.since, at),
        or(isNull(segmentState.endedAt), gt(segmentState.endedAt, at)),
      ),
    )
    .orderBy(asc(line.sortOrder), asc(segment.sortOrder))
  return rows.map((row) => ({
    ...row.segment,
    lineCode: row.lineCode,
    state: row.state ?? 'unknown',
    since: row.since,
    stateReason: row.reason ?? '',
  }))
}

export interface StateSpan {
  id: number
  state: SegmentState
  since: Date
  endedAt: Date | null
  reason: string
  setBy: string
  recordedAt: Date
}

/** States of a segment, newest first. */
export async function listStates(db: DbOrTx, segmentId: number): Promise<StateSpan[]> {
  const rows = await db
    .select({
      id: segmentState.id,
      state: segmentState.state,
      since: segmentState.since,
      endedAt: segmentState.endedAt,
      reason: segmentState.reason,
      setBy: person.name,
      recordedAt: segmentState.recordedAt,
    })
    .from(segmentState)
    .innerJoin(person, eq(person.id, segmentState.setBy))
    .where(eq(segmentState.segmentId, segmentId))
    .orderBy(asc(segmentState.since))
  return rows.reverse()
}

export type LimitRow = typeof limitValue.$inferSelect

/** Limits and targets in force at an instant, site-wide ones included. */
export async function listLimits(db: DbOrTx, at: Date): Promise<LimitRow[]> {
  return db
    .select()
    .from(limitValue)
    .where(
      and(
        isNull(limitValue.replacedAt),
        lte(limitValue.startsAt, at),
        or(isNull(limitValue.endsAt), gt(limitValue.endsAt, at)),
      ),
    )
}

export interface PlacedPump {
  placementId: number
  segmentId: number
  offsetM: number
  startsAt: Date
  endsAt: Date | null
  tag: string
  kind: (typeof pump.$inferSelect)['kind']
  speeds: (typeof pump.$inferSelect)['speeds']
  ultimatePa: number
}

/** Pumps at work on segments, optionally only those at work at an instant. */
export async function listPlacedPumps(
  db: DbOrTx,
  segmentIds: readonly number[],
  at?: Date,
): Promise<PlacedPump[]> {
  if (segmentIds.length === 0) return []
  return db
    .select({
      placementId: pumpPlacement.id,
      segmentId: pumpPlacement.segmentId,
      offsetM: pumpPlacement.offsetM,
      startsAt: pumpPlacement.startsAt,
      endsAt: pumpPlacement.endsAt,
      tag: pump.tag,
      kind: pump.kind,
      speeds: pump.speeds,
      ultimatePa: pump.ultimatePa,
    })
    .from(pumpPlacement)
    .innerJoin(pump, eq(pump.id, pumpPlacement.pumpId))
    .where(
      and(
        inArray(pumpPlacement.segmentId, [...segmentIds]),
        at === undefined ? undefined : lte(pumpPlacement.startsAt, at),
        at === undefined ? undefined : or(isNull(pumpPlacement.endsAt), gt(pumpPlacement.endsAt, at)),
      ),
    )
    .orderBy(asc(pumpPlacement.startsAt))
}

/** Tags of all segments in order along the tube. */
export async function listSegmentTags(db: DbOrTx): Promise<string[]> {
  const rows = await db
    .select({ tag: segment.tag })
    .from(segment)
    .innerJoin(line, eq(line.id, segment.lineId))
    .orderBy(asc(line.sortOrder), asc(segment.sortOrder))
  return rows.map(({ tag }) => tag)
}
