/**
 * Events that people have to be told of at once: dangerous combinations of permit, heat and tests. Found by the worker
 * every minute and at every act that may cause or end one. An event is never taken back: it ends when its cause is
 * gone, and an officer who lets it go on says why, which leaves it standing.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { findSegments, listSegmentsSaidHeated } from '../db/queries/heating.server.ts'
import { findPermit, listPermits, lockPermit, type PermitRow } from '../db/queries/permits.server.ts'
import { setHeld } from '../db/queries/retention.server.ts'
import {
  endSafetyEvent,
  findSafetyEvent,
  insertSafetyEvent,
  lastEnd,
  listSafetyEvents,
  listSegmentsWithOpenEvent,
  listWatchedPermits,
  lockOpenEvents,
  lockSegment,
  type SafetyEventRow,
  stateBegan,
  tolerateSafetyEvent,
} from '../db/queries/safety-events.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import { ENDED_PERMIT_STATES, type PermitState } from '../domain/permit-words.ts'
import {
  bySeriousness,
  canBeTolerated,
  type DangerFacts,
  dangersOf,
  HEATED_KINDS,
  occurrenceKey,
  SAFETY_EVENT_LABELS,
  settleEvents,
} from '../domain/safety-events.ts'
import { readHeating } from './heating.server.ts'
import { readTests } from './permit-tests.server.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'
import { instantWriter } from './site.server.ts'

export { reportOxygen } from './bay-closures.server.ts'
export type { SafetyEventRow }

/** Looks at one permit: begins the events that are due and ends those whose cause is gone. */
export async function noteDangers(inside: DbOrTx, number: string, now: Date): Promise<void> {
  const permit = await lockPermit(inside, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  const segments = await findSegments(inside, permit.content.segments)
  const { state, due } = stateAsOf(permit, now)
  const { currentUntil, windowTo } = permit
  const facts: DangerFacts = {
    number,
    segments: permit.content.segments,
    state,
    stateSince: due?.at ?? (await stateBegan(inside, permit.id)) ?? permit.createdAt,
    revalidationMissed: currentUntil !== null && windowTo !== null && currentUntil < windowTo,
    coveredByOther: await coveredByOther(inside, permit, state, now),
    heating: await readHeating(inside, permit.content.segments, now, formerSupply(permit)),
    tests: state === 'issued' ? await readTests(inside, permit, now) : [],
  }
  await settle(inside, { permitId: permit.id }, segments[0]?.id ?? null, facts, now)
}

/** The set of a permit that was live and has ended: what it began has to be seen to its end. */
function formerSupply({ state, currentUntil, content }: PermitRow): string | null {
  return ENDED_PERMIT_STATES.includes(state) && currentUntil !== null ? content.supply : null
}

/** Whether other permits answer for every segment of this one: they are live, or have an event of their own. */
async function coveredByOther(
  inside: DbOrTx,
  permit: PermitRow,
  own: PermitState,
  now: Date,
): Promise<boolean> {
  const stopped = own === 'suspended' || own === 'expired'
  const answering: readonly PermitState[] = stopped ? ['issued'] : ['issued', 'suspended', 'expired']
  const others = await listPermits(inside, { states: answering })
  const covered = new Set(
    others
      .filter((other) => other.id !== permit.id && answering.includes(stateAsOf(other, now).state))
      .flatMap(({ content }) => content.segments),
  )
  const { segments } = permit.content
  return segments.length > 0 && segments.every((tag) => covered.has(tag))
}

/** Looks at a segment that no permit under way answers for. */
async function noteDangersBeside(
  inside: DbOrTx,
  segment: { id: number; tag: string },
  now: Date,
): Promise<void> {
  await lockSegment(inside, segment.id)
  const heating = await readHeating(inside, [segment.tag], now)
  const facts: DangerFacts = {
    number: null,
    segments: [segment.tag],
    state: 'draft',
    stateSince: new Date(0),
    revalidationMissed: false,
    coveredByOther: false,
    heating,
    tests: [],
  }
  await settle(inside, { segmentId: segment.id }, segment.id, facts, now)
}

async function settle(
  inside: DbOrTx,
  of: { permitId: number } | { segmentId: number },
  segmentId: number | null,
  facts: DangerFacts,
  now: Date,
): Promise<void> {
  const when = await instantWriter(inside)
  const open = await lockOpenEvents(inside, of)
  const { begin, end } = settleEvents(facts, open, dangersOf(facts, now, when))
  for (const { id, why } of end) await endSafetyEvent(inside, id, { at: now, by: null, reason: why })
  for (const danger of begin) {
    // Heat that was known to be off in between, or covered, is another occurrence and begins after it.
    const before = HEATED_KINDS.some((kind) => kind === danger.kind)
      ? await lastEnd(inside, of, danger.kind)
      : null
    const startedAt = before !== null && before > danger.startedAt ? before : danger.startedAt
    await insertSafetyEvent(inside, {
      kind: danger.kind,
      permitId: 'permitId' in of ? of.permitId : null,
      segmentId,
      occurrenceKey: occurrenceKey(facts.number ?? facts.segments.join('+'), { ...danger, startedAt }),
      startedAt,
      noticedAt: now,
      text: danger.text.slice(0, 1000),
    })
    // Heat without a live permit is an incident: what belongs to it stays until an officer releases it.
    if (facts.number !== null && HEATED_KINDS.some((kind) => kind === danger.kind)) {
      await setHeld(inside, facts.number, { held: true, reason: danger.text })
    }
  }
}

/** Looks at segments: at every permit under way on them, and at those that have none. */
export async function noteDangersAtSegments(
  inside: DbOrTx,
  tags: readonly string[],
  now: Date,
): Promise<void> {
  const segments = await findSegments(inside, tags)
  const segmentIds = segments.map(({ id }) => id)
  const numbers = await listWatchedPermits(inside, { segmentIds, ended: ENDED_PERMIT_STATES })
  for (const number of numbers) await noteDangers(inside, number, now)
  for (const segment of segments) await noteBeside(inside, segment, now)
}

async function noteBeside(inside: DbOrTx, segment: { id: number; tag: string }, now: Date): Promise<void> {
  const permits = await listPermits(inside, { segmentIds: [segment.id] })
  const underWay = permits.some(({ state }) => !ENDED_PERMIT_STATES.includes(state))
  const [open] = await listSafetyEvents(inside, { segmentIds: [segment.id], limit: 1 })
  // Where a permit answers for the heat, its own event says so; one that began before that permit is still ended here.
  if (underWay && open?.permit !== null) return
  if (!underWay || open?.permit === null) await noteDangersBeside(inside, segment, now)
}

/** Looks at every permit and segment that may have or end a danger, each in a transaction of its own. */
export async function watchDangers(db: Db, now: Date): Promise<number> {
  const numbers = await listWatchedPermits(db, { ended: ENDED_PERMIT_STATES })
  for (const number of numbers) await tx(db, (inside) => noteDangers(inside, number, now))
  const said = await listSegmentsSaidHeated(db)
  const open = await listSegmentsWithOpenEvent(db)
  const segments = new Map([...said, ...open].map((segment) => [segment.id, segment]))
  for (const segment of segments.values()) await tx(db, (inside) => noteBeside(inside, segment, now))
  return numbers.length
}

/** Events that stand open for a permit and its segments, the most serious first. */
export async function readDangers(db: DbOrTx, number: string): Promise<SafetyEventRow[]> {
  const permit = await findPermit(db, number)
  if (permit === null) return []
  const segments = await findSegments(db, permit.content.segments)
  const rows = await listSafetyEvents(db, {
    permitIds: [permit.id],
    segmentIds: segments.map(({ id }) => id),
  })
  return sorted(rows)
}

/** Events that stand open at segments, the most serious first. */
export async function readDangersAtSegments(
  db: DbOrTx,
  segmentIds: readonly number[],
): Promise<SafetyEventRow[]> {
  return sorted(await listSafetyEvents(db, { segmentIds }))
}

/** Every open event of the site, the most serious first; and what ended since an instant, if asked, the newest first. */
export async function readAllDangers(
  db: DbOrTx,
  since?: Date,
): Promise<{ open: SafetyEventRow[]; ended: SafetyEventRow[] }> {
  const rows = await listSafetyEvents(db, since === undefined ? {} : { since })
  return {
    open: sorted(rows.filter(({ endedAt }) => endedAt === null)),
    ended: rows.filter(({ endedAt }) => endedAt !== null),
  }
}

function sorted(rows: readonly SafetyEventRow[]): SafetyEventRow[] {
  return [...rows].sort(
    (a, b) => bySeriousness(a.kind, b.kind) || a.startedAt.getTime() - b.startedAt.getTime(),
  )
}

/**
 * An officer writes why the heat goes on, signed. The event stays open and is shown on.
 *
 * @throws DomainError forbidden, not-found, conflict (it has ended meanwhile, or is of another kind), signature-refused
 */
export async function tolerateDanger(
  db: Db,
  actor: Actor,
  now: Date,
  id: number,
  form: { reason: string; password: string },
): Promise<void> {
  demand(actor, 'permit:approve')
  const event = await findSafetyEvent(db, id)
  if (event === null) throw new DomainError('not-found', 'There is no such event.')
  if (!canBeTolerated(event.kind)) {
    throw new DomainError(
      'conflict',
      `“${SAFETY_EVENT_LABELS[event.kind]}” cannot be let go on: it ends when its cause is gone.`,
    )
  }
  if (event.endedAt !== null) throw hasEnded()
  const subject = {
    meaning: 'let a heating go on without a live permit',
    subjectKind: 'safety-event',
    subjectId: String(id),
  }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const word = { at: now, by: actor.personId, reason: form.reason }
    if (!(await tolerateSafetyEvent(inside, id, word))) throw hasEnded()
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'danger let go on',
      subjectKind: subject.subjectKind,
      subjectId: subject.subjectId,
      before: { kind: event.kind, text: event.text, toleratedReason: event.toleratedReason },
      after: { toleratedReason: form.reason },
      reason: form.reason,
      signedActId: act.id,
    })
  })
}

function hasEnded(): DomainError {
  return new DomainError('conflict', 'This has ended meanwhile; there is nothing left to let go on.')
}
