/**
 * Dangerous combinations of a permit's state, its heating and its tests, and what is to be done about them. Pure: what
 * is written down and ended from it is the business of services/safety-events.server.ts.
 */
import type { HeatingFact, TestFact } from './permit-facts.ts'
import {
  PERMIT_STATE_LABELS,
  PERMIT_TEST_LABELS,
  type PermitState,
  type SafetyEventKind,
} from './permit-words.ts'

export const SAFETY_EVENT_LABELS: Record<SafetyEventKind, string> = {
  'heating-without-live-permit': 'Heating on without a live permit',
  'expired-while-heated': 'Permit ran out with the heating on',
  'suspended-while-heated': 'Permit suspended with the heating on',
  'permit-suspended': 'Work stopped',
  'low-oxygen': 'Too little oxygen',
  'high-oxygen': 'Too much oxygen',
  'test-overdue': 'Test overdue',
  'revalidation-missed': 'Revalidation missed',
}

/** What whoever reads it does first, in plain words. */
export const WHAT_TO_DO: Record<SafetyEventKind, string> = {
  'heating-without-live-permit':
    'Keep everybody away from the segment. Have the supply switched off and locked, then write down here that it is off; if it has to stay on, an officer writes why. Ebbline switches nothing.',
  'expired-while-heated':
    'The permit cannot be made live again. Have the supply switched off and write that down, or let an officer write why the heating goes on. Then hand back, or ask for a new permit.',
  'suspended-while-heated':
    'Have the heating made safe: who, when and how is asked for. Until it is written down as off, or an officer writes why it goes on, this stays here.',
  'permit-suspended':
    'Nobody works at the segment. Put the SUSPENDED sheet in the place of the posted copy. Only an officer lets the work go on.',
  'low-oxygen':
    'Leave at once and keep out. Do not go in to help anybody without breathing apparatus: call the rescue service. The stretch stays closed until an officer releases it.',
  'high-oxygen':
    'Leave at once; clothes and hair burn fiercely in it. Nothing that sparks or glows is switched. The stretch stays closed until an officer releases it.',
  'test-overdue':
    'Take the test now, or stop the work. The permit cannot be revalidated with a test overdue.',
  'revalidation-missed':
    'The permit ran out because nobody revalidated it in time. It cannot be made live again: hand back, or ask for a new permit.',
}

/** Energised where no live permit covers it. These end when the heating is known to be off, and not by a new state. */
export const HEATED_KINDS = [
  'heating-without-live-permit',
  'expired-while-heated',
  'suspended-while-heated',
] as const satisfies readonly SafetyEventKind[]

/** Kinds that an officer may let go on, with a reason. */
export function canBeTolerated(kind: SafetyEventKind): boolean {
  return HEATED_KINDS.some((heated) => heated === kind)
}

/** How serious, for their order on a page: the first need an act at once. */
const ORDER: readonly SafetyEventKind[] = [
  'low-oxygen',
  'high-oxygen',
  ...HEATED_KINDS,
  'permit-suspended',
  'test-overdue',
  'revalidation-missed',
]

/** For sorting: what cannot wait comes first. */
export function bySeriousness(a: SafetyEventKind, b: SafetyEventKind): number {
  return ORDER.indexOf(a) - ORDER.indexOf(b)
}

export interface DangerFacts {
  /** The permit's number; null where the segments have no permit that is under way. */
  number: string | null
  segments: readonly string[]
  /** As of now, see domain/permit-clock.ts. */
  state: PermitState
  stateSince: Date
  /** Whether it expired because nobody revalidated it. */
  revalidationMissed: boolean
  /** Another permit answers for the heat of every one of these segments. */
  coveredByOther: boolean
  heating: HeatingFact
  tests: readonly TestFact[]
}

export interface Danger {
  kind: SafetyEventKind
  startedAt: Date
  /** Sets apart what has the same kind and beginning. */
  what: string
  text: string
}

/** What is wrong at an instant. */
export function dangersOf(facts: DangerFacts, now: Date, when: (at: Date) => string): Danger[] {
  const found: Danger[] = []
  const heated = heatedKind(facts)
  const place = facts.segments.join(' and ')
  if (heated !== null) {
    const since = facts.heating.since ?? facts.heating.knownAt ?? now
    found.push({
      kind: heated,
      startedAt: new Date(Math.max(since.getTime(), facts.stateSince.getTime())),
      what: '',
      text: `${heatedText(heated, facts, place, when)} ${facts.heating.text}`,
    })
  }
  if (facts.number === null) return found
  if (facts.state === 'suspended') {
    found.push({
      kind: 'permit-suspended',
      startedAt: facts.stateSince,
      what: '',
      text: `${facts.number} (${place}) was suspended at ${when(facts.stateSince)}.`,
    })
  }
  if (facts.state === 'expired' && facts.revalidationMissed) {
    found.push({
      kind: 'revalidation-missed',
      startedAt: facts.stateSince,
      what: '',
      text: `${facts.number} (${place}) was not revalidated and ran out at ${when(facts.stateSince)}.`,
    })
  }
  if (facts.state !== 'issued') return found
  for (const test of facts.tests) {
    if (test.state !== 'overdue' || test.nextDueAt === null) continue
    const at = test.place === '' ? '' : ` at ${test.place}`
    found.push({
      kind: 'test-overdue',
      startedAt: test.nextDueAt,
      what: `${test.kind}:${test.place.slice(0, 40)}`,
      text: `${facts.number} (${place}): the test “${PERMIT_TEST_LABELS[test.kind]}”${at} was due again at ${when(test.nextDueAt)}.`,
    })
  }
  return found
}

function heatedKind(facts: DangerFacts): (typeof HEATED_KINDS)[number] | null {
  if (facts.heating.on !== true || facts.state === 'issued' || facts.coveredByOther) return null
  if (facts.state === 'suspended') return 'suspended-while-heated'
  return facts.state === 'expired' ? 'expired-while-heated' : 'heating-without-live-permit'
}

function heatedText(
  kind: SafetyEventKind,
  { number, state, stateSince }: DangerFacts,
  place: string,
  when: (at: Date) => string,
): string {
  if (number === null) return `${place} is heated and no permit for it is under way.`
  if (kind === 'expired-while-heated')
    return `${number} ran out at ${when(stateSince)} while ${place} was heated.`
  if (kind === 'suspended-while-heated') {
    return `${number} has been suspended since ${when(stateSince)} while ${place} is heated.`
  }
  return `${place} is heated and ${number} is not live (${PERMIT_STATE_LABELS[state].toLowerCase()}).`
}

/** An event that stands open. */
export interface OpenEvent {
  id: number
  kind: SafetyEventKind
  occurrenceKey: string
}

/** The name of an occurrence: found again, it is the same event. */
export function occurrenceKey(subject: string, danger: Danger): string {
  return [danger.kind, subject, danger.startedAt.toISOString(), danger.what]
    .filter((part) => part !== '')
    .join(':')
}

/**
 * What has to be written down and what has ended.
 *
 * Events of heat end when the heating is known to be off or a permit is live; not knowing ends nothing.
 */
export function settleEvents(
  facts: DangerFacts,
  open: readonly OpenEvent[],
  dangers: readonly Danger[],
): { begin: Danger[]; end: { id: number; why: string }[] } {
  const subject = facts.number ?? facts.segments.join('+')
  const stands = (danger: Danger) =>
    open.some((event) =>
      danger.kind === 'test-overdue'
        ? event.occurrenceKey === occurrenceKey(subject, danger)
        : event.kind === danger.kind,
    )
  const begin = dangers.filter((danger) => !stands(danger))
  const end = open.flatMap((event) => {
    const why = whyEnded(event, facts, dangers, subject)
    return why === null ? [] : [{ id: event.id, why }]
  })
  return { begin, end }
}

function whyEnded(
  event: OpenEvent,
  facts: DangerFacts,
  dangers: readonly Danger[],
  subject: string,
): string | null {
  if (HEATED_KINDS.some((kind) => kind === event.kind)) {
    if (facts.heating.on === false) return facts.heating.text
    if (facts.state === 'issued') return `${facts.number} is live.`
    return facts.coveredByOther ? 'Another permit answers for it.' : null
  }
  if (event.kind === 'low-oxygen' || event.kind === 'high-oxygen') return null
  const still = dangers.some((danger) =>
    event.kind === 'test-overdue'
      ? occurrenceKey(subject, danger) === event.occurrenceKey
      : danger.kind === event.kind,
  )
  if (still) return null
  if (event.kind === 'test-overdue' && facts.state === 'issued') return 'The test has been taken.'
  return `${facts.number} is ${PERMIT_STATE_LABELS[facts.state].toLowerCase()}.`
}
