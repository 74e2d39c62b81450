import {
  bigint,
  boolean,
  index,
  int,
  mysqlTable,
  primaryKey,
  text,
  tinyint,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import { bytes, id, json, ref, utc } from '../columns.ts'
import { person } from './people.ts'

/**
 * The product clock: one row. `baseAt` was the product's time when the machine's was `baseMachineAt`; while the product
 * runs, its time is baseAt + (machine now - baseMachineAt). `seenAt` is kept by the worker, so that after a stop or a
 * crash the demo clock goes on from there.
 */
export const productClock = mysqlTable('product_clock', {
  id: tinyint('id').primaryKey(),
  demo: boolean('demo').notNull(),
  baseAt: utc('base_at').notNull(),
  baseMachineAt: utc('base_machine_at').notNull(),
  seenAt: utc('seen_at').notNull(),
})

/** Who changed what, when, before and after. Append-only, kept so by triggers. */
export const record = mysqlTable(
  'record',
  {
    id: id(),
    at: utc('at').notNull(),
    machineAt: utc('machine_at').notNull(),
    personId: ref('person_id').references(() => person.id),
    act: varchar('act', { length: 60 }).notNull(),
    subjectKind: varchar('subject_kind', { length: 40 }).notNull(),
    subjectId: varchar('subject_id', { length: 40 }).notNull(),
    /** From when the change holds, where that differs from when it was made. */
    effectiveAt: utc('effective_at'),
    before: json('before_value', z.unknown()),
    after: json('after_value', z.unknown()),
    reason: varchar('reason', { length: 1000 }).notNull().default(''),
    signedActId: ref('signed_act_id'),
  },
  (t) => [index('record_subject_ix').on(t.subjectKind, t.subjectId, t.id), index('record_at_ix').on(t.at)],
)

/** A person's own password given again for one act on one thing; used once. */
export const signedAct = mysqlTable(
  'signed_act',
  {
    id: id(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    meaning: varchar('meaning', { length: 120 }).notNull(),
    subjectKind: varchar('subject_kind', { length: 40 }).notNull(),
    subjectId: varchar('subject_id', { length: 40 }).notNull(),
    at: utc('at').notNull(),
    machineAt: utc('machine_at').notNull(),
    usedAt: utc('used_at'),
  },
  (t) => [index('signed_act_subject_ix').on(t.subjectKind, t.subjectId)],
)

/** Work for the worker. Times are the machine's. */
export const job = mysqlTable(
  'job',
  {
    id: id(),
    kind: varchar('kind', { length: 40 }).notNull(),
    payload: json('payload', z.unknown()).notNull(),
    /** Two requests with the same key are one job. */
    dedupeKey: varchar('dedupe_key', { length: 160 }),
    state: varchar('state', { length: 12, enum: ['waiting', 'running', 'done', 'failed'] }).notNull(),
    runAt: utc('run_at').notNull(),
    attempts: int('attempts').notNull().default(0),
    maxAttempts: int('max_attempts').notNull().default(5),
    leaseOwner: varchar('lease_owner', { length: 64 }),
    leaseUntil: utc('lease_until'),
    lastError: text('last_error'),
    createdAt: utc('created_at').notNull(),
    finishedAt: utc('finished_at'),
  },
  (t) => [
    index('job_due_ix').on(t.state, t.runAt, t.id),
    index('job_lease_ix').on(t.state, t.leaseUntil),
    uniqueIndex('job_dedupe_uq').on(t.dedupeKey),
  ],
)

/** A recurring task and the last due time (product clock) it was started for. */
export const scheduleTask = mysqlTable('schedule_task', {
  name: varchar('name', { length: 60 }).primaryKey(),
  lastDueAt: utc('last_due_at').notNull(),
})

/** The worker that runs the schedule at present; a lease that it renews. */
export const scheduleOwner = mysqlTable('schedule_owner', {
  id: tinyint('id').primaryKey(),
  owner: varchar('owner', { length: 64 }).notNull(),
  leaseUntil: utc('lease_until').notNull(),
})

/** A file kept in the database. Complete only when all its bytes and its hash are there. */
export const attachment = mysqlTable(
  'attachment',
  {
    id: id(),
    fileName: varchar('file_name', { length: 255 }).notNull(),
    contentType: varchar('content_type', { length: 100 }).notNull(),
    byteSize: bigint('byte_size', { mode: 'number', unsigned: true }).notNull(),
    sha256: varchar('sha256', { length: 64 }).notNull(),
    complete: boolean('complete').notNull().default(false),
    subjectKind: varchar('subject_kind', { length: 40 }).notNull(),
    subjectId: varchar('subject_id', { length: 40 }).notNull(),
    createdBy: ref('created_by').references(() => person.id),
    createdAt: utc('created_at').notNull(),
  },
  (t) => [index('attachment_subject_ix').on(t.subjectKind, t.subjectId)],
)

/** One MiB, at most, of a file. */
export const attachmentChunk = mysqlTable(
  'attachment_chunk',
  {
    attachmentId: ref('attachment_id').notNull(),
    chunkNo: int('chunk_no', { unsigned: true }).notNull(),
    data: bytes('data').notNull(),
  },
  (t) => [primaryKey({ name: 'attachment_chunk_pk', columns: [t.attachmentId, t.chunkNo] })],
)

/** Something computed from readings and shown or signed later: a curve, an alert, a report. */
export const derivedThing = mysqlTable(
  'derived_thing',
  {
    id: id(),
    kind: varchar('kind', { length: 40 }).notNull(),
    subjectId: varchar('subject_id', { length: 80 }).notNull(),
    madeAt: utc('made_at').notNull(),
    staleSince: utc('stale_since'),
    staleReason: varchar('stale_reason', { length: 500 }),
  },
  (t) => [uniqueIndex('derived_thing_uq').on(t.kind, t.subjectId)],
)

/** The stretch of a channel that a derived thing rests on. */
export const derivedBasis = mysqlTable(
  'derived_basis',
  {
    derivedId: ref('derived_id')
      .notNull()
      .references(() => derivedThing.id),
    channelId: ref('channel_id').notNull(),
    fromAt: utc('from_at').notNull(),
    toAt: utc('to_at').notNull(),
  },
  (t) => [
    primaryKey({ name: 'derived_basis_pk', columns: [t.derivedId, t.channelId, t.fromAt] }),
    index('derived_basis_channel_ix').on(t.channelId, t.fromAt, t.toAt),
  ],
)
