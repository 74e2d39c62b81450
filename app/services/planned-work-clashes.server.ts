/** What pieces of work would meet: conflicts of permits that are in force or asked for, hot steel, closed bays. */
import type { DbOrTx } from '../db/client.server.ts'
import { listRulings, type RulingRow } from '../db/queries/permit-conflicts.server.ts'
import type { PlannedWorkRow } from '../db/queries/planned-work.server.ts'
import {
  type ConflictFacts,
  exclusionReach,
  needsExclusion,
  type WorkFact,
} from '../domain/permit-conflicts/facts.ts'
import { findConflicts } from '../domain/permit-conflicts.ts'
import type { PermitState } from '../domain/permit-words.ts'
import { closedOnTheWay, type HotSegment, hotNear, type WorkClash } from '../domain/planned-work.ts'
import { SEGMENT_STATES } from '../domain/segment-states.ts'
import { overlaps } from '../domain/tunnel-stretch.ts'
import { type BayClosureRow, readClosedStretches } from './bay-closures.server.ts'
import { rulingOn } from './permit-conflicts.server.ts'
import { conflictFactsOf, readConflictGround, workFact } from './permit-conflicts-facts.server.ts'

/** A heated segment with the exclusion around it, for the drawing of the tube. */
export interface HeatedNearby {
  tag: string
  line: string
  fromM: number
  toM: number
  westM: number
  eastM: number
  why: string
}

/** What is heated or asked to be, read once for all works that are asked about. */
export interface Heating {
  permits: { number: string; state: PermitState; facts: ConflictFacts; rulings: RulingRow[] }[]
  hot: HotSegment[]
  reachM: number
  joints: ConflictFacts['joints']
  closures: BayClosureRow[]
}

/** Reads everything that works can meet. */
export async function readHeatingForWorks(db: DbOrTx, now: Date): Promise<Heating> {
  const ground = await readConflictGround(db, now)
  const { segments, limits, joints } = ground.shared
  const permits: Heating['permits'] = []
  for (const { row } of ground.claiming) {
    permits.push({
      number: row.number,
      state: row.state,
      facts: await conflictFactsOf(db, row, ground),
      rulings: await listRulings(db, row.id),
    })
  }
  return {
    permits,
    hot: hotSegments(segments),
    reachM: exclusionReach({ exclusionWestM: null, exclusionEastM: null }, limits).westM,
    joints,
    closures: await readClosedStretches(db),
  }
}

/**
 * What a piece of work would meet. A permit that is only asked for counts, and says so, but keeps no work from being
 * begun: its own conflict has to be cleared before it is approved.
 */
export function clashesOf(work: WorkFact, heating: Heating): WorkClash[] {
  const byPermit = heating.permits.flatMap(({ number, facts, rulings, state }) =>
    findConflicts({ ...facts, works: [work] })
      .filter(({ key }) => key.split(':').slice(1, 3).join(':') === `work:${work.id}`)
      .map(({ key, rule, effect, text, wayOut, place }): WorkClash => {
        const ruling = rulingOn(
          text,
          rulings.findLast(({ conflictKey }) => conflictKey === key),
        )
        const allowed = ruling?.allowed === true && !ruling.stale
        return {
          permit: number,
          rule,
          effect: state === 'requested' ? 'warning' : effect,
          text: state === 'requested' ? `Asked for only: ${text}` : text,
          wayOut,
          place,
          allowedBy: allowed ? `${ruling.by}: ${ruling.text}` : null,
        }
      }),
  )
  if (work.stretch === null) return byPermit
  const said = new Set(
    heating.permits.flatMap(({ number, facts }) =>
      byPermit.some(
        ({ permit, rule }) => permit === number && (rule === 'K3' || rule === 'K10' || rule === 'K4'),
      )
        ? facts.own.segments.map(({ tag }) => tag)
        : [],
    ),
  )
  const { hot, reachM, joints } = heating
  const unsaid = hot.filter(({ tag }) => !said.has(tag))
  return [...byPermit, ...hotNear(work.stretch, unsaid, reachM, joints)]
}

/** Closed bays that the work would enter. */
export function closuresOf(work: WorkFact, { closures }: Heating): BayClosureRow[] {
  return closedOnTheWay(work.stretch, closures)
}

/** Metres of tunnel beside a piece of work in which heat is worth drawing. */
const DRAWN_AROUND_M = 60

/** Heated segments near a piece of work, each once. */
export function heatedNear(row: PlannedWorkRow, heating: Heating): HeatedNearby[] {
  const { stretch } = workFact({ ...row, limitedFromM: null, limitedToM: null })
  if (stretch === null) return []
  const around = { ...stretch, fromM: stretch.fromM - DRAWN_AROUND_M, toM: stretch.toM + DRAWN_AROUND_M }
  const found = new Map<string, HeatedNearby>()
  for (const { number, state, facts } of heating.permits) {
    if (state === 'requested') continue
    const { westM, eastM } = needsExclusion(facts.own, facts.limits)
      ? exclusionReach(facts.own, facts.limits)
      : { westM: 0, eastM: 0 }
    for (const { tag, line, fromM, toM } of facts.own.segments)
      found.set(tag, { tag, line, fromM, toM, westM, eastM, why: number })
  }
  for (const { tag, line, fromM, toM, stateLabel } of heating.hot) {
    const { reachM } = heating
    if (!found.has(tag))
      found.set(tag, { tag, line, fromM, toM, westM: reachM, eastM: reachM, why: stateLabel })
  }
  return [...found.values()].filter((one) =>
    overlaps({ line: one.line, fromM: one.fromM - one.westM, toM: one.toM + one.eastM }, around),
  )
}

/** Segments that are recorded as hot now. */
function hotSegments(segments: ConflictFacts['segments']): HotSegment[] {
  return segments
    .filter(({ state }) => SEGMENT_STATES[state].hot)
    .map(({ tag, line, fromM, toM, state }) => ({
      tag,
      line,
      fromM,
      toM,
      stateLabel: SEGMENT_STATES[state].label,
    }))
}
