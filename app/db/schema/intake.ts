import { bigint, index, int, mysqlTable, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import { IMPORT_ARRIVALS, IMPORT_STATES } from '../../domain/imports.ts'
import { id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'
import { source } from './register.ts'
import { attachment } from './shared.ts'

/** A night file that somebody (or a logger) sent, from upload to acceptance or withdrawal. */
export const importFile = mysqlTable(
  'import_file',
  {
    id: id(),
    state: varchar('state', { length: 16, enum: IMPORT_STATES }).notNull(),
    /** A file that somebody sent, or a post of a logger's live readings. */
    arrival: varchar('arrival', { length: 8, enum: IMPORT_ARRIVALS }).notNull().default('file'),
    sourceId: ref('source_id').references(() => source.id),
    fileName: varchar('file_name', { length: 255 }).notNull(),
    byteSize: bigint('byte_size', { mode: 'number', unsigned: true }).notNull(),
    sha256: varchar('sha256', { length: 64 }).notNull(),
    /** Same as sha256 while accepted and empty otherwise: the same bytes cannot be accepted twice. */
    acceptedSha256: varchar('accepted_sha256', { length: 64 }),
    attachmentId: ref('attachment_id').references(() => attachment.id),
    uploadedBy: ref('uploaded_by').references(() => person.id),
    uploadedAt: utc('uploaded_at').notNull(),
    profileVersion: int('profile_version'),
    /** What reading the file found (domain/night-files). */
    readOut: json('read_out', z.unknown()),
    lineCount: int('line_count'),
    readingCount: int('reading_count'),
    heldCount: int('held_count'),
    conflictCount: int('conflict_count'),
    firstAt: utc('first_at'),
    lastAt: utc('last_at'),
    decidedBy: ref('decided_by').references(() => person.id),
    decidedAt: utc('decided_at'),
    reason: varchar('reason', { length: 1000 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [
    uniqueIndex('import_file_accepted_uq').on(t.acceptedSha256),
    index('import_file_sha_ix').on(t.sha256),
    index('import_file_state_ix').on(t.state, t.uploadedAt),
    index('import_file_source_ix').on(t.sourceId, t.lastAt),
  ],
)
