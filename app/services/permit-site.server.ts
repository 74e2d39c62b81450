/** What the tablet pages of a permit show: the segment at a glance, its locks, its tests, its rounds. */
import type { Db } from '../db/client.server.ts'
import { type BoxRow, listBoxRows } from '../db/queries/isolation-points.server.ts'
import {
  listPermitRounds,
  listPermitTests,
  type PermitRoundRow,
  type PermitTestRow,
} from '../db/queries/permit-tests.server.ts'
import { listPermitActs, listPermits, type PermitRow } from '../db/queries/permits.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { instantText } from '../domain/instant-text.ts'
import { samePoint } from '../domain/isolation-locks.ts'
import { type NextStep, nextAtSite } from '../domain/permit-at-site.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import type { HeatingFact } from '../domain/permit-facts.ts'
import type { PermitState } from '../domain/permit-words.ts'
import { readHeating } from './heating.server.ts'
import {
  type PointLine,
  permitOf,
  readLocksOut,
  readPoints,
  readPointTable,
} from './isolation-points.server.ts'
import { peopleWithoutLogIn } from './lock-people.server.ts'
import { listPermitPhotos, type PhotoRow } from './permit-photos.server.ts'
import { readTests, readTestTable, type TestLine } from './permit-tests.server.ts'
import { readDangers, type SafetyEventRow } from './safety-events.server.ts'
import { getSite } from './site.server.ts'

/** What stands at the top of every tablet page. */
export interface SiteHead {
  number: string
  title: string
  state: PermitState
  revision: number
  segments: readonly string[]
  fromM: number | null
  toM: number | null
  holder: string | null
  /** End of the current validity while it is live or suspended. */
  currentUntil: Date | null
  zone: string
  /** Who is signed in: tablets are shared. */
  actor: { personId: number; name: string }
  dangers: SafetyEventRow[]
  /** Whether this person may say that heating is on or off. */
  mayState: boolean
}

export interface SiteHubData extends SiteHead {
  next: NextStep
  points: { held: number; of: number }
  tests: { good: number; of: number; overdue: number }
  locksOut: string[]
  heating: HeatingFact
  /** The last check of barriers and signs, and whether it is from after the approval or suspension. */
  check: { by: string | null; at: Date; counts: boolean } | null
  lastRound: PermitRoundRow | null
  photos: PhotoRow[]
  may: { check: boolean; test: boolean }
}

async function headOf(db: Db, actor: Actor, now: Date, permit: PermitRow): Promise<SiteHead> {
  const [site, dangers] = await Promise.all([getSite(db), readDangers(db, permit.number)])
  const { state } = stateAsOf(permit, now)
  const { content } = permit
  return {
    number: permit.number,
    title: content.title,
    state,
    revision: permit.revision,
    segments: content.segments,
    fromM: content.fromM,
    toM: content.toM,
    holder: permit.holderName,
    currentUntil: state === 'issued' || state === 'suspended' ? permit.currentUntil : null,
    zone: site.timeZone,
    actor: { personId: actor.personId, name: actor.name },
    dangers,
    mayState: may(actor, 'heating:state'),
  }
}

/** The first tablet page of a permit. @throws DomainError forbidden, not-found */
export async function readSiteHub(db: Db, actor: Actor, now: Date, number: string): Promise<SiteHubData> {
  demand(actor, 'facility:view')
  const permit = await permitOf(db, number)
  const [head, points, tests, locksOut, heating, acts, rounds, photos] = await Promise.all([
    headOf(db, actor, now, permit),
    readPoints(db, permit),
    readTests(db, permit, now),
    readLocksOut(db, permit.id),
    readHeating(db, permit.content.segments, now),
    listPermitActs(db, permit.id),
    listPermitRounds(db, permit.id),
    listPermitPhotos(db, number),
  ])
  const check = acts.findLast(({ act }) => act === 'site-check')
  const since = acts.findLast(({ act }) => act === (head.state === 'suspended' ? 'suspend' : 'approve'))
  const counts = check !== undefined && since !== undefined && check.revision > since.revision
  const toHeat = new Set(
    permit.content.points.filter(({ purpose }) => purpose === 'to-heat').map(({ tag }) => tag),
  )
  const needed = points.filter(({ tag }) => toHeat.has(tag))
  const held = needed.filter(({ holds }) => holds).length
  const good = tests.filter(({ state }) => state === 'good').length
  return {
    ...head,
    next: nextAtSite({
      state: head.state,
      points: needed.length,
      held,
      tests: tests.length,
      good,
      checked: counts,
      locksOut: locksOut.length,
      until: head.currentUntil === null ? '' : instantText(head.currentUntil, head.zone),
    }),
    points: { held, of: needed.length },
    tests: {
      good,
      of: tests.length,
      overdue: tests.filter(({ state }) => state === 'overdue' || state === 'failed').length,
    },
    locksOut,
    heating,
    check: check === undefined ? null : { by: check.personName, at: check.at, counts },
    lastRound: rounds[0] ?? null,
    photos,
    may: {
      check: may(actor, 'permit:draft') || may(actor, 'permit:approve'),
      test: may(actor, 'permit:test'),
    },
  }
}

export interface SiteLocksData extends SiteHead {
  lines: PointLine[]
  box: BoxRow[]
  /** Whether a point has its key in the box. */
  boxed: boolean
  /** People for whom a witness enters a step. */
  witnessed: { personId: number; name: string }[]
  /** Permits that could take a lock over, by lock: those that list the same point. */
  takers: Record<number, { number: string; state: PermitState }[]>
  may: { lock: boolean; clear: boolean }
}

/** Locks of a permit, with what can be done at each. @throws DomainError forbidden, not-found */
export async function readSiteLocks(db: Db, actor: Actor, now: Date, number: string): Promise<SiteLocksData> {
  demand(actor, 'facility:view')
  const permit = await permitOf(db, number)
  const [head, lines, box, witnessed, others] = await Promise.all([
    headOf(db, actor, now, permit),
    readPointTable(db, permit),
    listBoxRows(db, permit.id),
    peopleWithoutLogIn(db, now),
    listPermits(db, { states: ['approved', 'issued', 'suspended'] }),
  ])
  const takers: SiteLocksData['takers'] = {}
  for (const line of lines) {
    if (line.lock === null || line.lock.removed !== null) continue
    takers[line.lock.id] = others
      .filter(
        (other) => other.number !== number && other.content.points.some((point) => samePoint(point, line)),
      )
      .map((other) => ({ number: other.number, state: stateAsOf(other, now).state }))
  }
  const boxed = permit.content.points.some((point) => point.boxed)
  return {
    ...head,
    lines,
    box,
    boxed,
    witnessed,
    takers,
    may: { lock: may(actor, 'permit:lock'), clear: may(actor, 'permit:clear-lock') },
  }
}

export interface SiteTestsData extends SiteHead {
  lines: TestLine[]
  taken: PermitTestRow[]
  witnessed: { personId: number; name: string }[]
  now: Date
  may: { test: boolean }
}

/** Tests of a permit. @throws DomainError forbidden, not-found */
export async function readSiteTests(db: Db, actor: Actor, now: Date, number: string): Promise<SiteTestsData> {
  demand(actor, 'facility:view')
  const permit = await permitOf(db, number)
  const [head, lines, taken, witnessed] = await Promise.all([
    headOf(db, actor, now, permit),
    readTestTable(db, permit, now),
    listPermitTests(db, permit.id),
    peopleWithoutLogIn(db, now),
  ])
  return { ...head, lines, taken, witnessed, now, may: { test: may(actor, 'permit:test') } }
}

export interface SiteRoundsData extends SiteHead {
  rounds: PermitRoundRow[]
  maxCelsius: number | null
  now: Date
  may: { test: boolean }
}

/** Rounds of a permit. @throws DomainError forbidden, not-found */
export async function readSiteRounds(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
): Promise<SiteRoundsData> {
  demand(actor, 'facility:view')
  const permit = await permitOf(db, number)
  const [head, rounds] = await Promise.all([headOf(db, actor, now, permit), listPermitRounds(db, permit.id)])
  const { maxCelsius } = permit.content
  return { ...head, rounds, maxCelsius, now, may: { test: may(actor, 'permit:test') } }
}
