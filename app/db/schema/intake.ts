import {
  bigint,
  double,
  index,
  int,
  mysqlTable,
  primaryKey,
  tinyint,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import { IMPORT_ARRIVALS, IMPORT_STATES, WITHDRAWAL_STATES } from '../../domain/imports.ts'
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
    /** How far the worker is with a large file; it counts bytes of the original. */
    bytesDone: bigint('bytes_done', { mode: 'number', unsigned: true }).notNull().default(0),
    /** Who asked the worker to take a large file in; null when nobody has, or it is done. */
    takingInBy: ref('taking_in_by').references(() => person.id),
    /** Why the worker could not do what it was asked, for the person who asked. */
    fault: varchar('fault', { length: 1000 }).notNull().default(''),
    revision: int('revision').notNull().default(1),
  },
  (t) => [
    uniqueIndex('import_file_accepted_uq').on(t.acceptedSha256),
    index('import_file_sha_ix').on(t.sha256),
    index('import_file_state_ix').on(t.state, t.uploadedAt),
    index('import_file_source_ix').on(t.sourceId, t.lastAt),
  ],
)

/**
 * A wish to withdraw an accepted import. One asks, an engineer agrees, an administrator does it; whoever agrees is
 * neither of the other two.
 */
export const importWithdrawal = mysqlTable(
  'import_withdrawal',
  {
    id: id(),
    importId: ref('import_id')
      .notNull()
      .references(() => importFile.id),
    /** The import's number while the wish is open, null afterwards: one open wish an import. */
    openImportId: ref('open_import_id'),
    state: varchar('state', { length: 8, enum: WITHDRAWAL_STATES }).notNull(),
    reason: varchar('reason', { length: 1000 }).notNull(),
    askedBy: ref('asked_by')
      .notNull()
      .references(() => person.id),
    askedAt: utc('asked_at').notNull(),
    agreedBy: ref('agreed_by').references(() => person.id),
    agreedAt: utc('agreed_at'),
    /** Who withdrew the import, or turned the wish down. */
    closedBy: ref('closed_by').references(() => person.id),
    closedAt: utc('closed_at'),
    /** Why it was turned down. */
    refusal: varchar('refusal', { length: 1000 }).notNull().default(''),
  },
  (t) => [
    uniqueIndex('import_withdrawal_open_uq').on(t.openImportId),
    index('import_withdrawal_import_ix').on(t.importId),
  ],
)

/**
 * Readings of an import that do not stand in `reading`. Of an accepted import: those that an earlier one holds already,
 * kept so that they can take its place should it be withdrawn. Of a withdrawn import: all that it brought.
 */
export const readingAside = mysqlTable(
  'reading_aside',
  {
    importId: int('import_id', { unsigned: true }).notNull(),
    channelId: int('channel_id', { unsigned: true }).notNull(),
    at: utc('at').notNull(),
    seq: tinyint('seq', { unsigned: true }).notNull(),
    value: double('value'),
    bound: double('bound'),
    quality: tinyint('quality', { unsigned: true }).notNull(),
    marks: tinyint('marks', { unsigned: true }).notNull(),
    lineNo: int('line_no', { unsigned: true }).notNull(),
  },
  (t) => [
    primaryKey({ name: 'reading_aside_pk', columns: [t.importId, t.channelId, t.at, t.lineNo] }),
    index('reading_aside_instant_ix').on(t.channelId, t.at),
  ],
)

/** A file that arrives in pieces, so that a connection that breaks off costs only the piece. Times are the machine's. */
export const upload = mysqlTable(
  'upload',
  {
    id: id(),
    /** Names the upload in addresses; not to be guessed. */
    token: varchar('token', { length: 43 }).notNull(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    sourceCode: varchar('source_code', { length: 20 }).notNull().default(''),
    fileName: varchar('file_name', { length: 255 }).notNull(),
    byteSize: bigint('byte_size', { mode: 'number', unsigned: true }).notNull(),
    attachmentId: ref('attachment_id')
      .notNull()
      .references(() => attachment.id),
    receivedBytes: bigint('received_bytes', { mode: 'number', unsigned: true }).notNull().default(0),
    createdAt: utc('created_at').notNull(),
    lastAt: utc('last_at').notNull(),
    /** The import that it became. */
    importId: ref('import_id').references(() => importFile.id),
  },
  (t) => [uniqueIndex('upload_token_uq').on(t.token), index('upload_last_ix').on(t.lastAt)],
)
