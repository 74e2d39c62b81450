/** Schedules of bakes with their placements, and the crews and holidays that they keep to. */
import { and, asc, desc, eq, ne } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { bakePlacement, bakeSchedule, crew, holiday, person, pump, supplySet } from '../schema/index.ts'

export type ScheduleRow = typeof bakeSchedule.$inferSelect & { madeByName: string }

/** Schedules, newest first; the one asked for when its id is given. */
export async function listSchedules(db: DbOrTx, filter: { id?: number } = {}): Promise<ScheduleRow[]> {
  const rows = await db
    .select({ schedule: bakeSchedule, name: person.name })
    .from(bakeSchedule)
    .innerJoin(person, eq(person.id, bakeSchedule.madeBy))
    .where(filter.id === undefined ? undefined : eq(bakeSchedule.id, filter.id))
    .orderBy(desc(bakeSchedule.id))
  return rows.map(({ schedule, name }) => ({ ...schedule, madeByName: name }))
}

export async function insertSchedule(tx: DbOrTx, row: typeof bakeSchedule.$inferInsert): Promise<number> {
  const [result] = await tx.insert(bakeSchedule).values(row)
  return result.insertId
}

/** The schedule's own row, locked until the transaction ends; null when there is none. */
export async function lockSchedule(tx: DbOrTx, id: number): Promise<typeof bakeSchedule.$inferSelect | null> {
  const [row] = await tx.select().from(bakeSchedule).where(eq(bakeSchedule.id, id)).for('update')
  return row ?? null
}

export async function updateSchedule(
  tx: DbOrTx,
  id: number,
  change: Partial<typeof bakeSchedule.$inferInsert>,
): Promise<void> {
  await tx.update(bakeSchedule).set(change).where(eq(bakeSchedule.id, id))
}

/** Says that every other schedule that was current is so no longer. */
export async function replaceCurrent(tx: DbOrTx, id: number): Promise<void> {
  await tx
    .update(bakeSchedule)
    .set({ state: 'replaced' })
    .where(and(eq(bakeSchedule.state, 'current'), ne(bakeSchedule.id, id)))
}

export interface PlacementRow {
  planId: number
  startsAt: Date | null
  supply: string | null
  cart: string | null
  pinned: boolean
  trouble: string[] | null
}

/** Placements of a schedule, in the order of its plans. */
export function listPlacementsOf(db: DbOrTx, scheduleId: number): Promise<PlacementRow[]> {
  return db
    .select({
      planId: bakePlacement.planId,
      startsAt: bakePlacement.startsAt,
      supply: supplySet.tag,
      cart: pump.tag,
      pinned: bakePlacement.pinned,
      trouble: bakePlacement.trouble,
    })
    .from(bakePlacement)
    .leftJoin(supplySet, eq(supplySet.id, bakePlacement.supplySetId))
    .leftJoin(pump, eq(pump.id, bakePlacement.cartId))
    .where(eq(bakePlacement.scheduleId, scheduleId))
    .orderBy(asc(bakePlacement.planId))
}

/** Writes where a plan stands in a schedule, over where it stood. */
export async function putPlacement(tx: DbOrTx, row: typeof bakePlacement.$inferInsert): Promise<void> {
  const { startsAt, supplySetId, cartId, pinned, trouble } = row
  await tx
    .insert(bakePlacement)
    .values(row)
    .onDuplicateKeyUpdate({ set: { startsAt, supplySetId, cartId, pinned, trouble } })
}

export function listCrews(db: DbOrTx): Promise<(typeof crew.$inferSelect)[]> {
  return db.select().from(crew).orderBy(asc(crew.code))
}

export async function listHolidays(db: DbOrTx): Promise<string[]> {
  const rows = await db.select({ day: holiday.day }).from(holiday).orderBy(asc(holiday.day))
  return rows.map(({ day }) => day)
}
