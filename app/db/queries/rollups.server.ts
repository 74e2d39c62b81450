/** Rollups of readings: made anew where readings have changed, and read in place of them. */
import { and, asc, eq, gte, inArray, lt, type SQL, sql } from 'drizzle-orm'
import { MOST_OFFSET_MS, widened } from '../../domain/clock-correction.ts'
import { QUALITIES, qualityCode } from '../../domain/readings.ts'
import { ROLLUP_LEVELS, type Span } from '../../domain/rollups.ts'
import type { DbOrTx } from '../client.server.ts'
import { channel, reading, rollup, rollupDue } from '../schema/index.ts'
import { type Corrections, readingParts } from './clock-corrections.server.ts'
import { usable } from './usable.server.ts'

/** Qualities that a stored reading may have: withdrawn ones are not among the readings any more. */
const COUNTED = QUALITIES.filter((quality) => quality !== 'withdrawn').map((quality) => ({
  code: qualityCode(quality),
  column: sql.raw(`n_${quality.replaceAll('-', '_')}`),
}))
const QUALITY_COLUMNS = sql.join(
  COUNTED.map(({ column }) => column),
  sql`, `,
)

/** By the source's own clock, as the readings are stored; their rollups are by true time. */
export interface DueStretch {
  id: number
  channelId: number
  from: Date
  /** The last instant that has changed. */
  last: Date
}

const dueColumns = {
  id: rollupDue.id,
  channelId: rollupDue.channelId,
  from: rollupDue.fromAt,
  last: rollupDue.toAt,
}

/** A channel whose rollups are due, that for longest; null when all are made. */
export async function findDueChannel(db: DbOrTx): Promise<number | null> {
  const [row] = await db
    .select({ channelId: rollupDue.channelId })
    .from(rollupDue)
    .orderBy(asc(rollupDue.id))
    .limit(1)
  return row?.channelId ?? null
}

/** What is due of some channels and touches [from, to): widened to true time by the corrections in force. */
export async function listDue(
  db: DbOrTx,
  channelIds: readonly number[],
  from: Date,
  to: Date,
  corrections: Corrections,
): Promise<DueStretch[]> {
  // Only where a clock has been corrected can a stretch touch what it does not reach by its own time.
  const margin = corrections.size === 0 ? 0 : MOST_OFFSET_MS
  const rows = await db
    .select(dueColumns)
    .from(rollupDue)
    .where(
      and(
        inArray(rollupDue.channelId, [...channelIds]),
        lt(rollupDue.fromAt, new Date(to.getTime() + margin)),
        gte(rollupDue.toAt, new Date(from.getTime() - margin)),
      ),
    )
  return rows
    .map((row) => {
      const span = widened(corrections.get(row.channelId) ?? [], row.from.getTime(), row.last.getTime())
      return { ...row, from: new Date(span.fromMs), last: new Date(span.lastMs) }
    })
    .filter((row) => row.from < to && row.last >= from)
}

/**
 * Locks what is due of a channel, oldest first. The channel itself is locked before that: of two that make rollups of
 * one channel, the second begins with what the first has left.
 */
export async function lockDue(tx: DbOrTx, channelId: number, limit: number): Promise<DueStretch[]> {
  await tx.select({ id: channel.id }).from(channel).where(eq(channel.id, channelId)).for('update')
  return tx
    .select(dueColumns)
    .from(rollupDue)
    .where(eq(rollupDue.channelId, channelId))
    .orderBy(asc(rollupDue.id))
    .limit(limit)
    .for('update')
}

export async function deleteDue(tx: DbOrTx, ids: readonly number[]): Promise<void> {
  await tx.delete(rollupDue).where(inArray(rollupDue.id, [...ids]))
}

export async function insertDue(
  tx: DbOrTx,
  rows: readonly { channelId: number; from: Date; last: Date }[],
): Promise<void> {
  if (rows.length === 0) return
  await tx
    .insert(rollupDue)
    .values(rows.map(({ channelId, from, last }) => ({ channelId, fromAt: from, toAt: last })))
}

/**
 * Start of the bucket that an instant falls in. Counted from 1900, a whole number of days before 1970, in whole numbers:
 * rounding down is then the same as cutting off, which is many times faster than dividing.
 */
function bucket(at: SQL | typeof reading.at, levelSeconds: number): SQL {
  return sql`'1900-01-01' + INTERVAL (TIMESTAMPDIFF(SECOND, '1900-01-01', ${at}) DIV ${levelSeconds}) * ${levelSeconds} SECOND`
}

/** Makes the rollups of the shortest level over whole buckets of it, in true time, from the readings. */
export async function rollUpReadings(
  tx: DbOrTx,
  channelId: number,
  span: Span,
  corrections: Corrections,
): Promise<void> {
  const [level] = ROLLUP_LEVELS
  const [from, to] = [new Date(span.fromMs), new Date(span.toMs)]
  await deleteSpan(tx, channelId, level, span)
  const counts = sql.join(
    COUNTED.map(({ code }) => sql`SUM(IF(quality = ${code}, n, 0))`),
    sql`, `,
  )
  const parts = readingParts(corrections, [channelId], from, to).map(
    ({ where, at }) => sql`SELECT ${at} AS at, quality, marks, value FROM reading WHERE ${where}`,
  )
  if (parts.length === 0) return
  // First by bucket, quality and use, which leaves few rows for the many sums.
  await tx.execute(sql`INSERT INTO rollup (channel_id, level_seconds, at, usable, min_value, max_value, sum_value,
      positive, min_positive, sum_ln, ${QUALITY_COLUMNS})
    SELECT ${channelId}, ${level}, bucket, SUM(IF(good, n, 0)), MIN(IF(good, low, NULL)), MAX(IF(good, high, NULL)),
      SUM(IF(good, total, 0)), SUM(IF(good, above, 0)), MIN(IF(good, low_above, NULL)), SUM(IF(good, total_ln, 0)), ${counts}
    FROM (
      SELECT ${bucket(reading.at, level)} AS bucket, quality, ${usable} AS good, COUNT(*) AS n, MIN(value) AS low,
        MAX(value) AS high, COALESCE(SUM(value), 0) AS total, COALESCE(SUM(value > 0), 0) AS above,
        MIN(IF(value > 0, value, NULL)) AS low_above, SUM(IF(value > 0, LN(value), 0)) AS total_ln
      FROM (${sql.join(parts, sql` UNION ALL `)}) AS reading GROUP BY bucket, quality, good
    ) AS parts GROUP BY bucket`)
}

/** Makes the rollups of a longer level over whole buckets of it from those of the shortest. */
export async function rollUpRollups(
  tx: DbOrTx,
  channelId: number,
  levelSeconds: number,
  span: Span,
): Promise<void> {
  const [shortest] = ROLLUP_LEVELS
  await deleteSpan(tx, channelId, levelSeconds, span)
  const counts = sql.join(
    COUNTED.map(({ column }) => sql`SUM(${column})`),
    sql`, `,
  )
  await tx.execute(sql`INSERT INTO rollup (channel_id, level_seconds, at, usable, min_value, max_value, sum_value,
      positive, min_positive, sum_ln, ${QUALITY_COLUMNS})
    SELECT channel_id, ${levelSeconds}, ${bucket(sql`at`, levelSeconds)} AS bucket, SUM(usable), MIN(min_value),
      MAX(max_value), SUM(sum_value), SUM(positive), MIN(min_positive), SUM(sum_ln), ${counts}
    FROM rollup WHERE channel_id = ${channelId} AND level_seconds = ${shortest} AND at >= ${new Date(span.fromMs)}
      AND at < ${new Date(span.toMs)} GROUP BY bucket`)
}

async function deleteSpan(tx: DbOrTx, channelId: number, levelSeconds: number, span: Span): Promise<void> {
  await tx
    .delete(rollup)
    .where(
      and(
        eq(rollup.channelId, channelId),
        eq(rollup.levelSeconds, levelSeconds),
        gte(rollup.at, new Date(span.fromMs)),
        lt(rollup.at, new Date(span.toMs)),
      ),
    )
}
