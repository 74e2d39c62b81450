import { boolean, index, mysqlTable, text, varchar } from 'drizzle-orm/mysql-core'
import { ENTRY_KINDS } from '../../domain/logbook.ts'
import { id, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { segment } from './register.ts'
import { signedAct } from './shared.ts'

/** What somebody wrote down. Never edited: amended. */
export const logEntry = mysqlTable(
  'log_entry',
  {
    id: id(),
    segmentId: ref('segment_id').references(() => segment.id),
    kind: varchar('kind', { length: 16, enum: ENTRY_KINDS }).notNull(),
    /** When it happened. */
    eventAt: utc('event_at').notNull(),
    /** When it was written down. */
    writtenAt: utc('written_at').notNull(),
    text: text('text').notNull(),
    authorId: ref('author_id')
      .notNull()
      .references(() => person.id),
    /** Drawn as a mark on the segment's chart. */
    onChart: boolean('on_chart').notNull().default(false),
    signedActId: ref('signed_act_id').references(() => signedAct.id),
  },
  (t) => [
    index('log_entry_segment_ix').on(t.segmentId, t.eventAt),
    index('log_entry_event_ix').on(t.eventAt),
  ],
)

/** A correction of an entry: the old text stays readable beside it. */
export const logAmendment = mysqlTable(
  'log_amendment',
  {
    id: id(),
    entryId: ref('entry_id')
      .notNull()
      .references(() => logEntry.id),
    text: text('text').notNull(),
    reason: varchar('reason', { length: 500 }).notNull(),
    writtenAt: utc('written_at').notNull(),
    authorId: ref('author_id')
      .notNull()
      .references(() => person.id),
    signedActId: ref('signed_act_id')
      .notNull()
      .references(() => signedAct.id),
  },
  (t) => [index('log_amendment_entry_ix').on(t.entryId)],
)
