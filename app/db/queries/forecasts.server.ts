import { and, desc, eq, sql } from 'drizzle-orm'
import { ForecastModelSchema } from '../../domain/forecast-records.ts'
import type { DbOrTx } from '../client.server.ts'
import { forecastRecord, person, position, segment, supplySet } from '../schema/index.ts'

/** Forecasts of record, the last made first. */
export async function listForecasts(
  db: DbOrTx,
  filter: { segmentId?: number; open?: boolean; limit?: number },
) {
  const rows = await db
    .select({
      record: forecastRecord,
      segmentTag: segment.tag,
      positionTag: position.tag,
      madeByName: person.name,
    })
    .from(forecastRecord)
    .innerJoin(segment, eq(segment.id, forecastRecord.segmentId))
    .innerJoin(position, eq(position.id, forecastRecord.positionId))
    .innerJoin(person, eq(person.id, forecastRecord.madeBy))
    .where(
      and(
        filter.segmentId === undefined ? undefined : eq(forecastRecord.segmentId, filter.segmentId),
        filter.open ? eq(forecastRecord.outcome, 'open') : undefined,
      ),
    )
    .orderBy(desc(forecastRecord.madeAt), desc(forecastRecord.id))
    .limit(filter.limit ?? 1_000)
  return rows.map(({ record: { model, ...record }, ...names }) => ({
    ...record,
    ...names,
    model: ForecastModelSchema.parse(model),
  }))
}
export type ForecastRow = Awaited<ReturnType<typeof listForecasts>>[number]

/** Outcomes of all forecasts of record, for counting. */
export async function listOutcomes(db: DbOrTx) {
  return db
    .select({ outcome: forecastRecord.outcome, judgedAt: forecastRecord.judgedAt })
    .from(forecastRecord)
}

export async function insertForecast(db: DbOrTx, row: typeof forecastRecord.$inferInsert): Promise<number> {
  const [result] = await db.insert(forecastRecord).values(row)
  return result.insertId
}

/** Writes how an open forecast came out; false when it has been judged meanwhile. */
export async function closeForecast(
  db: DbOrTx,
  id: number,
  judged: Pick<typeof forecastRecord.$inferInsert, 'outcome' | 'reachedAt' | 'judgedAt' | 'outcomeReason'>,
): Promise<boolean> {
  const [result] = await db
    .update(forecastRecord)
    .set(judged)
    .where(and(eq(forecastRecord.id, id), eq(forecastRecord.outcome, sql`'open'`)))
  return result.affectedRows === 1
}

/** Supply sets that are in the register, for what several bakes at once would need. */
export async function countSupplySets(db: DbOrTx): Promise<number> {
  const rows = await db.select({ count: sql<number>`COUNT(*)` }).from(supplySet)
  return Number(rows[0]?.count ?? 0)
}
