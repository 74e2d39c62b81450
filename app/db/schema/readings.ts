import { double, index, int, mysqlTable, primaryKey, tinyint, varchar } from 'drizzle-orm/mysql-core'
import { id, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { source } from './register.ts'

/**
 * Readings by raw channel and instant. Which position and instrument a reading belongs to follows from the dated maps
 * when it is read, so a corrected map rewrites nothing. `seq` keeps apart two different values of one instant.
 *
 * Partitioned by month (a hand-written migration), therefore without foreign keys. The original text of time and value
 * stands in the original bytes at (import, line).
 */
export const reading = mysqlTable(
  'reading',
  {
    channelId: int('channel_id', { unsigned: true }).notNull(),
    at: utc('at').notNull(),
    seq: tinyint('seq', { unsigned: true }).notNull().default(0),
    /** In the quantity's unit (Pa, °C …); null where the file had a word and not a number. */
    value: double('value'),
    /** Limit named by an over- or under-range reading, same unit. */
    bound: double('bound'),
    quality: tinyint('quality', { unsigned: true }).notNull(),
    marks: tinyint('marks', { unsigned: true }).notNull().default(0),
    importId: int('import_id', { unsigned: true }).notNull(),
    lineNo: int('line_no', { unsigned: true }).notNull(),
  },
  (t) => [primaryKey({ name: 'reading_pk', columns: [t.channelId, t.at, t.seq] })],
)

/** Which stretch of which channel an import holds: withdrawal and tracing go by these. */
export const importRange = mysqlTable(
  'import_range',
  {
    importId: ref('import_id').notNull(),
    channelId: ref('channel_id').notNull(),
    firstAt: utc('first_at').notNull(),
    lastAt: utc('last_at').notNull(),
    readingCount: int('reading_count').notNull(),
  },
  (t) => [
    primaryKey({ name: 'import_range_pk', columns: [t.importId, t.channelId] }),
    index('import_range_channel_ix').on(t.channelId, t.firstAt),
  ],
)

/**
 * How far a source's clock went wrong over a stretch: a layer that is laid over its readings when they are read and
 * taken off by replacing the row. The times as the file has them stay.
 */
export const clockCorrection = mysqlTable(
  'clock_correction',
  {
    id: id(),
    sourceId: ref('source_id')
      .notNull()
      .references(() => source.id),
    /** By the source's own clock. */
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at').notNull(),
    /** True time minus the source's, milliseconds, at both ends; straight between them. */
    startMs: int('start_ms').notNull(),
    endMs: int('end_ms').notNull(),
    /** What it rests on: compared events or a comparison by hand. */
    basis: varchar('basis', { length: 1000 }).notNull(),
    recordedBy: ref('recorded_by')
      .notNull()
      .references(() => person.id),
    recordedAt: utc('recorded_at').notNull(),
    replacedAt: utc('replaced_at'),
    replacedBy: ref('replaced_by').references(() => person.id),
    replaceReason: varchar('replace_reason', { length: 500 }).notNull().default(''),
  },
  (t) => [index('clock_correction_ix').on(t.sourceId, t.startsAt)],
)
