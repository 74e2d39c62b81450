import { eq, like, sql } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { permit, site } from '../schema/index.ts'

/**
 * The highest running number among permits whose number begins with this, or 0. Holds the site's row for the rest of
 * the transaction: of two who ask for the next number at once, the second waits and then sees the first one's.
 */
export async function lockHighestNumber(tx: DbOrTx, siteId: number, prefix: string): Promise<number> {
  await tx.select({ id: site.id }).from(site).where(eq(site.id, siteId)).for('update')
  const running = sql<number | null>`MAX(CAST(SUBSTRING(${permit.number}, ${prefix.length + 1}) AS UNSIGNED))`
  const rows = await tx
    .select({ highest: running.mapWith(Number) })
    .from(permit)
    .where(like(permit.number, `${prefix}%`))
  return rows[0]?.highest ?? 0
}

/** Whether a short code is taken already. */
export async function hasShortCode(tx: DbOrTx, shortCode: string): Promise<boolean> {
  const rows = await tx.select({ id: permit.id }).from(permit).where(eq(permit.shortCode, shortCode))
  return rows.length > 0
}
