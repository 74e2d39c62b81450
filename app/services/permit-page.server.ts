/** One permit as its page shows it: where it stands, what it says, what is in its way, and what this reader may do. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listCompetences } from '../db/queries/competences.server.ts'
import { listPeople } from '../db/queries/people.server.ts'
import {
  findPermit,
  findPermitVersion,
  listPermitActs,
  type PermitActRow,
  type PermitRow,
} from '../db/queries/permits.server.ts'
import { listSegments } from '../db/queries/segments.server.ts'
import { type Actor, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { HazardView } from '../domain/hazards.ts'
import { instantText } from '../domain/instant-text.ts'
import { type Checklist, permitChecklist } from '../domain/permit-checklist.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import type { PermitContent } from '../domain/permit-content.ts'
import { type PermitDifference, type PermitWording, permitDifferences } from '../domain/permit-differences.ts'
import type { ConflictFact, HeatingFact, PermitActor, PermitFacts } from '../domain/permit-facts.ts'
import { OFFERED_ACTS, type OfferedAct, offeredReasons } from '../domain/permit-offers.ts'
import { hasApproved, namedHolders } from '../domain/permit-people.ts'
import { type PermitStage, permitStages } from '../domain/permit-progress.ts'
import { permitStory, type StoryEvent } from '../domain/permit-story.ts'
import { COMPETENCE_LABELS, type CompetenceKind, type PermitState } from '../domain/permit-words.ts'
import { PERMIT_RULES } from '../domain/permits.ts'
import type { SegmentState } from '../domain/segment-states.ts'
import { type PointLine, readPointTable } from './isolation-points.server.ts'
import { readExclusion } from './permit-conflicts.server.ts'
import { officersApart, permitActor, readPermitFacts } from './permit-facts.server.ts'
import { readHazards } from './permit-hazards.server.ts'
import { readTestTable, type TestLine } from './permit-tests.server.ts'
import { readDangers, type SafetyEventRow } from './safety-events.server.ts'
import { getSite } from './site.server.ts'

/** An act that this reader may open the form of. */
export interface ActOffer {
  act: OfferedAct
  /** What stands in its way as things are; empty where nothing does. */
  reasons: string[]
  signed: boolean
  reasonAsked: boolean
}

export interface PermitPerson {
  role: string
  name: string
  /** Competences that the role rests on, as they were entered. */
  competences: { label: string; number: string; endsAt: Date | null; endsInside: boolean }[]
}

export interface PermitPageData {
  number: string
  shortCode: string
  /** As time has made it, written down or not. */
  state: PermitState
  revision: number
  version: number
  approvedVersion: number | null
  /** Whether the version that is shown is the one that was approved. */
  approvedIsShown: boolean
  content: PermitContent
  along: { tag: string; lineCode: string; startM: number; endM: number; state: SegmentState }[]
  createdBy: string
  createdAt: Date
  requestedBy: string | null
  requestedAt: Date | null
  approvedBy: string | null
  approvedAt: Date | null
  holder: { id: number; name: string } | null
  windowFrom: Date | null
  windowTo: Date | null
  currentUntil: Date | null
  extensions: number
  extendedHours: number
  stages: PermitStage[]
  checklist: Checklist | null
  conflicts: ConflictFact[]
  /** Metres of tunnel that nobody enters beyond both ends. */
  exclusion: { westM: number; eastM: number }
  hazards: HazardView[]
  heating: HeatingFact
  points: PointLine[]
  tests: TestLine[]
  locksOut: string[]
  dangers: SafetyEventRow[]
  people: PermitPerson[]
  /** Against the version that was approved last; empty where that is the one shown. */
  differences: PermitDifference[]
  offers: ActOffer[]
  /** Whom the permit waits for, in a sentence; empty once it has ended. */
  waitsFor: string
  /** The last few things done, newest first. */
  recent: { text: string; at: Date }[]
  may: { edit: boolean; rule: boolean; heating: boolean; site: boolean }
}

/** Acts shown beside the page; the rest is in its story. */
const RECENT = 6

/** Everything on a permit's page at an instant. @throws DomainError not-found */
export async function readPermitPage(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
): Promise<PermitPageData> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  const [facts, site, segments, people, acts, hazards, points, tests, dangers, me] = await Promise.all([
    readPermitFacts(db, permit, now),
    getSite(db),
    listSegments(db, now),
    listPeople(db),
    listPermitActs(db, permit.id),
    readHazards(db, permit, now),
    readPointTable(db, permit),
    readTestTable(db, permit, now),
    readDangers(db, number),
    permitActor(db, actor, now),
  ])
  const names = new Map(people.map(({ id, name }) => [id, name]))
  const nameOf = (id: number) => names.get(id) ?? `person ${id}`
  const { state, due } = stateAsOf(permit, now)
  const holderId = permit.holderId ?? permit.content.holderId
  const ways = due === null ? acts : [...acts, { toState: due.toState, at: due.at }]
  return {
    ...standing(permit),
    state,
    content: permit.content,
    along: segments.map(({ tag, lineCode, startM, endM, state: each }) => ({
      tag,
      lineCode,
      startM,
      endM,
      state: each,
    })),
    holder: holderId === null ? null : { id: holderId, name: nameOf(holderId) },
    currentUntil: state === 'issued' || state === 'suspended' ? permit.currentUntil : null,
    stages: permitStages(state, ways),
    checklist: permitChecklist(facts, now),
    conflicts: [...facts.conflicts],
    exclusion: await readExclusion(db, permit, now),
    hazards,
    heating: facts.heating,
    points,
    tests,
    locksOut: [...facts.locksOut],
    dangers,
    people: await peopleOf(db, permit, nameOf),
    differences: await differencesOf(db, permit, {
      person: nameOf,
      time: (iso) => instantText(new Date(iso), site.timeZone),
    }),
    offers: offersOf(facts, me, now),
    waitsFor: await waitsForWhom(db, facts, state, nameOf, now),
    recent: recentLines(acts),
    may: {
      edit: may(actor, 'permit:draft') && EDITABLE.includes(state),
      rule: may(actor, 'permit:approve'),
      heating: may(actor, 'heating:state'),
      site: may(actor, 'permit:test') || may(actor, 'permit:lock'),
    },
  }
}

export interface StopPageData {
  number: string
  segments: readonly string[]
  state: PermitState
  revision: number
}

/** As much of a permit as somebody needs who may stop work on it and nothing else. @throws DomainError not-found */
export async function readStopPage(db: DbOrTx, now: Date, number: string): Promise<StopPageData> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  const { content, revision } = permit
  return { number, segments: content.segments, state: stateAsOf(permit, now).state, revision }
}

const EDITABLE: readonly PermitState[] = ['draft', 'returned', 'approved', 'suspended']

function standing(permit: PermitRow) {
  const { number, shortCode, revision, version, approvedVersion, windowFrom, windowTo } = permit
  return {
    number,
    shortCode,
    revision,
    version,
    approvedVersion,
    approvedIsShown: approvedVersion === version,
    createdBy: permit.createdByName,
    createdAt: permit.createdAt,
    requestedBy: permit.requestedByName,
    requestedAt: permit.requestedAt,
    approvedBy: permit.approvedByName,
    approvedAt: permit.approvedAt,
    windowFrom,
    windowTo,
    extensions: permit.extensions,
    extendedHours: permit.extendedHours,
  }
}

/** The newest acts, each in the sentence that the story tells it in. */
function recentLines(acts: readonly PermitActRow[]): { text: string; at: Date }[] {
  const events = acts
    .slice(-RECENT)
    .map((act): StoryEvent => ({ ...act, kind: 'act', who: act.personName, details: [], differences: [] }))
  return permitStory(events)
    .map(({ text, at }) => ({ text, at }))
    .reverse()
}

function offersOf(facts: PermitFacts, me: PermitActor, now: Date): ActOffer[] {
  return OFFERED_ACTS.flatMap((act) => {
    const reasons = offeredReasons(facts, me, act, now)
    if (reasons === null) return []
    const { signed, reason } = PERMIT_RULES[act]
    return [{ act, reasons, signed, reasonAsked: reason !== null }]
  })
}

/** What the permit says now against what was approved last. */
async function differencesOf(
  db: DbOrTx,
  permit: PermitRow,
  wording: PermitWording,
): Promise<PermitDifference[]> {
  if (permit.approvedVersion === null || permit.approvedVersion === permit.version) return []
  const approved = await findPermitVersion(db, permit.id, permit.approvedVersion)
  return approved === null ? [] : permitDifferences(approved, permit.content, wording)
}

const ROLES_WITH: readonly [string, CompetenceKind | null, (content: PermitContent) => (number | null)[]][] =
  [
    ['Holder', 'permit-holder', ({ holderId }) => [holderId]],
    ['Deputy', 'permit-holder', ({ deputyIds }) => deputyIds],
    ['Isolating person', 'isolation', ({ isolatingPersonId }) => [isolatingPersonId]],
    ['Electrician', 'electrician-licence', ({ electricianId }) => [electricianId]],
    ['Attendant', 'attendant', ({ attendantId }) => [attendantId]],
    ['Crew', null, ({ crewIds }) => crewIds],
  ]

/** People that the permit names, each with the competence that their part in it rests on. */
async function peopleOf(
  db: DbOrTx,
  { content, windowTo }: PermitRow,
  nameOf: (id: number) => string,
): Promise<PermitPerson[]> {
  const named = ROLES_WITH.flatMap(([role, kind, idsOf]) =>
    idsOf(content).flatMap((id) => (id === null ? [] : [{ role, kind, id }])),
  )
  if (named.length === 0) return []
  const all = await listCompetences(db, { personIds: named.map(({ id }) => id) })
  return named.map(({ role, kind, id }) => ({
    role,
    name: nameOf(id),
    competences: all
      .filter((one) => one.personId === id && one.kind === kind)
      .map(({ kind: own, number, endsAt }) => ({
        label: COMPETENCE_LABELS[own],
        number,
        endsAt,
        endsInside: endsAt !== null && windowTo !== null && endsAt < windowTo,
      })),
  }))
}

/** Whom a permit waits for, by name where names are fixed, in a sentence. */
async function waitsForWhom(
  db: DbOrTx,
  facts: PermitFacts,
  state: PermitState,
  nameOf: (id: number) => string,
  now: Date,
): Promise<string> {
  const { permit } = facts
  const named = namedHolders(facts)
    .filter((id) => !hasApproved(facts, id))
    .map(nameOf)
  switch (state) {
    case 'draft':
      return 'It is being prepared; nobody has asked for it yet.'
    case 'returned':
      return `It waits for a change by ${nameOf(permit.requestedBy ?? permit.createdBy)} or another technician or engineer.`
    case 'requested':
      return `It waits for a safety officer who has had no part in it: ${listed(await officersApart(db, facts, now)) || 'nobody at present'}.`
    case 'approved':
      return `It waits to be accepted on site by ${listed(named) || 'a holder; none is named'}.`
    case 'issued':
      return `It is revalidated on site by ${listed(named)}.`
    case 'suspended':
      return 'Work stands still. Only a safety officer lets it go on, after the site has been checked again.'
    case 'expired':
      return `It can never be live again. It waits to be handed back by ${listed(named)}.`
    case 'handed-back':
      return 'It waits for a safety officer to inspect the site.'
    default:
      return ''
  }
}

function listed(names: readonly string[]): string {
  return names.length < 2 ? (names[0] ?? '') : `${names.slice(0, -1).join(', ')} or ${names.at(-1)}`
}
