/** What a source delivered before, for the questions about its next file, and the profile that its answers make. */
import { and, desc, eq, isNotNull, lt } from 'drizzle-orm'
import type { SourceProfile } from '../../domain/schemas/source-profile.ts'
import type { DbOrTx } from '../client.server.ts'
import { importFile, source } from '../schema/index.ts'

/** Last instant of the newest file of a source that had been taken in when another one came. */
export async function previousEnd(db: DbOrTx, sourceId: number, before: Date): Promise<Date | null> {
  const [row] = await db
    .select({ lastAt: importFile.lastAt })
    .from(importFile)
    .where(
      and(
        eq(importFile.sourceId, sourceId),
        eq(importFile.state, 'accepted'),
        eq(importFile.arrival, 'file'),
        lt(importFile.uploadedAt, before),
        isNotNull(importFile.lastAt),
      ),
    )
    .orderBy(desc(importFile.lastAt))
    .limit(1)
  return row?.lastAt ?? null
}

/** Stores the next version of a source's profile. */
export async function saveProfile(tx: DbOrTx, sourceId: number, profile: SourceProfile): Promise<void> {
  await tx.update(source).set({ profile, profileVersion: profile.version }).where(eq(source.id, sourceId))
}
