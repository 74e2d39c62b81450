/** Bake plans with their versions and ticks, and what the register knows that a plan rests on. */
import { and, asc, desc, eq, gte, inArray, ne, or } from 'drizzle-orm'
import type { BakePlanState, PlanPriority } from '../../domain/planning.ts'
import type { DbOrTx } from '../client.server.ts'
import {
  bakePlan,
  bakePlanCheck,
  bakePlanSegment,
  bakePlanVersion,
  heaterCircuit,
  logEntry,
  person,
  pump,
  segment,
  supplySet,
  valve,
} from '../schema/index.ts'

export interface PlanRow {
  id: number
  title: string
  state: BakePlanState
  priority: PlanPriority
  version: number
  baselineVersion: number | null
  createdBy: string
  createdAt: Date
  readyBy: string | null
  readyAt: Date | null
  closedAt: Date | null
  closeReason: string
  revision: number
  /** Content of the latest version, as stored. */
  content: unknown
  predicted: unknown
}

/** Plans with the content of their latest version, newest first. */
export async function listPlans(db: DbOrTx, filter: { planId?: number } = {}): Promise<PlanRow[]> {
  const rows = await db
    .select({
      plan: bakePlan,
      createdBy: person.name,
      content: bakePlanVersion.content,
      predicted: bakePlanVersion.predicted,
    })
    .from(bakePlan)
    .innerJoin(person, eq(person.id, bakePlan.createdBy))
    .innerJoin(
      bakePlanVersion,
      and(eq(bakePlanVersion.planId, bakePlan.id), eq(bakePlanVersion.version, bakePlan.version)),
    )
    .where(filter.planId === undefined ? undefined : eq(bakePlan.id, filter.planId))
    .orderBy(desc(bakePlan.id))
  const signers = await namesOf(
    db,
    rows.flatMap(({ plan }) => (plan.readyBy === null ? [] : [plan.readyBy])),
  )
  return rows.map(({ plan, createdBy, content, predicted }) => ({
    id: plan.id,
    title: plan.title,
    state: plan.state,
    priority: plan.priority,
    version: plan.version,
    baselineVersion: plan.baselineVersion,
    createdBy,
    createdAt: plan.createdAt,
    readyBy: plan.readyBy === null ? null : (signers.get(plan.readyBy) ?? null),
    readyAt: plan.readyAt,
    closedAt: plan.closedAt,
    closeReason: plan.closeReason,
    revision: plan.revision,
    content,
    predicted,
  }))
}

async function namesOf(db: DbOrTx, ids: readonly number[]): Promise<Map<number, string>> {
  if (ids.length === 0) return new Map()
  const rows = await db
    .select({ id: person.id, name: person.name })
    .from(person)
    .where(inArray(person.id, [...ids]))
  return new Map(rows.map(({ id, name }) => [id, name]))
}

/** The plan's own row, locked until the transaction ends; null when there is none. */
export async function lockPlan(tx: DbOrTx, planId: number): Promise<typeof bakePlan.$inferSelect | null> {
  const [row] = await tx.select().from(bakePlan).where(eq(bakePlan.id, planId)).for('update')
  return row ?? null
}

/**
 * Changes a plan that still has the revision its reader saw, and raises it.
 *
 * @returns whether it did; false when somebody else was faster
 */
export async function updatePlan(
  tx: DbOrTx,
  planId: number,
  revision: number,
  change: Partial<typeof bakePlan.$inferInsert>,
): Promise<boolean> {
  const [result] = await tx
    .update(bakePlan)
    .set({ ...change, revision: revision + 1 })
    .where(and(eq(bakePlan.id, planId), eq(bakePlan.revision, revision)))
  return result.affectedRows === 1
}

export async function insertPlan(tx: DbOrTx, row: typeof bakePlan.$inferInsert): Promise<number> {
  const [result] = await tx.insert(bakePlan).values(row)
  return result.insertId
}

/** Segments of a plan, in the order they stand in the loop; those of an earlier version give way. */
export async function replacePlanSegments(
  tx: DbOrTx,
  planId: number,
  segmentIds: readonly number[],
): Promise<void> {
  await tx.delete(bakePlanSegment).where(eq(bakePlanSegment.planId, planId))
  await tx
    .insert(bakePlanSegment)
    .values(segmentIds.map((segmentId, sortOrder) => ({ planId, segmentId, sortOrder })))
}

export async function insertPlanVersion(tx: DbOrTx, row: typeof bakePlanVersion.$inferInsert): Promise<void> {
  await tx.insert(bakePlanVersion).values(row)
}

export interface PlanVersionRow {
  version: number
  content: unknown
  predicted: unknown
  reason: string
  madeBy: string
  madeAt: Date
}

/** Versions of a plan, oldest first. */
export function listPlanVersions(db: DbOrTx, planId: number): Promise<PlanVersionRow[]> {
  return db
    .select({
      version: bakePlanVersion.version,
      content: bakePlanVersion.content,
      predicted: bakePlanVersion.predicted,
      reason: bakePlanVersion.reason,
      madeBy: person.name,
      madeAt: bakePlanVersion.madeAt,
    })
    .from(bakePlanVersion)
    .innerJoin(person, eq(person.id, bakePlanVersion.madeBy))
    .where(eq(bakePlanVersion.planId, planId))
    .orderBy(asc(bakePlanVersion.version))
}

export interface PlanTick {
  item: string
  done: boolean
  note: string
  by: string
  at: Date
}

/** Ticks of a plan, oldest first: of one item the last holds. */
export function listPlanTicks(db: DbOrTx, planId: number): Promise<PlanTick[]> {
  return db
    .select({
      item: bakePlanCheck.item,
      done: bakePlanCheck.done,
      note: bakePlanCheck.note,
      by: person.name,
      at: bakePlanCheck.setAt,
    })
    .from(bakePlanCheck)
    .innerJoin(person, eq(person.id, bakePlanCheck.setBy))
    .where(eq(bakePlanCheck.planId, planId))
    .orderBy(asc(bakePlanCheck.id))
}

export async function insertPlanTick(tx: DbOrTx, row: typeof bakePlanCheck.$inferInsert): Promise<void> {
  await tx.insert(bakePlanCheck).values(row)
}

export function listSupplies(db: DbOrTx): Promise<(typeof supplySet.$inferSelect)[]> {
  return db.select().from(supplySet).orderBy(asc(supplySet.tag))
}

/** Pumping carts, which come to a segment for its bake. */
export function listCarts(db: DbOrTx): Promise<(typeof pump.$inferSelect)[]> {
  return db.select().from(pump).where(eq(pump.kind, 'turbomolecular-cart')).orderBy(asc(pump.tag))
}

/** Valves of segments: their own, and the gates at both ends. */
export function listValvesOf(
  db: DbOrTx,
  segmentIds: readonly number[],
): Promise<(typeof valve.$inferSelect)[]> {
  return db
    .select()
    .from(valve)
    .where(or(inArray(valve.segmentId, [...segmentIds]), inArray(valve.eastSegmentId, [...segmentIds])))
    .orderBy(asc(valve.tag))
}

/** Blanket heaters of segments: tag of the segment and watts. */
export function listBlankets(
  db: DbOrTx,
  segmentIds: readonly number[],
): Promise<{ segmentId: number | null; powerW: number | null }[]> {
  return db
    .select({ segmentId: heaterCircuit.segmentId, powerW: heaterCircuit.powerW })
    .from(heaterCircuit)
    .where(and(eq(heaterCircuit.kind, 'blanket'), inArray(heaterCircuit.segmentId, [...segmentIds])))
}

/** The latest leak check of a segment on the log, since an instant where one is given. */
export async function lastLeakCheck(db: DbOrTx, segmentId: number, since: Date | null): Promise<Date | null> {
  const [row] = await db
    .select({ at: logEntry.eventAt })
    .from(logEntry)
    .where(
      and(
        eq(logEntry.segmentId, segmentId),
        eq(logEntry.kind, 'leak-check'),
        since === null ? undefined : gte(logEntry.eventAt, since),
      ),
    )
    .orderBy(desc(logEntry.eventAt))
    .limit(1)
  return row?.at ?? null
}

/** Plans under way other than one, with what they hold: for supplies and carts that are in use. */
export async function listPlansUnderWay(
  db: DbOrTx,
  exceptPlanId: number | null,
): Promise<{ segments: string; content: unknown }[]> {
  const rows = await db
    .select({ planId: bakePlan.id, tag: segment.tag, content: bakePlanVersion.content })
    .from(bakePlan)
    .innerJoin(bakePlanSegment, eq(bakePlanSegment.planId, bakePlan.id))
    .innerJoin(segment, eq(segment.id, bakePlanSegment.segmentId))
    .innerJoin(
      bakePlanVersion,
      and(eq(bakePlanVersion.planId, bakePlan.id), eq(bakePlanVersion.version, bakePlan.version)),
    )
    .where(
      and(eq(bakePlan.state, 'under-way'), exceptPlanId === null ? undefined : ne(bakePlan.id, exceptPlanId)),
    )
    .orderBy(asc(bakePlan.id), asc(bakePlanSegment.sortOrder))
  const plans = new Map<number, { segments: string; content: unknown }>()
  for (const { planId, tag, content } of rows) {
    const found = plans.get(planId)
    plans.set(planId, { segments: found === undefined ? tag : `${found.segments} + ${tag}`, content })
  }
  return [...plans.values()]
}
