/** Collects what the conflict rules look at: this permit, those it may meet, works, valves, limits, people, calendar. */
import type { DbOrTx } from '../db/client.server.ts'
import { listCarts, listPlans, listSupplies, type PlanRow } from '../db/queries/bake-plans.server.ts'
import { listCrews } from '../db/queries/bake-schedules.server.ts'
import { listCompetences } from '../db/queries/competences.server.ts'
import { listPeople } from '../db/queries/people.server.ts'
import {
  listBayFans,
  listGateValves,
  listHangingLocks,
  listNamedHolidays,
} from '../db/queries/permit-conflicts.server.ts'
import { listPermits, type PermitRow } from '../db/queries/permits.server.ts'
import { listPlannedWorks, type PlannedWorkRow } from '../db/queries/planned-work.server.ts'
import {
  type LimitRow,
  type LineRow,
  listLimits,
  listLines,
  listSegments,
  type SegmentWithState,
} from '../db/queries/segments.server.ts'
import type {
  ConflictFacts,
  ConflictLimits,
  ConflictPermit,
  Heat,
  NeededCompetence,
  OwnPermit,
  Place,
  WorkFact,
} from '../domain/permit-conflicts/facts.ts'
import type { CompetenceKind } from '../domain/permit-words.ts'
import { CLAIMING_PERMIT_STATES } from '../domain/permit-words.ts'
import { RosterSchema } from '../domain/schedule/rosters.ts'
import type { Joint, Stretch } from '../domain/tunnel-stretch.ts'
import { bakedSegments, contentOf } from './bake-plans-facts.server.ts'
import { getSite } from './site.server.ts'
import { limitFor } from './standing.server.ts'

type Lock = Awaited<ReturnType<typeof listHangingLocks>>[number]

interface Around {
  places: ReadonlyMap<string, { place: Place; segment: SegmentWithState }>
  plans: readonly PlanRow[]
  carts: readonly string[]
  /** Sets that send direct current through a tube; anything else that heats is a blanket. */
  supplies: readonly string[]
  names: ReadonlyMap<number, string>
  locks: readonly Lock[]
}

/** What all permits share, read once, with every permit that claims its segments. */
export interface ConflictGround {
  shared: Omit<ConflictFacts, 'own' | 'others'>
  claiming: { row: PermitRow; permit: ConflictPermit }[]
  around: Around
}

/** Reads what all permits share, as of an instant; locks of the permits given are read along. */
export async function readConflictGround(
  db: DbOrTx,
  now: Date,
  alsoOf: readonly number[] = [],
): Promise<ConflictGround> {
  const { timeZone, ambientC } = await getSite(db)
  const rows = await listPermits(db, { states: CLAIMING_PERMIT_STATES })
  const [lines, segments, plans, carts, supplies, people, locks, limits] = await Promise.all([
    listLines(db),
    listSegments(db, now),
    listPlans(db),
    listCarts(db),
    listSupplies(db),
    listPeople(db),
    listHangingLocks(db, [...rows.map(({ id }) => id), ...alsoOf]),
    listLimits(db, now),
  ])
  const around: Around = {
    places: new Map(segments.map((segment) => [segment.tag, { place: placeOf(segment), segment }])),
    plans,
    carts: carts.map(({ tag }) => tag),
    supplies: supplies.map(({ tag }) => tag),
    names: new Map(people.map(({ id, name }) => [id, name])),
    locks,
  }
  const claiming: ConflictGround['claiming'] = []
  for (const row of rows) claiming.push({ row, permit: await conflictPermit(db, row, around) })
  return {
    around,
    claiming,
    shared: {
      now,
      zone: timeZone,
      ambientC,
      segments: segments.map(placeOf),
      valves: await listGateValves(db),
      joints: jointsOf(lines),
      works: (await listPlannedWorks(db, { states: ['planned', 'limited', 'started'] })).map(workFact),
      limits: limitsOf(limits),
      fans: await listBayFans(db),
      competences: (await listCompetences(db)).map(({ personId, kind, number, startsAt, endsAt }) => ({
        personId,
        kind,
        number,
        from: startsAt,
        to: endsAt,
      })),
      holidays: await listNamedHolidays(db),
      crews: (await listCrews(db)).map(({ code, roster, endsAt }) => ({
        code,
        roster: RosterSchema.parse(roster),
        endsMs: endsAt?.getTime() ?? null,
      })),
    },
  }
}

/** Everything that findConflicts looks at for one permit. */
export async function conflictFactsOf(
  db: DbOrTx,
  permit: PermitRow,
  { shared, claiming, around }: ConflictGround,
): Promise<ConflictFacts> {
  return {
    ...shared,
    own: await ownPermit(db, permit, around),
    others: claiming.filter(({ row }) => row.id !== permit.id).map((one) => one.permit),
  }
}

function placeOf({ tag, lineCode, startM, endM, state }: SegmentWithState): Place {
  return { tag, line: lineCode, fromM: startM, toM: endM, state }
}

/** Where spurs leave their lines. */
function jointsOf(lines: readonly LineRow[]): Joint[] {
  return lines.flatMap(({ code, joinsLineId, joinsAtM }) => {
    const joined = lines.find(({ id }) => id === joinsLineId)
    return joined === undefined || joinsAtM === null ? [] : [{ spur: code, line: joined.code, atM: joinsAtM }]
  })
}

/** Limits of the register as the conflict rules take them. */
export function limitsOf(limits: readonly LimitRow[]): ConflictLimits {
  const value = (kind: Parameters<typeof limitFor>[1]) => limitFor(limits, kind, null)?.value ?? null
  return {
    exclusionM: value('exclusion-length'),
    exclusionC: value('exclusion-temperature'),
    dayKW: value('power-cap-day'),
    nightKW: value('power-cap-night'),
    baseKW: value('power-base') ?? 0,
    feederKW: { west: value('feeder-west'), east: value('feeder-east') },
  }
}

/** A permit that is still written says its window in its content; later the approved or extended one counts. */
function windowOf({ state, content, windowFrom, windowTo }: PermitRow): {
  from: Date | null
  to: Date | null
} {
  const asked = {
    from: content.from === null ? null : new Date(content.from),
    to: content.to === null ? null : new Date(content.to),
  }
  if (state === 'draft' || state === 'returned') return asked
  return { from: windowFrom ?? asked.from, to: windowTo ?? asked.to }
}

async function conflictPermit(db: DbOrTx, permit: PermitRow, around: Around): Promise<ConflictPermit> {
  const { content } = permit
  const planId = content.planId ?? permit.planId
  const planRow = around.plans.find(({ id }) => id === planId)
  const plan = planRow === undefined ? null : contentOf(planRow.content)
  const found = content.segments.flatMap((tag) => around.places.get(tag) ?? [])
  const holderId = permit.holderId ?? content.holderId
  return {
    number: permit.number,
    state: permit.state,
    segments: found.map(({ place }) => place),
    ...windowOf(permit),
    maxCelsius: content.maxCelsius,
    exclusionWestM: content.exclusionWestM,
    exclusionEastM: content.exclusionEastM,
    holder:
      holderId === null ? null : { id: holderId, name: around.names.get(holderId) ?? `person ${holderId}` },
    supply: content.supply,
    cart: content.equipment.find((tag) => around.carts.includes(tag)) ?? plan?.cart ?? null,
    equipment: content.equipment,
    plan: planRow === undefined || plan === null ? null : { id: planRow.id, segments: plan.segments },
    locks: around.locks.filter(({ permitId }) => permitId === permit.id).map(({ lockNumber }) => lockNumber),
    heat: await heatOf(
      db,
      permit,
      found.map(({ segment }) => segment),
      plan,
      around.supplies,
    ),
  }
}

/** The heat that a permit asks for; null while it does not say how hot, or how fast. */
async function heatOf(
  db: DbOrTx,
  { content }: PermitRow,
  segments: readonly SegmentWithState[],
  plan: ReturnType<typeof contentOf> | null,
  supplies: readonly string[],
): Promise<Heat | null> {
  const throughTube = content.supply !== null && supplies.includes(content.supply)
  const upKH = content.rampKH ?? plan?.upKH ?? null
  if (content.maxCelsius === null || (throughTube && upKH === null)) return null
  return {
    segments: await bakedSegments(db, segments),
    celsius: content.maxCelsius,
    upKH: upKH ?? 1,
    holdHours: content.soakHours ?? plan?.soakHours ?? null,
    startsAt: plan?.startsAt == null ? null : new Date(plan.startsAt),
    throughTube,
  }
}

async function ownPermit(db: DbOrTx, permit: PermitRow, around: Around): Promise<OwnPermit> {
  const { content } = permit
  const locks = around.locks.filter(({ permitId }) => permitId === permit.id)
  return {
    ...(await conflictPermit(db, permit, around)),
    points: content.points.map(({ tag, isolates, required }) => ({
      tag,
      isolates,
      required,
      holds: locks.some((lock) => lock.tag === tag && lock.verified),
    })),
    needs: needsOf(permit, around),
  }
}

function needsOf({ content, holderId }: PermitRow, { names }: Around): NeededCompetence[] {
  const person = (personId: number) => ({ personId, name: names.get(personId) ?? `person ${personId}` })
  const need = (
    personId: number | null,
    kind: CompetenceKind,
    as: string,
    standIns: readonly number[] = [],
  ): NeededCompetence[] =>
    personId === null ? [] : [{ ...person(personId), kind, as, standIns: standIns.map(person) }]
  const holder = holderId ?? content.holderId
  const deputies = content.deputyIds.filter((id) => id !== holder)
  return [
    ...need(holder, 'permit-holder', 'permit holder'),
    ...deputies.flatMap((id) => need(id, 'permit-holder', 'deputy')),
    ...need(content.isolatingPersonId, 'isolation', 'isolating person'),
    ...need(content.electricianId, 'electrician-licence', 'electrician', content.crewIds),
  ]
}

/** A piece of work as the rules take it: with the stretch that an officer has left of it, where one has. */
export function workFact(row: PlannedWorkRow): WorkFact {
  const { id, kind, title, state, startsAt, endsAt, people } = row
  return { id, kind, title, state, stretch: workStretch(row), from: startsAt, to: endsAt, people }
}

function workStretch(row: PlannedWorkRow): Stretch | null {
  if (row.limitedFromM !== null && row.limitedToM !== null && row.lineCode !== null) {
    return { line: row.lineCode, fromM: row.limitedFromM, toM: row.limitedToM }
  }
  return askedStretch(row)
}

/** The stretch that was asked for, before any ruling. */
export function askedStretch(row: PlannedWorkRow): Stretch | null {
  const fromM = row.fromM ?? row.segmentStartM
  const toM = row.toM ?? row.segmentEndM
  if (row.lineCode === null || fromM === null || toM === null) return null
  return { line: row.lineCode, fromM, toM }
}
