/** Dated limits, and the places where pumps have worked. */
import { and, asc, desc, eq, inArray, isNull } from 'drizzle-orm'
import type { LimitKind } from '../../domain/register.ts'
import type { DbOrTx } from '../client.server.ts'
import { limitValue, person, pump, pumpPlacement, segment, site } from '../schema/index.ts'

export interface DatedLimit {
  id: number
  kind: LimitKind
  segmentId: number | null
  segment: string | null
  value: number
  unit: string
  startsAt: Date
  endsAt: Date | null
  reason: string
  setBy: string | null
  setById: number | null
  recordedAt: Date
  replacedAt: Date | null
}

/** Limits, newest beginning first; the replaced rows too when asked for. */
export function listDatedLimits(
  db: DbOrTx,
  filter: { kind?: LimitKind; withReplaced?: boolean } = {},
): Promise<DatedLimit[]> {
  return db
    .select({
      id: limitValue.id,
      kind: limitValue.kind,
      segmentId: limitValue.segmentId,
      segment: segment.tag,
      value: limitValue.value,
      unit: limitValue.unit,
      startsAt: limitValue.startsAt,
      endsAt: limitValue.endsAt,
      reason: limitValue.reason,
      setBy: person.name,
      setById: limitValue.setBy,
      recordedAt: limitValue.recordedAt,
      replacedAt: limitValue.replacedAt,
    })
    .from(limitValue)
    .leftJoin(segment, eq(segment.id, limitValue.segmentId))
    .leftJoin(person, eq(person.id, limitValue.setBy))
    .where(
      and(
        filter.kind === undefined ? undefined : eq(limitValue.kind, filter.kind),
        filter.withReplaced ? undefined : isNull(limitValue.replacedAt),
      ),
    )
    .orderBy(asc(limitValue.kind), asc(segment.tag), desc(limitValue.startsAt), desc(limitValue.id))
}

/** Limits are few and change seldom: one lock for all of them keeps their dates in order. */
export async function lockLimits(tx: DbOrTx): Promise<void> {
  await tx.select({ id: site.id }).from(site).limit(1).for('update')
}

export async function insertLimit(tx: DbOrTx, row: typeof limitValue.$inferInsert): Promise<void> {
  await tx.insert(limitValue).values(row)
}

export async function replaceLimits(tx: DbOrTx, ids: readonly number[], at: Date): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(limitValue)
    .set({ replacedAt: at })
    .where(inArray(limitValue.id, [...ids]))
}

export interface Placement {
  id: number
  pumpId: number
  pump: string
  segmentId: number
  segment: string
  offsetM: number
  startsAt: Date
  endsAt: Date | null
  reason: string
}

/** Where pumps have worked, newest beginning first. */
export function listPlacements(
  db: DbOrTx,
  filter: { pumpId?: number; segmentId?: number } = {},
): Promise<Placement[]> {
  return db
    .select({
      id: pumpPlacement.id,
      pumpId: pumpPlacement.pumpId,
      pump: pump.tag,
      segmentId: pumpPlacement.segmentId,
      segment: segment.tag,
      offsetM: pumpPlacement.offsetM,
      startsAt: pumpPlacement.startsAt,
      endsAt: pumpPlacement.endsAt,
      reason: pumpPlacement.reason,
    })
    .from(pumpPlacement)
    .innerJoin(pump, eq(pump.id, pumpPlacement.pumpId))
    .innerJoin(segment, eq(segment.id, pumpPlacement.segmentId))
    .where(
      and(
        filter.pumpId === undefined ? undefined : eq(pumpPlacement.pumpId, filter.pumpId),
        filter.segmentId === undefined ? undefined : eq(pumpPlacement.segmentId, filter.segmentId),
      ),
    )
    .orderBy(desc(pumpPlacement.startsAt), desc(pumpPlacement.id))
}

export async function insertPlacement(tx: DbOrTx, row: typeof pumpPlacement.$inferInsert): Promise<void> {
  await tx.insert(pumpPlacement).values(row)
}

/** Ends a placement that is open or ends later. */
export async function endPlacement(tx: DbOrTx, id: number, at: Date): Promise<void> {
  await tx.update(pumpPlacement).set({ endsAt: at }).where(eq(pumpPlacement.id, id))
}
