/** What the log of a bake needs from the database: its plan, its supply, its deviations. */
import { and, asc, eq, gte, inArray, isNotNull, isNull, lt, or } from 'drizzle-orm'
import type { BakePlanState, DeviationKind } from '../../domain/planning.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  bakeDeviation,
  bakePlan,
  bakePlanSegment,
  bakePlanVersion,
  person,
  position,
} from '../schema/index.ts'

export interface BaselineRow {
  planId: number
  title: string
  state: BakePlanState
  version: number
  content: unknown
}

/** Frozen baselines of plans for a segment that were carried out or are meant to be, newest first. */
export async function listBaselines(db: DbOrTx, segmentId: number): Promise<BaselineRow[]> {
  const rows = await db
    .select({
      planId: bakePlan.id,
      title: bakePlan.title,
      state: bakePlan.state,
      version: bakePlanVersion.version,
      content: bakePlanVersion.content,
    })
    .from(bakePlanSegment)
    .innerJoin(bakePlan, eq(bakePlan.id, bakePlanSegment.planId))
    .innerJoin(
      bakePlanVersion,
      and(eq(bakePlanVersion.planId, bakePlan.id), eq(bakePlanVersion.version, bakePlan.baselineVersion)),
    )
    .where(
      and(
        eq(bakePlanSegment.segmentId, segmentId),
        isNotNull(bakePlan.baselineVersion),
        inArray(bakePlan.state, ['ready', 'under-way', 'done']),
      ),
    )
  return rows.sort((a, b) => b.planId - a.planId)
}

/** Positions by their tags; tags that don't exist are left out. */
export async function findPositionIds(
  db: DbOrTx,
  tags: readonly string[],
): Promise<{ id: number; tag: string }[]> {
  if (tags.length === 0) return []
  return db
    .select({ id: position.id, tag: position.tag })
    .from(position)
    .where(inArray(position.tag, [...tags]))
}

export interface DeviationRow {
  id: number
  kind: DeviationKind
  startsAt: Date
  endsAt: Date | null
  detail: string
  /** Null when the product noted it. */
  notedBy: string | null
  notedAt: Date
}

/** Deviations of a segment that overlap a stretch of time, oldest first. */
export async function listDeviations(
  db: DbOrTx,
  segmentId: number,
  from: Date,
  to: Date,
): Promise<DeviationRow[]> {
  return db
    .select({
      id: bakeDeviation.id,
      kind: bakeDeviation.kind,
      startsAt: bakeDeviation.startsAt,
      endsAt: bakeDeviation.endsAt,
      detail: bakeDeviation.detail,
      notedBy: person.name,
      notedAt: bakeDeviation.notedAt,
    })
    .from(bakeDeviation)
    .leftJoin(person, eq(person.id, bakeDeviation.notedBy))
    .where(
      and(
        eq(bakeDeviation.segmentId, segmentId),
        lt(bakeDeviation.startsAt, to),
        or(isNull(bakeDeviation.endsAt), gte(bakeDeviation.endsAt, from)),
        gte(bakeDeviation.startsAt, from),
      ),
    )
    .orderBy(asc(bakeDeviation.startsAt), asc(bakeDeviation.id))
}

/** Adds a deviation. */
export async function insertDeviation(
  db: DbOrTx,
  row: {
    segmentId: number
    planId: number | null
    kind: DeviationKind
    startsAt: Date
    endsAt: Date | null
    detail: string
    notedBy: number | null
    notedAt: Date
  },
): Promise<void> {
  await db.insert(bakeDeviation).values(row)
}

/** Takes away what the product itself noted of a segment from an instant on, before it notes it anew. */
export async function deleteOwnDeviations(db: DbOrTx, segmentId: number, from: Date): Promise<void> {
  await db
    .delete(bakeDeviation)
    .where(
      and(
        eq(bakeDeviation.segmentId, segmentId),
        isNull(bakeDeviation.notedBy),
        gte(bakeDeviation.startsAt, from),
      ),
    )
}
