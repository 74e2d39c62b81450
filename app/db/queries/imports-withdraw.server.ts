/**
 * Taking the readings of an accepted import out of `reading` again. They go aside, where the import still leads to
 * them. A reading that another accepted import brought as well, and that was not stored twice, takes the free place.
 */
import { eq, sql } from 'drizzle-orm'
import { widened } from '../../domain/clock-correction.ts'
import { MARKS } from '../../domain/readings.ts'
import type { DbOrTx } from '../client.server.ts'
import { importRange } from '../schema/index.ts'
import { correctionsFor } from './clock-corrections.server.ts'
import type { Stretch } from './derived.server.ts'
import { affected } from './imports-merge.server.ts'

/** The stretches of channels for which an import has stored readings, by their own and by true time. */
export async function importStretches(tx: DbOrTx, importId: number): Promise<Stretch[]> {
  const rows = await tx
    .select({ channelId: importRange.channelId, from: importRange.firstAt, to: importRange.lastAt })
    .from(importRange)
    .where(eq(importRange.importId, importId))
  const corrections = await correctionsFor(
    tx,
    rows.map(({ channelId }) => channelId),
  )
  return rows.map(({ channelId, from, to }) => {
    const span = widened(corrections.get(channelId) ?? [], from.getTime(), to.getTime())
    return { channelId, from: new Date(span.fromMs), to: new Date(span.lastMs) }
  })
}

/**
 * Takes an import's readings out. To be called with its source locked and after its state has been changed, so that
 * its own readings are not found to be held by it.
 *
 * @returns how many were taken out, and how many of those stay because another import brought them too
 */
export async function takeOutReadings(
  tx: DbOrTx,
  importId: number,
): Promise<{ withdrawn: number; restored: number }> {
  // By the stretches kept with the import: `reading` is sorted by channel and instant, not by import.
  const own = sql`import_range AS stretch STRAIGHT_JOIN reading ON reading.channel_id = stretch.channel_id
    AND reading.at BETWEEN stretch.first_at AND stretch.last_at AND reading.import_id = stretch.import_id
    WHERE stretch.import_id = ${importId}`
  const withdrawn = await affected(
    tx,
    sql`INSERT INTO reading_aside (import_id, channel_id, at, seq, value, bound, quality, marks, line_no)
      SELECT reading.import_id, reading.channel_id, reading.at, reading.seq, reading.value, reading.bound,
        reading.quality, reading.marks, reading.line_no FROM ${own}`,
  )
  const removed = await affected(tx, sql`DELETE reading FROM ${own}`)
  if (removed !== withdrawn)
    throw new Error(`Import ${importId}: ${withdrawn} readings set aside and ${removed} removed`)
  const restored = await restoreHeld(tx, importId)
  await settleConflicts(tx, importId)
  await tx.execute(sql`INSERT INTO rollup_due (channel_id, from_at, to_at)
    SELECT channel_id, first_at, last_at FROM import_range WHERE import_id = ${importId}`)
  await tx.execute(sql`DROP TEMPORARY TABLE IF EXISTS restored`)
  return { withdrawn, restored }
}

/** Puts readings into the places that have become free, each under the earliest accepted import that brought it. */
async function restoreHeld(tx: DbOrTx, importId: number): Promise<number> {
  await tx.execute(sql`DROP TEMPORARY TABLE IF EXISTS restored`)
  await tx.execute(sql`CREATE TEMPORARY TABLE restored ENGINE=InnoDB
    SELECT first.*, ROW_NUMBER() OVER (PARTITION BY channel_id, at ORDER BY import_id, line_no) - 1 AS place
    FROM (
      SELECT aside.*, ROW_NUMBER() OVER (
          PARTITION BY aside.channel_id, aside.at, aside.value, aside.bound, aside.quality
          ORDER BY aside.import_id, aside.line_no) AS turn
      FROM (SELECT DISTINCT channel_id, at FROM reading_aside WHERE import_id = ${importId}) AS free
      JOIN reading_aside AS aside ON aside.channel_id = free.channel_id AND aside.at = free.at
      JOIN import_file ON import_file.id = aside.import_id AND import_file.state = 'accepted'
      WHERE NOT EXISTS (SELECT 1 FROM reading WHERE reading.channel_id = aside.channel_id AND reading.at = aside.at
        AND reading.value <=> aside.value AND reading.bound <=> aside.bound AND reading.quality = aside.quality)
    ) AS first WHERE turn = 1`)
  const restored = await affected(
    tx,
    sql`INSERT INTO reading (channel_id, at, seq, value, bound, quality, marks, import_id, line_no)
      SELECT channel_id, at, place + (SELECT COALESCE(MAX(reading.seq) + 1, 0) FROM reading
          WHERE reading.channel_id = restored.channel_id AND reading.at = restored.at),
        value, bound, quality, marks, import_id, line_no FROM restored`,
  )
  if (restored === 0) return 0
  await tx.execute(sql`DELETE reading_aside FROM reading_aside JOIN restored
    ON restored.import_id = reading_aside.import_id AND restored.channel_id = reading_aside.channel_id
      AND restored.at = reading_aside.at AND restored.line_no = reading_aside.line_no`)
  await tx.execute(sql`INSERT INTO import_range (import_id, channel_id, first_at, last_at, reading_count)
    SELECT import_id, channel_id, MIN(at), MAX(at), COUNT(*) FROM restored GROUP BY import_id, channel_id
    ON DUPLICATE KEY UPDATE first_at = LEAST(import_range.first_at, VALUES(first_at)),
      last_at = GREATEST(import_range.last_at, VALUES(last_at)),
      reading_count = import_range.reading_count + VALUES(reading_count)`)
  await tx.execute(sql`UPDATE import_file
    JOIN (SELECT import_id, COUNT(*) AS n FROM restored GROUP BY import_id) AS counted ON counted.import_id = import_file.id
    SET reading_count = reading_count + n, held_count = held_count - n`)
  return restored
}

/** An instant that has one reading left is no conflict any more; one that has several is. */
async function settleConflicts(tx: DbOrTx, importId: number): Promise<void> {
  await tx.execute(sql`UPDATE reading JOIN (
      SELECT reading.channel_id, reading.at, COUNT(*) AS n
      FROM (SELECT channel_id, at FROM reading_aside WHERE import_id = ${importId} AND (marks & ${MARKS.conflict}) <> 0
        UNION SELECT channel_id, at FROM restored) AS touched
      JOIN reading ON reading.channel_id = touched.channel_id AND reading.at = touched.at
      GROUP BY reading.channel_id, reading.at) AS counted
    ON counted.channel_id = reading.channel_id AND counted.at = reading.at
    SET reading.marks = IF(n > 1, reading.marks | ${MARKS.conflict}, reading.marks & ~${MARKS.conflict})`)
}
