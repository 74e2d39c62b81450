/** Pages about work in the tunnel: what there is, with what lies near heat on top; one of them; and its form. */
import type { DbOrTx } from '../db/client.server.ts'
import { findPlannedWork, listPlannedWorks, type PlannedWorkRow } from '../db/queries/planned-work.server.ts'
import { listLines, listSegments } from '../db/queries/segments.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { PlannedWorkState } from '../domain/permit-words.ts'
import { OPEN_WORK, standsInTheWay, type WorkClash } from '../domain/planned-work.ts'
import type { Stretch } from '../domain/tunnel-stretch.ts'
import type { BayClosureRow } from './bay-closures.server.ts'
import { askedStretch, workFact } from './permit-conflicts-facts.server.ts'
import {
  clashesOf,
  closuresOf,
  type HeatedNearby,
  heatedNear,
  readHeatingForWorks,
} from './planned-work-clashes.server.ts'

/** Works that are over are shown up to so many. */
const SHOWN_OVER = 40

export type WorkInList = Pick<
  PlannedWorkRow,
  'id' | 'kind' | 'title' | 'state' | 'startsAt' | 'endsAt' | 'people' | 'segmentTag' | 'createdByName'
> & {
  /** Where it is now, an officer's limit counted in. */
  stretch: Stretch | null
  clashes: WorkClash[]
  /** Whether something keeps it from being begun, or should have. */
  stopped: boolean
}

const AHEAD: readonly PlannedWorkState[] = [...OPEN_WORK, 'started']

function inList(row: PlannedWorkRow, clashes: WorkClash[], closed: number): WorkInList {
  const { id, kind, title, state, startsAt, endsAt, people, segmentTag, createdByName } = row
  const { stretch } = workFact(row)
  const stopped = closed > 0 || clashes.some(standsInTheWay)
  return {
    id,
    kind,
    title,
    state,
    startsAt,
    endsAt,
    people,
    segmentTag,
    createdByName,
    stretch,
    clashes,
    stopped,
  }
}

/** Works to come and under way, those that something keeps from beginning first, and works that are over. */
export async function readWorks(
  db: DbOrTx,
  actor: Actor,
  now: Date,
): Promise<{ ahead: WorkInList[]; over: WorkInList[]; mayPlan: boolean }> {
  demand(actor, 'facility:view')
  const heating = await readHeatingForWorks(db, now)
  const rows = await listPlannedWorks(db)
  const ahead = rows
    .filter(({ state }) => AHEAD.includes(state))
    .map((row) => inList(row, clashesOf(workFact(row), heating), closuresOf(workFact(row), heating).length))
  return {
    ahead: ahead.sort(
      (a, b) =>
        Number(b.stopped) - Number(a.stopped) ||
        Number(b.clashes.length > 0) - Number(a.clashes.length > 0) ||
        a.startsAt.getTime() - b.startsAt.getTime(),
    ),
    over: rows
      .filter(({ state }) => !AHEAD.includes(state))
      .slice(0, SHOWN_OVER)
      .map((row) => inList(row, [], 0)),
    mayPlan: may(actor, 'work:plan'),
  }
}

export interface WorkPageData {
  work: PlannedWorkRow
  asked: Stretch | null
  /** What is left of it by an officer's limit. */
  left: Stretch | null
  clashes: WorkClash[]
  closures: BayClosureRow[]
  heated: HeatedNearby[]
  may: { plan: boolean; rule: boolean }
  /** Whether the reader planned it, and so cannot rule on it. */
  own: boolean
}

/**
 * One piece of work with all that it would meet.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readWork(db: DbOrTx, actor: Actor, now: Date, id: number): Promise<WorkPageData> {
  demand(actor, 'facility:view')
  const work = Number.isSafeInteger(id) ? await findPlannedWork(db, id) : null
  if (work === null)
    throw new DomainError('not-found', 'There is no such work. Permits, Works lists what there is.')
  const ahead = AHEAD.includes(work.state)
  const heating = await readHeatingForWorks(db, now)
  const fact = workFact(work)
  return {
    work,
    asked: askedStretch(work),
    left: work.limitedFromM === null ? null : fact.stretch,
    clashes: ahead ? clashesOf(fact, heating) : [],
    closures: ahead ? closuresOf(fact, heating) : [],
    heated: ahead ? heatedNear(work, heating) : [],
    may: { plan: may(actor, 'work:plan'), rule: may(actor, 'permit:approve') },
    own: work.createdBy === actor.personId,
  }
}

export interface WorkPlaces {
  segments: { tag: string; line: string; fromM: number; toM: number }[]
  lines: { code: string; name: string; lengthM: number }[]
}

/** Places that a piece of work can be at. */
export async function readWorkPlaces(db: DbOrTx, actor: Actor, now: Date): Promise<WorkPlaces> {
  demand(actor, 'work:plan')
  const [segments, lines] = await Promise.all([listSegments(db, now), listLines(db)])
  return {
    segments: segments.map(({ tag, lineCode, startM, endM }) => ({
      tag,
      line: lineCode,
      fromM: startM,
      toM: endM,
    })),
    lines: lines.map(({ code, name, lengthM }) => ({ code, name, lengthM })),
  }
}
