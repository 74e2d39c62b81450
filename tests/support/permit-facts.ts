/** What is known about a permit on which everything is in order, for tests that want one thing otherwise. */
import type { PermitActor, PermitFacts } from '#app/domain/permit-facts.ts'
import type { PermitAct, PermitState } from '#app/domain/permit-words.ts'
import { fullContent } from './permit-content.ts'

/** The people of permit tests by number; holder, deputy and crew as in fullContent. */
export const HOLDER = 1
export const DEPUTY = 2
export const CREW = 3
export const REQUESTER = 5
export const PLANNER = 6
export const OFFICER = 10

/** Begin of the window of fullContent. */
export const FROM = new Date('2026-11-10T06:00:00.000Z')
export const TO = new Date('2026-11-14T06:00:00.000Z')

export function hours(at: Date, count: number): Date {
  return new Date(at.getTime() + count * 3_600_000)
}

/** One who drafts, or with a role confirmed long ago one who approves. */
export function actorOf(
  personId: number,
  role: 'draft' | 'approve' | 'both' | 'none' = 'draft',
): PermitActor {
  const approves = role === 'approve' || role === 'both'
  return {
    personId,
    mayDraft: role === 'draft' || role === 'both',
    mayApprove: approves,
    approvingSince: approves ? new Date('2025-01-01T00:00:00.000Z') : null,
  }
}

const WAY: readonly (readonly [PermitAct, PermitState, number, number])[] = [
  ['draft', 'draft', REQUESTER, -72],
  ['request', 'requested', REQUESTER, -48],
  ['approve', 'approved', OFFICER, -24],
  ['site-check', 'approved', HOLDER, 0.25],
  ['accept', 'issued', HOLDER, 0.5],
]
const OFF_THE_WAY: Partial<
  Record<PermitState, readonly (readonly [PermitAct, PermitState, number, number])[]>
> = {
  returned: [['return', 'returned', OFFICER, -30]],
  refused: [['refuse', 'refused', OFFICER, -30]],
  withdrawn: [['withdraw', 'withdrawn', REQUESTER, -30]],
  discarded: [['discard', 'discarded', REQUESTER, -50]],
  lapsed: [['lapse', 'lapsed', 0, 2]],
  suspended: [
    ['suspend', 'suspended', CREW, 4],
    ['site-check', 'suspended', HOLDER, 5],
  ],
  expired: [['expire', 'expired', 0, 12.5]],
  'handed-back': [['hand-back', 'handed-back', HOLDER, 8]],
  cancelled: [
    ['hand-back', 'handed-back', HOLDER, 8],
    ['cancel', 'cancelled', OFFICER, 9],
  ],
}
const BEFORE: Partial<Record<PermitState, PermitState>> = {
  returned: 'requested',
  refused: 'requested',
  withdrawn: 'requested',
  discarded: 'draft',
  lapsed: 'approved',
}

function actsTo(state: PermitState): PermitFacts['acts'] {
  const until = BEFORE[state] ?? (OFF_THE_WAY[state] === undefined ? state : 'issued')
  const stop = WAY.findLastIndex(([, to]) => to === until)
  return [...WAY.slice(0, stop + 1), ...(OFF_THE_WAY[state] ?? [])].map(([act, toState, person, after]) => ({
    act,
    toState,
    personId: person === 0 ? null : person,
    at: hours(FROM, after),
    detail: act === 'site-check' ? { barriersPlaced: true, signsPosted: true, text: '' } : null,
  }))
}

const APPROVED: readonly PermitState[] = [
  'approved',
  'issued',
  'suspended',
  'expired',
  'handed-back',
  'lapsed',
  'cancelled',
]
const LIVE: readonly PermitState[] = ['issued', 'suspended', 'expired', 'handed-back', 'cancelled']

/** A permit in a state, one hour into its window where it is live, with everything in order. */
export function factsIn(
  state: PermitState,
  changes: Partial<Omit<PermitFacts, 'permit'>> & { permit?: Partial<PermitFacts['permit']> } = {},
): PermitFacts {
  const content = changes.permit?.content ?? fullContent()
  const approved = APPROVED.includes(state)
  const live = LIVE.includes(state)
  const { permit, ...rest } = changes
  return {
    acts: actsTo(state),
    plannerIds: [PLANNER],
    missing: [],
    unadopted: [],
    unprepared: [],
    conflicts: [],
    points: content.points.map(({ tag }, i) => ({
      tag,
      lockNumber: `L-${100 + i}`,
      appliedBy: CREW,
      verifiedBy: HOLDER,
      holds: true,
      removed: false,
    })),
    locksOut: state === 'handed-back' || state === 'cancelled' ? [] : ['L-100', 'L-101'],
    tests: content.tests.map(({ kind, place }) => ({
      kind,
      place,
      state: 'good',
      takenAt: hours(FROM, 5),
      nextDueAt: null,
      text: '',
    })),
    heating: { on: false, knownAt: FROM, since: FROM, basis: 'person', text: '' },
    policy: { extensionAllowed: true, keepDays: 1826 },
    ...rest,
    permit: {
      number: 'HSP-2026-001',
      state,
      revision: 1,
      version: 1,
      approvedVersion: approved ? 1 : null,
      createdBy: REQUESTER,
      requestedBy: state === 'draft' || state === 'discarded' ? null : REQUESTER,
      approvedBy: approved ? OFFICER : null,
      holderId: live ? HOLDER : null,
      windowFrom: FROM,
      windowTo: TO,
      currentUntil: live ? hours(FROM, 12.5) : null,
      extensions: 0,
      extendedHours: 0,
      content,
      approvedContent: approved ? content : null,
      ...permit,
    },
  }
}
