import { and, eq, isNull } from 'drizzle-orm'
import type { SegmentState } from '../../domain/segment-states.ts'
import type { DbOrTx } from '../client.server.ts'
import { person, segment, segmentState } from '../schema/index.ts'

/** Locks a segment's row until the transaction ends; null when there is none with this tag. */
export async function lockSegment(tx: DbOrTx, tag: string): Promise<{ id: number } | null> {
  const rows = await tx.select({ id: segment.id }).from(segment).where(eq(segment.tag, tag)).for('update')
  return rows[0] ?? null
}

/** The state a segment is in, or null when none was ever set. */
export async function openState(
  tx: DbOrTx,
  segmentId: number,
): Promise<{ id: number; state: SegmentState; since: Date; setBy: string } | null> {
  const rows = await tx
    .select({ id: segmentState.id, state: segmentState.state, since: segmentState.since, setBy: person.name })
    .from(segmentState)
    .innerJoin(person, eq(person.id, segmentState.setBy))
    .where(and(eq(segmentState.segmentId, segmentId), isNull(segmentState.endedAt)))
  return rows[0] ?? null
}

export async function closeState(tx: DbOrTx, stateId: number, endedAt: Date): Promise<void> {
  await tx.update(segmentState).set({ endedAt }).where(eq(segmentState.id, stateId))
}

export async function insertState(tx: DbOrTx, row: typeof segmentState.$inferInsert): Promise<void> {
  await tx.insert(segmentState).values(row)
}
