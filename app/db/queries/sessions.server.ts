import { and, eq, lt, lte, or } from 'drizzle-orm'
import type { Grant } from '../../domain/roles.ts'
import type { DbOrTx } from '../client.server.ts'
import { person, roleGrant, session } from '../schema/index.ts'

export interface SessionPerson {
  id: number
  name: string
  endsAt: Date | null
  pressureUnit: string
  theme: string
  grants: Grant[]
}

export interface FoundSession {
  tokenHash: string
  lastSeenAt: Date
  expiresAt: Date
  shared: boolean
  person: SessionPerson
}

/** A session with its person and every grant the person has had; null when the token is unknown. */
export async function findSession(db: DbOrTx, tokenHash: string): Promise<FoundSession | null> {
  const rows = await db
    .select({
      tokenHash: session.tokenHash,
      lastSeenAt: session.lastSeenAt,
      expiresAt: session.expiresAt,
      shared: session.shared,
      id: person.id,
      name: person.name,
      endsAt: person.endsAt,
      pressureUnit: person.pressureUnit,
      theme: person.theme,
      role: roleGrant.role,
      startsAt: roleGrant.startsAt,
      grantEndsAt: roleGrant.endsAt,
      revokedAt: roleGrant.revokedAt,
    })
    .from(session)
    .innerJoin(person, eq(person.id, session.personId))
    .leftJoin(roleGrant, eq(roleGrant.personId, person.id))
    .where(eq(session.tokenHash, tokenHash))
  const first = rows[0]
  if (first === undefined) return null
  const grants: Grant[] = []
  for (const row of rows) {
    if (row.role === null || row.startsAt === null) continue
    grants.push({ role: row.role, startsAt: row.startsAt, endsAt: row.grantEndsAt, revokedAt: row.revokedAt })
  }
  return {
    tokenHash: first.tokenHash,
    lastSeenAt: first.lastSeenAt,
    expiresAt: first.expiresAt,
    shared: first.shared,
    person: {
      id: first.id,
      name: first.name,
      endsAt: first.endsAt,
      pressureUnit: first.pressureUnit,
      theme: first.theme,
      grants,
    },
  }
}

export async function insertSession(db: DbOrTx, row: typeof session.$inferInsert): Promise<void> {
  await db.insert(session).values(row)
}

export async function touchSession(db: DbOrTx, tokenHash: string, at: Date): Promise<void> {
  await db.update(session).set({ lastSeenAt: at }).where(eq(session.tokenHash, tokenHash))
}

export async function deleteSession(db: DbOrTx, tokenHash: string): Promise<void> {
  await db.delete(session).where(eq(session.tokenHash, tokenHash))
}

/** Deletes sessions past their end, and those last used before an instant: a later one on shared devices. */
export async function deleteEndedSessions(
  db: DbOrTx,
  now: Date,
  { idleSince, sharedIdleSince }: { idleSince: Date; sharedIdleSince: Date },
): Promise<number> {
  const [result] = await db
    .delete(session)
    .where(
      or(
        lte(session.expiresAt, now),
        lt(session.lastSeenAt, idleSince),
        and(session.shared, lt(session.lastSeenAt, sharedIdleSince)),
      ),
    )
  return result.affectedRows
}
