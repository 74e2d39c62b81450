/** Permits as the register lists them: without what they say, except for title and limits. */
import { and, asc, count, desc, eq, inArray, isNull, like, or, type SQL, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { PermitState } from '../../domain/permit-words.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  bakePlanVersion,
  lockInUse,
  permit,
  permitSegment,
  permitVersion,
  person,
  safetyEvent,
  segment,
} from '../schema/index.ts'

export interface PermitListFilter {
  states?: readonly PermitState[]
  segment?: string
  holderId?: number
  planId?: number
  year?: number
  /** In the number, the title or the work. */
  words?: string
}

const holder = alias(person, 'list_holder')
/** Whoever holds it; before that, whoever is to. */
const holderOf = sql<
  number | null
>`COALESCE(${permit.holderId}, CAST(JSON_VALUE(${permitVersion.content}, '$.holderId') AS UNSIGNED))`
const title = sql<string>`JSON_VALUE(${permitVersion.content}, '$.title')`
const work = sql<string>`JSON_VALUE(${permitVersion.content}, '$.work')`

function conditions({
  states,
  segment: tag,
  holderId,
  planId,
  year,
  words,
}: PermitListFilter): SQL | undefined {
  const pattern = `%${(words ?? '').replaceAll(/[\\%_]/g, '\\$&')}%`
  return and(
    states === undefined ? undefined : inArray(permit.state, [...states]),
    tag === undefined
      ? undefined
      : sql`EXISTS (SELECT 1 FROM ${permitSegment} JOIN ${segment} ON ${segment.id} = ${permitSegment.segmentId}
          WHERE ${permitSegment.permitId} = ${permit.id} AND ${segment.tag} = ${tag})`,
    holderId === undefined ? undefined : sql`${holderOf} = ${holderId}`,
    planId === undefined ? undefined : eq(permit.planId, planId),
    year === undefined ? undefined : like(permit.number, `%-${year}-%`),
    words === undefined || words === ''
      ? undefined
      : or(like(permit.number, pattern), sql`${title} LIKE ${pattern}`, sql`${work} LIKE ${pattern}`),
  )
}

/** Permits that fit a filter, newest number first, a page of them. */
export async function listPermitLines(
  db: DbOrTx,
  filter: PermitListFilter,
  page: { limit: number; offset: number },
) {
  return db
    .select({
      id: permit.id,
      number: permit.number,
      state: permit.state,
      revision: permit.revision,
      title,
      holderName: holder.name,
      windowFrom: permit.windowFrom,
      windowTo: permit.windowTo,
      currentUntil: permit.currentUntil,
      endedAt: permit.endedAt,
    })
    .from(permit)
    .innerJoin(
      permitVersion,
      and(eq(permitVersion.permitId, permit.id), eq(permitVersion.version, permit.version)),
    )
    .leftJoin(holder, sql`${holder.id} = ${holderOf}`)
    .where(conditions(filter))
    .orderBy(desc(permit.number))
    .limit(page.limit)
    .offset(page.offset)
}

/** How many permits fit a filter. */
export async function countPermitLines(db: DbOrTx, filter: PermitListFilter): Promise<number> {
  const rows = await db
    .select({ found: count() })
    .from(permit)
    .innerJoin(
      permitVersion,
      and(eq(permitVersion.permitId, permit.id), eq(permitVersion.version, permit.version)),
    )
    .where(conditions(filter))
  return rows[0]?.found ?? 0
}

/** Tags of permits' segments by the permit's id. */
export async function listSegmentsOfPermits(
  db: DbOrTx,
  permitIds: readonly number[],
): Promise<Map<number, string[]>> {
  const byPermit = new Map<number, string[]>()
  if (permitIds.length === 0) return byPermit
  const rows = await db
    .select({ permitId: permitSegment.permitId, tag: segment.tag })
    .from(permitSegment)
    .innerJoin(segment, eq(segment.id, permitSegment.segmentId))
    .where(inArray(permitSegment.permitId, [...permitIds]))
    .orderBy(asc(segment.sortOrder))
  for (const { permitId, tag } of rows) byPermit.set(permitId, [...(byPermit.get(permitId) ?? []), tag])
  return byPermit
}

/** Permits in some states, segment by segment, without what they say. */
export async function listPermitsBySegment(db: DbOrTx, states: readonly PermitState[]) {
  return db
    .select({
      tag: segment.tag,
      number: permit.number,
      state: permit.state,
      windowFrom: permit.windowFrom,
      windowTo: permit.windowTo,
      currentUntil: permit.currentUntil,
    })
    .from(permit)
    .innerJoin(permitSegment, eq(permitSegment.permitId, permit.id))
    .innerJoin(segment, eq(segment.id, permitSegment.segmentId))
    .where(inArray(permit.state, [...states]))
    .orderBy(asc(permit.number))
}

/** How many locks hang at present, by the permit's id. */
export async function countLocksOut(db: DbOrTx): Promise<Map<number, number>> {
  const rows = await db
    .select({ permitId: lockInUse.permitId, out: count() })
    .from(lockInUse)
    .groupBy(lockInUse.permitId)
  return new Map(rows.map(({ permitId, out }) => [permitId, out]))
}

/** Dangers that have not ended, longest ago first. */
export async function listOpenDangers(db: DbOrTx) {
  return db
    .select({
      permitId: safetyEvent.permitId,
      kind: safetyEvent.kind,
      text: safetyEvent.text,
      startedAt: safetyEvent.startedAt,
    })
    .from(safetyEvent)
    .where(isNull(safetyEvent.endedAt))
    .orderBy(asc(safetyEvent.startedAt))
}

/** Everybody who holds a permit, is to hold one or was the last to, by name. */
export async function listHolders(db: DbOrTx): Promise<{ id: number; name: string }[]> {
  return db
    .selectDistinct({ id: person.id, name: person.name })
    .from(permit)
    .innerJoin(
      permitVersion,
      and(eq(permitVersion.permitId, permit.id), eq(permitVersion.version, permit.version)),
    )
    .innerJoin(person, sql`${person.id} = ${holderOf}`)
    .orderBy(asc(person.name))
}

/** Years that have permits, newest first, read from the middle part of their numbers. */
export async function listPermitYears(db: DbOrTx): Promise<number[]> {
  const middle = sql<string>`SUBSTRING_INDEX(SUBSTRING_INDEX(${permit.number}, '-', -2), '-', 1)`
  const rows = await db.selectDistinct({ year: middle }).from(permit)
  return rows
    .map(({ year }) => Number(year))
    .filter(Number.isInteger)
    .sort((a, b) => b - a)
}

/** Everybody who wrote a version of these bake plans, by the plan's id. */
export async function listPlanners(db: DbOrTx, planIds: readonly number[]): Promise<Map<number, number[]>> {
  const byPlan = new Map<number, number[]>()
  if (planIds.length === 0) return byPlan
  const rows = await db
    .selectDistinct({ planId: bakePlanVersion.planId, madeBy: bakePlanVersion.madeBy })
    .from(bakePlanVersion)
    .where(inArray(bakePlanVersion.planId, [...planIds]))
  for (const { planId, madeBy } of rows) byPlan.set(planId, [...(byPlan.get(planId) ?? []), madeBy])
  return byPlan
}
