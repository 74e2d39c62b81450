import { double, index, int, mediumint, mysqlTable, primaryKey } from 'drizzle-orm/mysql-core'
import { id, utc } from '../columns.ts'

/** Readings counted by quality: one number for each of `QUALITIES`, in storage order. */
function qualityCounts() {
  const count = (name: string) => mediumint(name, { unsigned: true }).notNull()
  return {
    good: count('n_good'),
    overRange: count('n_over_range'),
    underRange: count('n_under_range'),
    off: count('n_off'),
    starting: count('n_starting'),
    degas: count('n_degas'),
    fault: count('n_fault'),
    noSignal: count('n_no_signal'),
    suspect: count('n_suspect'),
    manual: count('n_manual'),
  }
}

/**
 * What a channel's readings come to in ten minutes, two hours, eight hours and a day, from whole multiples of that length in UTC. By
 * raw channel, so a corrected map needs nothing; by true time, so a corrected clock leaves its stretch due. Extremes, sums and `usable` are of usable readings; the figures named
 * positive leave out those at or below zero, which have no logarithm.
 */
export const rollup = mysqlTable(
  'rollup',
  {
    channelId: int('channel_id', { unsigned: true }).notNull(),
    levelSeconds: mediumint('level_seconds', { unsigned: true }).notNull(),
    at: utc('at').notNull(),
    usable: mediumint('usable', { unsigned: true }).notNull(),
    min: double('min_value'),
    max: double('max_value'),
    sum: double('sum_value').notNull(),
    positive: mediumint('positive', { unsigned: true }).notNull(),
    minPositive: double('min_positive'),
    sumLn: double('sum_ln').notNull(),
    ...qualityCounts(),
  },
  (t) => [primaryKey({ name: 'rollup_pk', columns: [t.channelId, t.levelSeconds, t.at] })],
)

/**
 * A stretch of a channel whose readings have changed and whose rollups have not been made anew. Written by whatever
 * changes readings, in the same transaction; until it is gone, that stretch is read from the readings themselves.
 */
export const rollupDue = mysqlTable(
  'rollup_due',
  {
    id: id(),
    channelId: int('channel_id', { unsigned: true }).notNull(),
    fromAt: utc('from_at').notNull(),
    toAt: utc('to_at').notNull(),
  },
  (t) => [index('rollup_due_channel_ix').on(t.channelId, t.fromAt)],
)
