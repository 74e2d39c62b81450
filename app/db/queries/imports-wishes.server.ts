/** Wishes to withdraw an import: who asked, who agreed, who did it. */
import { desc, eq, isNotNull } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { WithdrawalState } from '../../domain/imports.ts'
import type { DbOrTx } from '../client.server.ts'
import { importWithdrawal, person } from '../schema/index.ts'

export interface WishRow {
  id: number
  state: WithdrawalState
  reason: string
  askedById: number
  askedBy: string
  askedAt: Date
  agreedById: number | null
  agreedBy: string | null
  agreedAt: Date | null
  closedBy: string | null
  closedAt: Date | null
  /** Why it was turned down. */
  refusal: string
}

const asker = alias(person, 'asker')
const agreer = alias(person, 'agreer')
const closer = alias(person, 'closer')

/** Wishes about one import, the newest first. */
export function listWishes(db: DbOrTx, importId: number): Promise<WishRow[]> {
  return db
    .select({
      id: importWithdrawal.id,
      state: importWithdrawal.state,
      reason: importWithdrawal.reason,
      askedById: importWithdrawal.askedBy,
      askedBy: asker.name,
      askedAt: importWithdrawal.askedAt,
      agreedById: importWithdrawal.agreedBy,
      agreedBy: agreer.name,
      agreedAt: importWithdrawal.agreedAt,
      closedBy: closer.name,
      closedAt: importWithdrawal.closedAt,
      refusal: importWithdrawal.refusal,
    })
    .from(importWithdrawal)
    .innerJoin(asker, eq(asker.id, importWithdrawal.askedBy))
    .leftJoin(agreer, eq(agreer.id, importWithdrawal.agreedBy))
    .leftJoin(closer, eq(closer.id, importWithdrawal.closedBy))
    .where(eq(importWithdrawal.importId, importId))
    .orderBy(desc(importWithdrawal.id))
}

/** The open wish about an import; null when nobody has asked, or all has been decided. */
export async function findOpenWish(db: DbOrTx, importId: number): Promise<WishRow | null> {
  const wishes = await listWishes(db, importId)
  return wishes.find(({ state }) => state === 'asked' || state === 'agreed') ?? null
}

/** Writes a wish down. A second open one for the same import breaks the unique key. */
export async function insertWish(
  tx: DbOrTx,
  wish: { importId: number; reason: string; askedBy: number; askedAt: Date },
): Promise<void> {
  await tx.insert(importWithdrawal).values({ ...wish, openImportId: wish.importId, state: 'asked' })
}

/** Changes an open wish. */
export async function updateWish(
  tx: DbOrTx,
  wishId: number,
  set: Partial<typeof importWithdrawal.$inferInsert>,
): Promise<void> {
  await tx.update(importWithdrawal).set(set).where(eq(importWithdrawal.id, wishId))
}

/** Imports about which a wish is open, with how far it is. */
export async function listOpenWishes(db: DbOrTx): Promise<Map<number, WithdrawalState>> {
  const rows = await db
    .select({ importId: importWithdrawal.openImportId, state: importWithdrawal.state })
    .from(importWithdrawal)
    .where(isNotNull(importWithdrawal.openImportId))
  return new Map(
    rows.flatMap(({ importId, state }) => (importId === null ? [] : [[importId, state] as const])),
  )
}
