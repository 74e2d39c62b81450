/** The register of permits: which there are, what they wait for, and what is wrong with those at the site. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  countLocksOut,
  countPermitLines,
  listHolders,
  listOpenDangers,
  listPermitLines,
  listPermitsBySegment,
  listPermitYears,
  listPlanners,
  listSegmentsOfPermits,
  type PermitListFilter,
} from '../db/queries/permit-register.server.ts'
import { listPermits, type PermitRow } from '../db/queries/permits.server.ts'
import { listSegmentTags } from '../db/queries/segments.server.ts'
import { type Actor, may } from '../domain/actor.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import { AT_THE_SITE, PERMIT_GROUPS, type PermitGroup, statesOfGroup } from '../domain/permit-groups.ts'
import { waitsFor } from '../domain/permit-waiting.ts'
import { ENDED_PERMIT_STATES, type PermitState, type SafetyEventKind } from '../domain/permit-words.ts'
import { readTests } from './permit-tests.server.ts'

const PAGE = 50

export interface RegisterFilter {
  group: PermitGroup
  segment: string
  holder: string
  year: string
  words: string
  page: number
}

export interface RegisterLine {
  number: string
  title: string
  state: PermitState
  segments: string[]
  holder: string | null
  windowFrom: Date | null
  windowTo: Date | null
  /** Null for what is neither live nor suspended. */
  currentUntil: Date | null
  endedAt: Date | null
  /** Tests that were good and are due again since, or have failed. */
  testsWrong: string[]
  locksOut: number
  dangers: { kind: SafetyEventKind; text: string; startedAt: Date }[]
}

export interface WaitingPermitLine {
  number: string
  segments: readonly string[]
  what: string
}

export interface PermitRegisterData {
  filter: RegisterFilter
  lines: RegisterLine[]
  total: number
  pageSize: number
  waiting: WaitingPermitLine[]
  segments: string[]
  holders: { id: number; name: string }[]
  years: number[]
  may: { draft: boolean }
}

/** Reads the filter leniently (an unknown value is no filter) and finds the page. */
export async function readPermitRegister(
  db: Db,
  actor: Actor,
  now: Date,
  query: URLSearchParams,
): Promise<PermitRegisterData> {
  const [segments, holders, years] = await Promise.all([
    listSegmentTags(db),
    listHolders(db),
    listPermitYears(db),
  ])
  const filter = readFilter(query, { segments, holders, years })
  const asked = asPermitFilter(filter)
  const [rows, total, waiting, locks, dangers] = await Promise.all([
    listPermitLines(db, asked, { limit: PAGE, offset: (filter.page - 1) * PAGE }),
    countPermitLines(db, asked),
    listWaitingPermits(db, actor, now),
    countLocksOut(db),
    listOpenDangers(db),
  ])
  const tags = await listSegmentsOfPermits(
    db,
    rows.map(({ id }) => id),
  )
  const testsWrong = await readWrongTests(
    db,
    rows.filter(({ state }) => AT_THE_SITE.includes(state)).map(({ id }) => id),
    now,
  )
  return {
    filter,
    lines: rows.map((row) => {
      const { state } = stateAsOf(row, now)
      return {
        number: row.number,
        title: row.title,
        state,
        segments: tags.get(row.id) ?? [],
        holder: row.holderName,
        windowFrom: row.windowFrom,
        windowTo: row.windowTo,
        currentUntil: state === 'issued' || state === 'suspended' ? row.currentUntil : null,
        endedAt: row.endedAt,
        testsWrong: testsWrong.get(row.id) ?? [],
        locksOut: locks.get(row.id) ?? 0,
        dangers: dangers
          .filter(({ permitId }) => permitId === row.id)
          .map(({ kind, text, startedAt }) => ({ kind, text, startedAt })),
      }
    }),
    total,
    pageSize: PAGE,
    waiting,
    segments,
    holders,
    years,
    may: { draft: may(actor, 'permit:draft') },
  }
}

function readFilter(
  query: URLSearchParams,
  choices: Pick<PermitRegisterData, 'segments' | 'holders' | 'years'>,
): RegisterFilter {
  const group = PERMIT_GROUPS.find((each) => each === query.get('group')) ?? 'open'
  const segment = choices.segments.find((tag) => tag === query.get('segment')) ?? ''
  const holder = choices.holders.find(({ id }) => String(id) === query.get('holder'))
  const year = choices.years.find((each) => String(each) === query.get('year'))
  const page = Number(query.get('page') ?? '1')
  return {
    group,
    segment,
    holder: holder === undefined ? '' : String(holder.id),
    year: year === undefined ? '' : String(year),
    words: (query.get('words') ?? '').trim().slice(0, 200),
    page: Number.isInteger(page) && page >= 1 && page < 10_000 ? page : 1,
  }
}

function asPermitFilter({ group, segment, holder, year, words }: RegisterFilter): PermitListFilter {
  const states = statesOfGroup(group)
  return {
    ...(states === undefined ? {} : { states }),
    ...(segment === '' ? {} : { segment }),
    ...(holder === '' ? {} : { holderId: Number(holder) }),
    ...(year === '' ? {} : { year: Number(year) }),
    ...(words === '' ? {} : { words }),
  }
}

/** Tests of permits at the site that are overdue or failed, in words, by the permit's id. */
async function readWrongTests(
  db: DbOrTx,
  permitIds: readonly number[],
  now: Date,
): Promise<Map<number, string[]>> {
  const wrong = new Map<number, string[]>()
  if (permitIds.length === 0) return wrong
  const permits = (await listPermits(db, { states: AT_THE_SITE })).filter(({ id }) => permitIds.includes(id))
  for (const permit of permits) {
    const tests = await readTests(db, permit, now)
    wrong.set(
      permit.id,
      tests.filter(({ state }) => state === 'overdue' || state === 'failed').map(({ text }) => text),
    )
  }
  return wrong
}

/** Permits that wait for a person, newest number first. */
export async function listWaitingPermits(db: DbOrTx, actor: Actor, now: Date): Promise<WaitingPermitLine[]> {
  const hands = {
    personId: actor.personId,
    mayDraft: may(actor, 'permit:draft'),
    mayApprove: may(actor, 'permit:approve'),
  }
  if (!hands.mayDraft && !hands.mayApprove) return []
  const open = await listPermits(db, {
    states: ['requested', 'returned', 'approved', ...AT_THE_SITE],
  })
  const planners = await listPlanners(db, plansOf(open))
  return open.flatMap((permit) => {
    const what = waitsFor({ ...permit, plannerIds: planners.get(permit.planId ?? 0) ?? [] }, hands, now)
    return what === null ? [] : [{ number: permit.number, segments: permit.content.segments, what }]
  })
}

function plansOf(permits: readonly PermitRow[]): number[] {
  return [...new Set(permits.flatMap(({ planId }) => (planId === null ? [] : [planId])))]
}

/** A permit in a few words, for the pages of what it is for. */
export interface PermitBrief {
  number: string
  title: string
  state: PermitState
  windowFrom: Date | null
  windowTo: Date | null
  /** Null for what is neither live nor suspended. */
  currentUntil: Date | null
}

const BRIEF = 5

/** The newest permits of a segment or of a bake plan, those that have not ended first. */
export async function listPermitBriefs(
  db: DbOrTx,
  of: { segment: string } | { planId: number },
  now: Date,
): Promise<PermitBrief[]> {
  const rows = await listPermitLines(db, of, { limit: 4 * BRIEF, offset: 0 })
  const briefs = rows.map(({ number, title, windowFrom, windowTo, currentUntil, ...row }) => {
    const { state } = stateAsOf({ state: row.state, windowFrom, windowTo, currentUntil }, now)
    const running = state === 'issued' || state === 'suspended'
    return { number, title, state, windowFrom, windowTo, currentUntil: running ? currentUntil : null }
  })
  const ended = ({ state }: PermitBrief) => Number(ENDED_PERMIT_STATES.includes(state))
  return briefs.toSorted((a, b) => ended(a) - ended(b)).slice(0, BRIEF)
}

/** Permits at the site by the tags of their segments: what covers a heat, or should and no longer does. */
export async function permitsAtTheSite(
  db: DbOrTx,
  now: Date,
): Promise<Map<string, { number: string; state: PermitState }[]>> {
  const bySegment = new Map<string, { number: string; state: PermitState }[]>()
  for (const { tag, number, ...times } of await listPermitsBySegment(db, AT_THE_SITE)) {
    const { state } = stateAsOf(times, now)
    bySegment.set(tag, [...(bySegment.get(tag) ?? []), { number, state }])
  }
  return bySegment
}
