import { and, asc, eq, gte, inArray, isNotNull, isNull, lte, or } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { derivedBasis, derivedThing } from '../schema/index.ts'

export interface Stretch {
  channelId: number
  from: Date
  to: Date
}

export interface DerivedRow {
  id: number
  kind: string
  subjectId: string
  madeAt: Date
  staleSince: Date | null
  staleReason: string | null
}

/** A derived thing's row, made anew or made current again; its id. */
export async function upsertDerived(
  tx: DbOrTx,
  kind: string,
  subjectId: string,
  madeAt: Date,
): Promise<number> {
  await tx
    .insert(derivedThing)
    .values({ kind, subjectId, madeAt })
    .onDuplicateKeyUpdate({ set: { madeAt, staleSince: null, staleReason: null } })
  const row = await findDerived(tx, kind, subjectId)
  if (row === null)
    throw new Error(`The derived ${kind} ${subjectId} was not there after it had been written.`)
  return row.id
}

export async function replaceBasis(
  tx: DbOrTx,
  derivedId: number,
  stretches: readonly Stretch[],
): Promise<void> {
  await tx.delete(derivedBasis).where(eq(derivedBasis.derivedId, derivedId))
  if (stretches.length === 0) return
  await tx
    .insert(derivedBasis)
    .values(stretches.map(({ channelId, from, to }) => ({ derivedId, channelId, fromAt: from, toAt: to })))
}

export async function findDerived(db: DbOrTx, kind: string, subjectId: string): Promise<DerivedRow | null> {
  const rows = await db
    .select()
    .from(derivedThing)
    .where(and(eq(derivedThing.kind, kind), eq(derivedThing.subjectId, subjectId)))
  return rows[0] ?? null
}

/** Things still current that rest on any of the stretches, ends included. */
export async function listCurrentResting(tx: DbOrTx, stretches: readonly Stretch[]): Promise<DerivedRow[]> {
  if (stretches.length === 0) return []
  const touched = stretches.map(({ channelId, from, to }) =>
    and(eq(derivedBasis.channelId, channelId), lte(derivedBasis.fromAt, to), gte(derivedBasis.toAt, from)),
  )
  return tx
    .selectDistinct({
      id: derivedThing.id,
      kind: derivedThing.kind,
      subjectId: derivedThing.subjectId,
      madeAt: derivedThing.madeAt,
      staleSince: derivedThing.staleSince,
      staleReason: derivedThing.staleReason,
    })
    .from(derivedThing)
    .innerJoin(derivedBasis, eq(derivedBasis.derivedId, derivedThing.id))
    .where(and(isNull(derivedThing.staleSince), or(...touched)))
    .orderBy(asc(derivedThing.id))
}

export async function markStale(
  tx: DbOrTx,
  ids: readonly number[],
  staleSince: Date,
  staleReason: string,
): Promise<void> {
  if (ids.length === 0) return
  await tx
    .update(derivedThing)
    .set({ staleSince, staleReason })
    .where(and(inArray(derivedThing.id, [...ids]), isNull(derivedThing.staleSince)))
}

/** Things marked out of date, longest ago first. */
export async function listStale(db: DbOrTx, kind?: string): Promise<DerivedRow[]> {
  return db
    .select()
    .from(derivedThing)
    .where(
      and(isNotNull(derivedThing.staleSince), kind === undefined ? undefined : eq(derivedThing.kind, kind)),
    )
    .orderBy(asc(derivedThing.staleSince), asc(derivedThing.id))
}
