import { boolean, index, mysqlTable, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { ROLES } from '../../domain/roles.ts'
import { id, ref, utc } from '../columns.ts'

/** A person with an account, or one who is only named on records (no password, cannot sign in). */
export const person = mysqlTable(
  'person',
  {
    id: id(),
    name: varchar('name', { length: 120 }).notNull(),
    email: varchar('email', { length: 254 }),
    passwordHash: varchar('password_hash', { length: 255 }),
    /** Licence or other remark, for people named on permits. */
    note: varchar('note', { length: 500 }).notNull().default(''),
    /** After this instant the account no longer signs in; entries stay. */
    endsAt: utc('ends_at'),
    pressureUnit: varchar('pressure_unit', { length: 8 }).notNull().default('Pa'),
    theme: varchar('theme', { length: 8 }).notNull().default('system'),
    createdAt: utc('created_at').notNull(),
  },
  (t) => [uniqueIndex('person_email_uq').on(t.email), uniqueIndex('person_name_uq').on(t.name)],
)

/** A role held by a person between two instants. Never deleted: revoked instead. */
export const roleGrant = mysqlTable(
  'role_grant',
  {
    id: id(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    role: varchar('role', { length: 20, enum: ROLES }).notNull(),
    startsAt: utc('starts_at').notNull(),
    endsAt: utc('ends_at'),
    grantedBy: ref('granted_by').references(() => person.id),
    grantedAt: utc('granted_at').notNull(),
    reason: varchar('reason', { length: 500 }).notNull(),
    confirmedBy: ref('confirmed_by').references(() => person.id),
    confirmedAt: utc('confirmed_at'),
    revokedBy: ref('revoked_by').references(() => person.id),
    revokedAt: utc('revoked_at'),
    revokeReason: varchar('revoke_reason', { length: 500 }),
  },
  (t) => [index('role_grant_person_ix').on(t.personId)],
)

/** A signed-in browser. The cookie holds a random token; here stands only its hash. Times are the machine's. */
export const session = mysqlTable(
  'session',
  {
    tokenHash: varchar('token_hash', { length: 64 }).primaryKey(),
    personId: ref('person_id')
      .notNull()
      .references(() => person.id),
    createdAt: utc('created_at').notNull(),
    lastSeenAt: utc('last_seen_at').notNull(),
    expiresAt: utc('expires_at').notNull(),
    userAgent: varchar('user_agent', { length: 255 }).notNull().default(''),
    /** A tablet that several people use: shorter idle time. */
    shared: boolean('shared').notNull().default(false),
  },
  (t) => [index('session_person_ix').on(t.personId), index('session_expires_ix').on(t.expiresAt)],
)
