import { eq } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { person } from '../schema/index.ts'

export interface PersonForSignIn {
  id: number
  passwordHash: string | null
  endsAt: Date | null
}

/** The account with an address (compared without case by the collation), or null. */
export async function findPersonByEmail(db: DbOrTx, email: string): Promise<PersonForSignIn | null> {
  const rows = await db
    .select({ id: person.id, passwordHash: person.passwordHash, endsAt: person.endsAt })
    .from(person)
    .where(eq(person.email, email.trim()))
  return rows[0] ?? null
}

/** Stores a person's own display settings. */
export async function updatePreferences(
  db: DbOrTx,
  personId: number,
  preferences: { pressureUnit?: string; theme?: string },
): Promise<void> {
  await db.update(person).set(preferences).where(eq(person.id, personId))
}
