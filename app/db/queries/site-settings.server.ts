import { desc, eq } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { person, siteSetting } from '../schema/index.ts'

export interface SettingRow {
  id: number
  value: unknown
  by: string | null
  at: Date
  reason: string
}

/** Rows of a setting, the newest first: that one holds. */
export async function listSettings(db: DbOrTx, key: string, limit: number): Promise<SettingRow[]> {
  return db
    .select({
      id: siteSetting.id,
      value: siteSetting.value,
      by: person.name,
      at: siteSetting.setAt,
      reason: siteSetting.reason,
    })
    .from(siteSetting)
    .leftJoin(person, eq(person.id, siteSetting.setBy))
    .where(eq(siteSetting.settingKey, key))
    .orderBy(desc(siteSetting.id))
    .limit(limit)
}

/** What holds; null where nobody has set it. With `lock` a second one that sets it waits for the first. */
export async function newestSetting(
  db: DbOrTx,
  key: string,
  options: { lock?: boolean } = {},
): Promise<{ id: number; value: unknown } | null> {
  const query = db
    .select({ id: siteSetting.id, value: siteSetting.value })
    .from(siteSetting)
    .where(eq(siteSetting.settingKey, key))
    .orderBy(desc(siteSetting.id))
    .limit(1)
  const rows = await (options.lock === true ? query.for('update') : query)
  return rows[0] ?? null
}

/** Sets a setting. @returns the row's id */
export async function insertSetting(tx: DbOrTx, row: typeof siteSetting.$inferInsert): Promise<number> {
  const [result] = await tx.insert(siteSetting).values(row)
  return result.insertId
}
