import type { DbOrTx } from '../db/client.server.ts'
import { findSite, type Site } from '../db/queries/site.server.ts'
import { DomainError } from '../domain/errors.ts'
import { instantText } from '../domain/instant-text.ts'

/** The site's own facts; an empty database is a set-up fault and is said as one. */
export async function getSite(db: DbOrTx): Promise<Site> {
  const found = await findSite(db)
  if (found !== null) return found
  throw new DomainError(
    'unavailable',
    'The register is empty: seed it first (npm start does so for the demo).',
  )
}

/** How this site writes an instant inside a sentence: in its own time, with the offset. */
export async function instantWriter(db: DbOrTx): Promise<(at: Date) => string> {
  const { timeZone } = await getSite(db)
  return (at) => instantText(at, timeZone)
}
