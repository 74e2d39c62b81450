import { and, eq, isNull } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { person, signedAct } from '../schema/index.ts'

export type SignedActRow = typeof signedAct.$inferSelect

export async function insertSignedAct(
  db: DbOrTx,
  row: Omit<typeof signedAct.$inferInsert, 'id' | 'usedAt'>,
): Promise<number> {
  const [result] = await db.insert(signedAct).values(row)
  return result.insertId
}

export async function findSignedAct(db: DbOrTx, actId: number): Promise<SignedActRow | null> {
  const rows = await db.select().from(signedAct).where(eq(signedAct.id, actId))
  return rows[0] ?? null
}

/** Marks an act as used; false when it already was. */
export async function spendSignedAct(tx: DbOrTx, actId: number, at: Date): Promise<boolean> {
  const [result] = await tx
    .update(signedAct)
    .set({ usedAt: at })
    .where(and(eq(signedAct.id, actId), isNull(signedAct.usedAt)))
  return result.affectedRows === 1
}

/** What a signature is checked against: the person's hash, and when the account ends. */
export async function findSigner(
  db: DbOrTx,
  personId: number,
): Promise<{ passwordHash: string | null; endsAt: Date | null } | null> {
  const rows = await db
    .select({ passwordHash: person.passwordHash, endsAt: person.endsAt })
    .from(person)
    .where(eq(person.id, personId))
  return rows[0] ?? null
}
