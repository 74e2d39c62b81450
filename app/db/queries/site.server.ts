import type { DbOrTx } from '../client.server.ts'
import { site } from '../schema/index.ts'

export interface Site {
  id: number
  code: string
  name: string
  timeZone: string
  ambientC: number
}

/** The site's own facts, or null before anything has been set up. */
export async function findSite(db: DbOrTx): Promise<Site | null> {
  const rows = await db
    .select({
      id: site.id,
      code: site.code,
      name: site.name,
      timeZone: site.timeZone,
      ambientC: site.ambientC,
    })
    .from(site)
    .limit(1)
  return rows[0] ?? null
}
