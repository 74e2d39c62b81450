/** Deviations of bakes: those that people note, and those that the product finds in the readings by itself. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { deleteOwnDeviations, insertDeviation, listDeviations } from '../db/queries/bake-runs.server.ts'
import { listSegments, listStates, type SegmentWithState } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { deviationsOf } from '../domain/bake-deviations.ts'
import { bakesIn, type FoundBake } from '../domain/bake-history.ts'
import { DomainError } from '../domain/errors.ts'
import type { DeviationKind } from '../domain/planning.ts'
import { bucketStart, ROLLUP_LEVELS } from '../domain/rollups.ts'
import {
  findBake,
  pascalText,
  plannedCourse,
  planOf,
  readBakeSeries,
  termsOf,
} from './bake-run-data.server.ts'
import { writeRecord } from './record.server.ts'
import { getSite } from './site.server.ts'

const STEP_S = ROLLUP_LEVELS[0]

export interface NotedDeviation {
  kind: DeviationKind
  startsAt: Date
  endsAt: Date | null
  detail: string
}

/**
 * Keeps a deviation that a person saw.
 *
 * @throws DomainError forbidden, not-found, bad-input (outside the bake, or ends before it begins)
 */
export async function noteDeviation(
  db: Db,
  actor: Actor,
  now: Date,
  tag: string,
  since: number | null,
  noted: NotedDeviation,
): Promise<void> {
  demand(actor, 'bake:note')
  const { segment, bake } = await findBake(db, tag, now, since)
  const fault = (field: string, message: string) =>
    new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
      fields: { [field]: [message] },
    })
  const earliest = bake.prepFrom ?? bake.heatingFrom
  if (noted.startsAt < earliest) {
    throw fault(
      'startsAt',
      'This lies before the bake. Give the time at which it began, or write a log entry instead.',
    )
  }
  if (noted.startsAt > now) throw fault('startsAt', 'This lies in the future.')
  if (noted.endsAt !== null && noted.endsAt <= noted.startsAt) {
    throw fault('endsAt', 'The end lies before the beginning. Leave it empty while it lasts.')
  }
  const plan = await planOf(db, segment.id, bake)
  await tx(db, async (inside) => {
    await insertDeviation(inside, {
      segmentId: segment.id,
      planId: plan?.planId ?? null,
      ...noted,
      notedBy: actor.personId,
      notedAt: now,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'bake deviation noted',
      subjectKind: 'segment',
      subjectId: tag,
      effectiveAt: noted.startsAt,
      after: { kind: noted.kind, detail: noted.detail },
    })
  })
}

/**
 * Notes the deviations of every bake under way, from its readings. What the product noted before of the same bake is made
 * anew, so that running it twice, or on data that came late, leaves the same rows.
 *
 * @returns how many deviations stand for the bakes under way
 */
export async function noteOwnDeviations(db: Db, now: Date): Promise<number> {
  let count = 0
  for (const segment of await listSegments(db, now)) {
    const bake = bakesIn(await listStates(db, segment.id))[0]
    if (bake === undefined || bake.phase === 'over') continue
    count += await tx(db, (inside) => noteDeviationsOf(inside, segment, bake, now))
  }
  return count
}

/** Notes, inside a transaction, what the product finds in one bake up to an instant. */
export async function noteDeviationsOf(
  inside: DbOrTx,
  segment: SegmentWithState,
  bake: FoundBake,
  now: Date,
): Promise<number> {
  const { ambientC } = await getSite(inside)
  const plan = await planOf(inside, segment.id, bake)
  const terms = await termsOf(inside, segment.id, plan, bake.heatingFrom)
  if (terms === null) return 0
  const { steps } = await readBakeSeries(
    inside,
    segment,
    {
      from: new Date(bucketStart(bake.heatingFrom.getTime(), STEP_S)),
      to: new Date(Math.min(now.getTime(), bake.coolingFrom?.getTime() ?? now.getTime()) + 1),
      stepSeconds: STEP_S,
    },
    plan?.content.supply ?? null,
  )
  const found = deviationsOf(steps, plannedCourse(bake, terms, ambientC), terms, pascalText)
  const before = await listDeviations(inside, segment.id, bake.heatingFrom, new Date(now.getTime() + 1))
  const known = new Map(
    before.flatMap(({ kind, startsAt, notedBy, notedAt }) =>
      notedBy === null ? [[`${kind} ${startsAt.getTime()}`, notedAt] as const] : [],
    ),
  )
  await deleteOwnDeviations(inside, segment.id, bake.heatingFrom)
  for (const one of found) {
    await insertDeviation(inside, {
      segmentId: segment.id,
      planId: plan?.planId ?? null,
      kind: one.kind,
      startsAt: new Date(one.from),
      endsAt: one.to === null ? null : new Date(one.to),
      detail: one.detail,
      notedBy: null,
      // When it was learned stays, however often it is looked at again.
      notedAt: known.get(`${one.kind} ${one.from}`) ?? now,
    })
  }
  return found.length
}
