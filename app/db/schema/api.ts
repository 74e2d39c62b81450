import { index, int, mysqlTable, primaryKey, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { z } from 'zod'
import { id, json, ref, utc } from '../columns.ts'
import { importFile } from './intake.ts'
import { person } from './people.ts'
import { channel, instrument, position, source } from './register.ts'

/** A key with which a machine sends readings. Only its hash is kept; times are the product's. Revoked, never deleted. */
export const apiToken = mysqlTable(
  'api_token',
  {
    id: id(),
    /** What it is for, in a person's words. */
    name: varchar('name', { length: 80 }).notNull(),
    /** SHA-256 of the token, in hexadecimal digits. */
    tokenHash: varchar('token_hash', { length: 64 }).notNull(),
    /** Null for the one that the demo makes for itself. */
    createdBy: ref('created_by').references(() => person.id),
    createdAt: utc('created_at').notNull(),
    /** It is refused from this instant on. */
    endsAt: utc('ends_at').notNull(),
    revokedBy: ref('revoked_by').references(() => person.id),
    revokedAt: utc('revoked_at'),
    revokeReason: varchar('revoke_reason', { length: 500 }),
    lastUsedAt: utc('last_used_at'),
  },
  (t) => [uniqueIndex('api_token_hash_uq').on(t.tokenHash)],
)

/** A source that a token may send readings for. */
export const apiTokenSource = mysqlTable(
  'api_token_source',
  {
    tokenId: ref('token_id')
      .notNull()
      .references(() => apiToken.id),
    sourceId: ref('source_id')
      .notNull()
      .references(() => source.id),
  },
  (t) => [primaryKey({ name: 'api_token_source_pk', columns: [t.tokenId, t.sourceId] })],
)

/** A post that was taken in, by the key its sender gave it: the same key again gets the same answer. */
export const apiPost = mysqlTable(
  'api_post',
  {
    id: id(),
    tokenId: ref('token_id')
      .notNull()
      .references(() => apiToken.id),
    /** Header Idempotency-Key. */
    requestKey: varchar('request_key', { length: 120 }).notNull(),
    sourceId: ref('source_id')
      .notNull()
      .references(() => source.id),
    bodySha256: varchar('body_sha256', { length: 64 }).notNull(),
    importId: ref('import_id').references(() => importFile.id),
    /** What was answered. */
    answer: json('answer', z.record(z.string(), z.unknown())),
    receivedAt: utc('received_at').notNull(),
  },
  (t) => [
    uniqueIndex('api_post_key_uq').on(t.tokenId, t.requestKey),
    index('api_post_received_ix').on(t.receivedAt),
  ],
)

/**
 * A reading that a person typed: what stands in `reading` with import 0 and this row's number as its line. Text and unit
 * are kept as typed.
 */
export const typedReading = mysqlTable(
  'typed_reading',
  {
    id: id(),
    positionId: ref('position_id')
      .notNull()
      .references(() => position.id),
    channelId: ref('channel_id')
      .notNull()
      .references(() => channel.id),
    at: utc('at').notNull(),
    /** Keeps apart different values of one instant, as in `reading`. */
    seq: int('seq', { unsigned: true }).notNull(),
    valueText: varchar('value_text', { length: 40 }).notNull(),
    unit: varchar('unit', { length: 24 }).notNull(),
    /** The instrument of the register, where it is one. */
    instrumentId: ref('instrument_id').references(() => instrument.id),
    /** The instrument as the person named it. */
    instrumentText: varchar('instrument_text', { length: 80 }).notNull(),
    note: varchar('note', { length: 500 }).notNull().default(''),
    typedBy: ref('typed_by')
      .notNull()
      .references(() => person.id),
    typedAt: utc('typed_at').notNull(),
  },
  (t) => [index('typed_reading_position_ix').on(t.positionId, t.at)],
)
