/**
 * The life of a heated-segment permit: one table of what can be done to it, from which state to which, by whom, under
 * which conditions, and what that causes. `permitStep` is the only way from one state to another; it decides on facts
 * it is given and changes nothing itself. Whether heating is energised is a fact of its own and never follows from a
 * state.
 */
import { type ActDetail, PERMIT_ACT_DETAILS } from './permit-act-details.ts'
import { dueAct, stateAsOf } from './permit-clock.ts'
import type { PermitActor, PermitFacts } from './permit-facts.ts'
import {
  conflictsRuled,
  extensionAllowed,
  type Guard,
  heatingNotOn,
  heatingOffWhenSuspended,
  isolationVerified,
  MOST_EXTENDED_HOURS,
  neverExpired,
  neverLive,
  noBlockingConflict,
  noLocksOut,
  nothingMissing,
  siteCheckedSinceApproval,
  siteCheckedSinceSuspension,
  suspendedSince,
  testsInDate,
  testsSinceSuspension,
  thresholdsAdopted,
  tubePrepared,
  validityEnd,
  validityGains,
  validityLeft,
  wasLive,
  windowInOrder,
  windowOpen,
} from './permit-guards.ts'
import { asDrafter, asHolder, asInspector, asNamed, asOfficer, asUninvolved } from './permit-people.ts'
import { condition, inputReason, personReason, type Reason, wrongState } from './permit-reasons.ts'
import type { PermitAct, PermitState, SafetyEventKind } from './permit-words.ts'

const HOUR_MS = 3_600_000
const LONGEST_REASON = 1000

/** What an act causes besides the new state. */
export type PermitEffect =
  | { kind: 'set-requester'; personId: number }
  /** The version that stands is approved by this person. */
  | { kind: 'approve'; personId: number }
  /** Nobody's approval holds any more. The version that was approved stays known, to compare with. */
  | { kind: 'void-approval' }
  | { kind: 'set-window'; from: Date | null; to: Date | null }
  | { kind: 'set-current-until'; at: Date | null }
  | { kind: 'set-holder'; personId: number }
  | { kind: 'count-extension'; hours: number }
  | { kind: 'end' }
  | { kind: 'safety-event'; event: SafetyEventKind }

/** An act that may be done, with everything that follows from it. */
export interface PermitStep {
  kind: 'step'
  act: PermitAct
  from: PermitState
  to: PermitState
  /** When it takes effect. */
  at: Date
  reason: string
  /** Kept with the act: what it had to say, and what followed from it. */
  detail: Record<string, unknown>
  effects: PermitEffect[]
}

export interface PermitRefusal {
  kind: 'refused'
  /** All of them at once. */
  reasons: Reason[]
}

export interface ActInput {
  reason: string
  detail: unknown
}

/** Who may do an act: reasons why this person may not. */
type Who = (facts: PermitFacts, actor: PermitActor, now: Date) => Reason[]

interface Outcome {
  effects: PermitEffect[]
  detail?: Record<string, unknown>
}

interface Rule<Act extends PermitAct> {
  from: readonly PermitState[]
  /** States from which it is done besides once work has begun: such a permit ends by hand-back only. */
  fromOnceLive?: readonly PermitState[]
  /** The state it leads to; `same` leaves the state as it is. */
  to: PermitState | 'same' | ((facts: PermitFacts) => PermitState)
  who: Who | 'product'
  /** Done with the person's own password, given again. */
  signed: boolean
  /** Whether a reason has to be given; the words that ask for it. */
  reason: string | null
  guards: readonly Guard[]
  /** What is wrong with what was typed, seen against the facts. */
  check?: (facts: PermitFacts, actor: PermitActor, now: Date, detail: ActDetail<Act>) => Reason[]
  outcome: (context: {
    facts: PermitFacts
    actor: PermitActor
    now: Date
    detail: ActDetail<Act>
    reason: string
  }) => Outcome
}

const drafter: Who = (_, actor) => asDrafter(actor)
const officer: Who = (_, actor, now) => asOfficer(actor, now)
const named: Who = (facts, actor) => asNamed(facts, actor)
const anybody: Who = () => []

const drafterOrOfficer: Who = (_, actor, now) => (asOfficer(actor, now).length === 0 ? [] : asDrafter(actor))

/** Whoever holds it; once it has run out a named deputy too, because nobody can take it over any more. */
const handsBack: Who = (facts, actor) => {
  const reasons = asHolder(facts, actor)
  return facts.permit.state === 'expired' && asNamed(facts, actor).length === 0 ? [] : reasons
}

function nothing(): Outcome {
  return { effects: [] }
}

function windowOf({ permit: { content } }: PermitFacts): PermitEffect {
  const at = (text: string | null) => (text === null ? null : new Date(text))
  return { kind: 'set-window', from: at(content.from), to: at(content.to) }
}

/** The life cycle. */
export const PERMIT_RULES: { [Act in PermitAct]: Rule<Act> } = {
  draft: {
    from: ['draft'],
    to: 'draft',
    who: drafter,
    signed: false,
    reason: null,
    guards: [],
    outcome: ({ facts }) => ({ effects: [windowOf(facts)] }),
  },
  edit: {
    from: ['draft', 'returned'],
    to: 'same',
    who: drafter,
    signed: false,
    reason: null,
    guards: [],
    outcome: ({ facts }) => ({ effects: [windowOf(facts)] }),
  },
  request: {
    from: ['draft', 'returned'],
    to: 'requested',
    who: drafter,
    signed: true,
    reason: null,
    guards: [nothingMissing, windowInOrder, tubePrepared],
    outcome: ({ facts, actor }) => ({
      effects: [{ kind: 'set-requester', personId: actor.personId }, windowOf(facts)],
    }),
  },
  return: {
    from: ['requested'],
    to: 'returned',
    who: officer,
    signed: true,
    reason: 'Say what has to change.',
    guards: [],
    outcome: nothing,
  },
  refuse: {
    from: ['requested'],
    to: 'refused',
    who: officer,
    signed: true,
    reason: 'Say why it is refused.',
    guards: [neverLive, noLocksOut],
    outcome: () => ({ effects: [{ kind: 'end' }] }),
  },
  approve: {
    from: ['requested'],
    to: 'approved',
    who: asUninvolved,
    signed: true,
    reason: null,
    guards: [
      nothingMissing,
      windowInOrder,
      tubePrepared,
      thresholdsAdopted,
      noBlockingConflict,
      conflictsRuled,
    ],
    outcome: ({ facts, actor }) => ({
      effects: [{ kind: 'approve', personId: actor.personId }, windowOf(facts)],
    }),
  },
  'change-terms': {
    from: ['approved', 'suspended'],
    to: 'requested',
    who: drafter,
    signed: false,
    reason: 'Say why the terms change: what was approved no longer holds.',
    guards: [neverExpired, heatingOffWhenSuspended, nothingMissing, windowInOrder],
    outcome: ({ facts, actor }) => ({
      effects: [
        { kind: 'void-approval' },
        { kind: 'set-requester', personId: actor.personId },
        windowOf(facts),
        { kind: 'set-current-until', at: null },
      ],
    }),
  },
  withdraw: {
    from: ['requested', 'returned', 'approved'],
    to: 'withdrawn',
    who: drafterOrOfficer,
    signed: false,
    reason: 'Say why it is taken back.',
    guards: [neverLive, noLocksOut],
    outcome: () => ({ effects: [{ kind: 'end' }] }),
  },
  discard: {
    from: ['draft'],
    to: 'discarded',
    who: drafter,
    signed: false,
    reason: null,
    guards: [],
    outcome: () => ({ effects: [{ kind: 'end' }] }),
  },
  lapse: {
    from: ['approved'],
    // Where work has been done before, the place has to be handed back and inspected all the same.
    to: (facts) => (wasLive(facts) ? 'expired' : 'lapsed'),
    who: 'product',
    signed: false,
    reason: null,
    guards: [],
    outcome: ({ facts }) => ({ effects: wasLive(facts) ? [] : [{ kind: 'end' }] }),
  },
  'site-check': {
    from: ['approved', 'issued', 'suspended'],
    to: 'same',
    who: drafterOrOfficer,
    signed: false,
    reason: null,
    guards: [],
    check: (_facts, _actor, _now, { barriersPlaced, signsPosted, text }) =>
      (barriersPlaced && signsPosted) || text.length >= 3
        ? []
        : [inputReason('text', 'Say what is not in order.')],
    outcome: nothing,
  },
  accept: {
    from: ['approved'],
    to: 'issued',
    who: named,
    signed: true,
    reason: null,
    guards: [
      windowOpen,
      tubePrepared,
      siteCheckedSinceApproval,
      isolationVerified,
      testsInDate,
      noBlockingConflict,
    ],
    outcome: ({ facts, actor, now }) => {
      const until = validityEnd(facts, now)
      return {
        effects: [
          { kind: 'set-holder', personId: actor.personId },
          { kind: 'set-current-until', at: until },
        ],
        detail: { until: until.toISOString() },
      }
    },
  },
  'hand-over': {
    from: ['issued', 'suspended'],
    to: 'same',
    who: named,
    signed: true,
    reason: null,
    guards: [],
    check: ({ permit }, actor, _now, { outgoingId }) => {
      if (permit.holderId === actor.personId) {
        return [
          personReason(
            'holds-already',
            'You hold this permit. Whoever takes it over signs, with you beside them.',
          ),
        ]
      }
      return outgoingId === permit.holderId
        ? []
        : [inputReason('outgoingId', 'It is not theirs to hand over. Name the person who holds it now.')]
    },
    outcome: ({ actor }) => ({
      effects: [{ kind: 'set-holder', personId: actor.personId }],
      detail: { incomingId: actor.personId },
    }),
  },
  revalidate: {
    from: ['issued'],
    to: 'issued',
    who: named,
    signed: true,
    reason: null,
    guards: [testsInDate, isolationVerified, validityGains],
    outcome: ({ facts, now }) => {
      const until = validityEnd(facts, now)
      return {
        effects: [{ kind: 'set-current-until', at: until }],
        detail: { until: until.toISOString() },
      }
    },
  },
  extend: {
    from: ['issued'],
    to: 'issued',
    who: asUninvolved,
    signed: true,
    reason: 'Say why the window has to be longer.',
    guards: [extensionAllowed, thresholdsAdopted, noBlockingConflict, conflictsRuled],
    check: ({ permit }, _actor, _now, { hours }) => {
      const left = MOST_EXTENDED_HOURS - permit.extendedHours
      if (hours <= left) return []
      const text = `All extensions together are at most ${MOST_EXTENDED_HOURS} h; ${left} h are left. Ask for a new permit for the rest.`
      return [inputReason('hours', text)]
    },
    outcome: ({ facts: { permit }, detail: { hours } }) => {
      const to = new Date((permit.windowTo as Date).getTime() + hours * HOUR_MS)
      return {
        effects: [
          { kind: 'set-window', from: permit.windowFrom, to },
          { kind: 'count-extension', hours },
        ],
        detail: { windowTo: to.toISOString() },
      }
    },
  },
  suspend: {
    from: ['issued'],
    to: 'suspended',
    who: anybody,
    signed: false,
    reason: 'Say in a word or two why work stops.',
    guards: [],
    outcome: () => ({ effects: [{ kind: 'safety-event', event: 'permit-suspended' }] }),
  },
  'made-safe': {
    from: ['suspended', 'expired'],
    to: 'same',
    who: drafterOrOfficer,
    signed: false,
    reason: null,
    guards: [],
    check: (_facts, _actor, now, { at }) =>
      new Date(at) <= now ? [] : [inputReason('at', 'This lies ahead. Say when it was made safe.')],
    outcome: nothing,
  },
  resume: {
    from: ['suspended'],
    to: 'issued',
    who: asInspector,
    signed: true,
    reason: 'Say what was put right.',
    guards: [neverExpired, validityLeft, siteCheckedSinceSuspension, testsSinceSuspension, isolationVerified],
    outcome: ({ facts, now }) => {
      const since = suspendedSince(facts) ?? now
      return { effects: [], detail: { suspendedHours: (now.getTime() - since.getTime()) / HOUR_MS } }
    },
  },
  expire: {
    from: ['issued', 'suspended'],
    to: 'expired',
    who: 'product',
    signed: false,
    reason: null,
    guards: [],
    outcome: nothing,
  },
  'hand-back': {
    from: ['issued', 'suspended', 'expired'],
    fromOnceLive: ['requested', 'returned', 'approved'],
    to: 'handed-back',
    who: handsBack,
    signed: true,
    reason: null,
    guards: [heatingNotOn],
    check: ({ locksOut }, _actor, _now, { locks }) =>
      locks === 'left' || locksOut.length === 0
        ? []
        : [
            inputReason(
              'locks',
              `${locksOut.join(', ')} still hang. Remove them, or say that they are left and why.`,
            ),
          ],
    outcome: nothing,
  },
  'return-to-holder': {
    from: ['handed-back'],
    to: 'suspended',
    who: asInspector,
    signed: true,
    reason: 'Say what has to be put right first.',
    guards: [],
    outcome: nothing,
  },
  cancel: {
    from: ['handed-back'],
    to: 'cancelled',
    who: asInspector,
    signed: true,
    reason: null,
    guards: [noLocksOut, heatingNotOn],
    outcome: () => ({ effects: [{ kind: 'end' }] }),
  },
}

const READ_FROM_CONTENT: readonly Guard[] = [nothingMissing, windowInOrder, thresholdsAdopted]
const READ_FROM_LINE: readonly Guard[] = [noBlockingConflict, conflictsRuled]

/** The facts that are dear to gather. */
export interface FactsNeeded {
  /** Cautions, and with them what is missing. */
  hazards: boolean
  conflicts: boolean
  /** What the records say of the tube. */
  tube: boolean
}

/** Which of the facts that are dear to gather the rule of an act looks at. */
export function factsNeeded(act: PermitAct): FactsNeeded {
  const { guards } = PERMIT_RULES[act]
  return {
    tube: guards.includes(tubePrepared),
    hazards: guards.some((guard) => READ_FROM_CONTENT.includes(guard)),
    conflicts: guards.some((guard) => READ_FROM_LINE.includes(guard)),
  }
}

/** The facts as time has made them: an act is judged by the state of now, written down or not. */
function asOf(facts: PermitFacts, now: Date): PermitFacts {
  const { state, due } = stateAsOf(facts.permit, now)
  if (due === null) return facts
  const to = due.act === 'lapse' && wasLive(facts) ? 'expired' : state
  return {
    ...facts,
    permit: { ...facts.permit, state: to },
    acts: [...facts.acts, { act: due.act, toState: to, personId: null, at: due.at, detail: null }],
  }
}

function possibleFrom(act: PermitAct, facts: PermitFacts): readonly PermitState[] {
  const { from, fromOnceLive = [] } = PERMIT_RULES[act]
  return wasLive(facts) ? [...from, ...fromOnceLive] : from
}

/**
 * What stands in the way of an act for this person now, apart from what the act's form will have to say. A permit in
 * another state is told as that alone: its other reasons would be about something that cannot be done anyway.
 */
export function standsInTheWay(facts: PermitFacts, actor: PermitActor, act: PermitAct, now: Date): Reason[] {
  const current = asOf(facts, now)
  const { who, guards } = PERMIT_RULES[act]
  const from = possibleFrom(act, current)
  if (who === 'product') {
    return [personReason('product', 'This follows from time alone; nobody does it by hand.')]
  }
  const persons = who(current, actor, now)
  if (!from.includes(current.permit.state)) {
    return [wrongState(act, current.permit.state, PERMIT_RULES[act].from), ...persons]
  }
  return [...persons, ...guards.flatMap((guard) => guard(current, now))]
}

/**
 * Judges an act by a person.
 *
 * @param input its reason and what its form says besides, see domain/permit-act-details.ts
 * @returns the step with everything it causes, or every reason against it
 */
export function permitStep<Act extends PermitAct>(
  facts: PermitFacts,
  actor: PermitActor,
  act: Act,
  input: ActInput,
  now: Date,
): PermitStep | PermitRefusal {
  const rule: Rule<Act> = PERMIT_RULES[act]
  const current = asOf(facts, now)
  const reasons = standsInTheWay(facts, actor, act, now)
  const reason = input.reason.trim()
  if (rule.reason !== null && reason.length < 3) reasons.push(inputReason('reason', rule.reason))
  if (reason.length > LONGEST_REASON) {
    reasons.push(inputReason('reason', `At most ${LONGEST_REASON} characters; these are ${reason.length}.`))
  }
  const parsed = PERMIT_ACT_DETAILS[act].safeParse(input.detail ?? {})
  if (!parsed.success) {
    reasons.push(
      ...parsed.error.issues.map(({ path, message }) => inputReason(path.join('.') || 'form', message)),
    )
    return { kind: 'refused', reasons }
  }
  const detail = parsed.data as ActDetail<Act>
  // What was typed is held against the facts only where the act itself is possible.
  if (!reasons.some(({ kind }) => kind === 'state')) {
    reasons.push(...(rule.check?.(current, actor, now, detail) ?? []))
  }
  if (reasons.length > 0) return { kind: 'refused', reasons }
  return step(current, act, now, reason, detail, rule.outcome({ facts: current, actor, now, detail, reason }))
}

/**
 * What the product does by itself because a time has passed.
 *
 * @returns the step as of the time that passed, but never before the last thing that was done; or why it is not due
 */
export function productStep(
  facts: PermitFacts,
  act: 'expire' | 'lapse',
  now: Date,
): PermitStep | PermitRefusal {
  const due = dueAct(facts.permit, now)
  if (due === null || due.act !== act) {
    return { kind: 'refused', reasons: [condition('not-due', 'Nothing of that kind is due.')] }
  }
  const last = facts.acts.at(-1)?.at
  const at = last !== undefined && last > due.at ? last : due.at
  const { outcome } = PERMIT_RULES[act]
  const nobody: PermitActor = { personId: 0, mayDraft: false, mayApprove: false, approvingSince: null }
  return step(
    facts,
    act,
    at,
    '',
    { because: due.because },
    outcome({ facts, actor: nobody, now, detail: {}, reason: '' }),
  )
}

function step<Act extends PermitAct>(
  facts: PermitFacts,
  act: Act,
  at: Date,
  reason: string,
  said: object,
  { effects, detail = {} }: Outcome,
): PermitStep {
  const from = facts.permit.state
  const { to } = PERMIT_RULES[act]
  return {
    kind: 'step',
    act,
    from,
    to: to === 'same' ? from : typeof to === 'string' ? to : to(facts),
    at,
    reason,
    detail: { ...said, ...detail },
    effects,
  }
}
