import { sql } from 'drizzle-orm'
import type { Db } from '../db/client.server.ts'

/** Whether the database answers. */
export async function isHealthy(db: Db): Promise<boolean> {
  try {
    await db.execute(sql`SELECT 1`)
    return true
  } catch {
    // The caller asks for a yes or no; the reason is logged where a real request meets it.
    return false
  }
}
