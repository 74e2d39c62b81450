/**
 * What has been computed from readings, and whether it still holds. A curve, an alert or a report says what it rests on
 * before it is computed; when readings are withdrawn or corrected, everything that rests on them is marked as out of
 * date, with the reason, until it is computed again. Nothing is deleted.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type DerivedRow,
  findDerived,
  listCurrentResting,
  listStale,
  markStale,
  replaceBasis,
  type Stretch,
  upsertDerived,
} from '../db/queries/derived.server.ts'
import { tx } from '../db/transaction.server.ts'

/** As many stretches as go into one statement. */
const BATCH = 200

export type { DerivedRow, Stretch }

/**
 * Says that a thing is about to be computed from these stretches, and makes it current. Call this before the readings
 * are read: a correction that arrives in between then marks the thing, instead of slipping past it.
 */
export async function beginDerived(
  db: Db,
  thing: { kind: string; subjectId: string; madeAt: Date; basis: readonly Stretch[] },
): Promise<void> {
  await tx(db, async (inside) => {
    const id = await upsertDerived(inside, thing.kind, thing.subjectId, thing.madeAt)
    await replaceBasis(inside, id, joined(thing.basis))
  })
}

/** Stretches of one channel that overlap or touch become one. */
function joined(stretches: readonly Stretch[]): Stretch[] {
  const sorted = stretches.toSorted(
    (a, b) => a.channelId - b.channelId || a.from.getTime() - b.from.getTime(),
  )
  const whole: Stretch[] = []
  for (const stretch of sorted) {
    const last = whole.at(-1)
    if (last !== undefined && last.channelId === stretch.channelId && stretch.from <= last.to) {
      if (stretch.to > last.to) whole[whole.length - 1] = { ...last, to: stretch.to }
    } else {
      whole.push(stretch)
    }
  }
  return whole
}

/**
 * Marks what rests on these stretches as out of date, inside the transaction that changes the readings. Something
 * already marked keeps its first date and reason.
 *
 * @returns what was marked now, so that the effect of the change can be shown
 */
export async function markOutOfDate(
  inside: DbOrTx,
  change: { stretches: readonly Stretch[]; now: Date; reason: string },
): Promise<DerivedRow[]> {
  const marked: DerivedRow[] = []
  for (let start = 0; start < change.stretches.length; start += BATCH) {
    const found = await listCurrentResting(inside, change.stretches.slice(start, start + BATCH))
    await markStale(
      inside,
      found.map(({ id }) => id),
      change.now,
      change.reason.slice(0, 500),
    )
    marked.push(...found)
  }
  return marked
}

/** Whether and why a thing is out of date; null when it was never computed. */
export function readDerived(db: DbOrTx, kind: string, subjectId: string): Promise<DerivedRow | null> {
  return findDerived(db, kind, subjectId)
}

/** What is out of date, longest ago first; of one kind or of all. */
export function listOutOfDate(db: DbOrTx, kind?: string): Promise<DerivedRow[]> {
  return listStale(db, kind)
}
