/**
 * The whole story of a permit in plain sentences: what was done to it, its locks, tests, rounds and rulings, what was
 * tried and not allowed, and what was dangerous, in the order in which it happened.
 */

import type { PermitDifference } from './permit-differences.ts'
import {
  type LockRemoval,
  PERMIT_TEST_LABELS,
  type PermitAct,
  type PermitState,
  type PermitTestKind,
  type SafetyEventKind,
} from './permit-words.ts'

/** A name, or null where the product itself acted. */
type Who = string | null

export type StoryEvent = { at: Date; recordedAt?: Date; signed?: boolean } & (
  | {
      kind: 'act'
      act: PermitAct
      fromState: PermitState
      toState: PermitState
      who: Who
      reason: string
      /** What the act needed besides, in words. */
      details: readonly string[]
      revision: number
      version: number
      /** What this version says otherwise than the one before it. */
      differences: readonly PermitDifference[]
    }
  | { kind: 'lock-on'; tag: string; isolates: string; lock: string; who: string; witness: Who }
  | { kind: 'lock-verified'; tag: string; lock: string; who: string; witness: Who; found: string }
  | { kind: 'lock-off'; tag: string; lock: string; who: string; witness: Who; how: LockRemoval; note: string }
  | { kind: 'box-on'; box: string; lock: string; who: string; witness: Who; primary: boolean }
  | { kind: 'box-off'; box: string; lock: string; owner: string; who: string; witness: Who; how: LockRemoval }
  | {
      kind: 'test'
      test: PermitTestKind
      place: string
      result: string
      passed: boolean
      instrument: string
      who: string
      witness: Who
      note: string
    }
  | {
      kind: 'round'
      who: string
      hottestC: number | null
      atM: number | null
      inOrder: boolean
      text: string
    }
  | { kind: 'ruling'; who: string; allowed: boolean; facts: string; text: string }
  | { kind: 'attempt'; who: Who; what: string; reason: string }
  | { kind: 'danger'; event: SafetyEventKind; text: string }
  | { kind: 'danger-over'; event: SafetyEventKind; who: Who; reason: string }
  | { kind: 'danger-tolerated'; event: SafetyEventKind; who: Who; reason: string }
  | { kind: 'heating'; on: boolean; segment: string; who: string; how: string }
  | { kind: 'photo'; who: string; name: string }
)

export interface StoryLine {
  at: Date
  /** When it was written down, where that was noticeably later; null otherwise. */
  recordedAt: Date | null
  text: string
  /** Reason, findings and differences, a line each. */
  more: string[]
  signed: boolean
  /** The permit's revision after it; null for what is no act on the permit itself. */
  revision: number | null
  /** `stop`: work stopped or may not go on. `bad`: something that must not have happened. */
  tone: 'plain' | 'stop' | 'bad'
}

/** Written down later than this after it happened, both times are told. */
const LATE_MS = 60_000

/** The product's own name, where no person acted. */
const PRODUCT = 'Ebbline'

/** Sentences, oldest first. Events of the same instant stay in the order given. */
export function permitStory(events: readonly StoryEvent[]): StoryLine[] {
  return events
    .toSorted((a, b) => a.at.getTime() - b.at.getTime())
    .map((event) => {
      const late = event.recordedAt !== undefined && event.recordedAt.getTime() - event.at.getTime() > LATE_MS
      return {
        at: event.at,
        recordedAt: late ? (event.recordedAt ?? null) : null,
        text: sentence(event),
        more: more(event),
        signed: event.signed ?? false,
        revision: event.kind === 'act' ? event.revision : null,
        tone: toneOf(event),
      }
    })
}

function toneOf(event: StoryEvent): StoryLine['tone'] {
  switch (event.kind) {
    case 'act':
      if (event.act === 'expire') return 'bad'
      return STOPPING.includes(event.act) ? 'stop' : 'plain'
    case 'attempt':
    case 'danger':
      return 'bad'
    case 'danger-tolerated':
      return 'stop'
    case 'test':
      return event.passed ? 'plain' : 'bad'
    case 'round':
      return event.inOrder ? 'plain' : 'stop'
    case 'lock-off':
    case 'box-off':
      return event.how === 'owner-absent' ? 'stop' : 'plain'
    default:
      return 'plain'
  }
}

const STOPPING: readonly PermitAct[] = [
  'suspend',
  'return',
  'refuse',
  'return-to-holder',
  'withdraw',
  'lapse',
]

function sentence(event: StoryEvent): string {
  switch (event.kind) {
    case 'act':
      return actSentence(event)
    case 'lock-on':
      return `${by(event)} hung lock ${event.lock} on ${event.tag} (${event.isolates}).`
    case 'lock-verified':
      return `${by(event)} verified ${event.tag}, held by lock ${event.lock}.`
    case 'lock-off':
      return lockOffSentence(event)
    case 'box-on':
      return `${by(event)} put lock ${event.lock} on box ${event.box}${event.primary ? ' as the first of the crew' : ''}.`
    case 'box-off':
      return boxOffSentence(event)
    case 'test':
      return testSentence(event)
    case 'round':
      return roundSentence(event)
    case 'ruling':
      return `${event.who} ruled that this ${event.allowed ? 'may go on' : 'may not go on'}: ${event.facts}`
    case 'attempt':
      return `${event.who ?? PRODUCT} tried to ${event.what} and was not let.`
    case 'danger':
      return `Danger noted (${EVENT_WORDS[event.event]}): ${event.text}`
    case 'danger-over':
      return `Danger over (${EVENT_WORDS[event.event]})${event.who === null ? '' : `, ended by ${event.who}`}.`
    case 'danger-tolerated':
      return `${event.who ?? PRODUCT} wrote why this goes on for now (${EVENT_WORDS[event.event]}).`
    case 'heating':
      return `${event.who} recorded the heating of ${event.segment} as ${event.on ? 'on' : 'off'}.`
    case 'photo':
      return `${event.who} added the picture ${event.name}.`
  }
}

/** Somebody, and who entered the step for them where they have no log-in. */
function by({ who, witness }: { who: string; witness: Who }): string {
  return witness === null ? who : `${who} (witnessed and entered by ${witness})`
}

function lockOffSentence(event: Extract<StoryEvent, { kind: 'lock-off' }>): string {
  const { lock, tag, how } = event
  if (how === 'transferred') return `${by(event)} handed lock ${lock} on ${tag} over to another permit.`
  if (how === 'owner-absent') return `${by(event)} removed lock ${lock} from ${tag} while its owner was away.`
  return `${by(event)} took lock ${lock} off ${tag}.`
}

function boxOffSentence(event: Extract<StoryEvent, { kind: 'box-off' }>): string {
  const { lock, box, how, owner } = event
  if (how === 'owner-absent') {
    return `${by(event)} removed ${owner}’s lock ${lock} from box ${box} while ${owner} was away.`
  }
  return `${by(event)} took lock ${lock} off box ${box}.`
}

function testSentence(event: Extract<StoryEvent, { kind: 'test' }>): string {
  const { test, place, result, passed, instrument } = event
  const where = place === '' ? '' : ` at ${place}`
  const what = result === '' ? '' : `, ${result}`
  const used = instrument === '' ? '' : ` (instrument ${instrument})`
  return `${by(event)} tested${where}: ${PERMIT_TEST_LABELS[test]}${what}${used}: ${passed ? 'passed' : 'not passed'}.`
}

function roundSentence({ who, hottestC, atM, inOrder }: Extract<StoryEvent, { kind: 'round' }>): string {
  const hottest =
    hottestC === null ? '' : `, hottest surface ${hottestC} °C${atM === null ? '' : ` at ${atM} m`}`
  return `${who} made a round${hottest}: ${inOrder ? 'in order' : 'not in order'}.`
}

const EVENT_WORDS: Record<SafetyEventKind, string> = {
  'heating-without-live-permit': 'heated without a live permit',
  'expired-while-heated': 'ran out while heated',
  'suspended-while-heated': 'suspended while heated',
  'permit-suspended': 'suspended',
  'low-oxygen': 'low oxygen',
  'high-oxygen': 'too much oxygen',
  'test-overdue': 'a test is overdue',
  'revalidation-missed': 'not revalidated in time',
}

function actSentence(event: Extract<StoryEvent, { kind: 'act' }>): string {
  const who = event.who ?? PRODUCT
  switch (event.act) {
    case 'draft':
      return `${who} began the draft.`
    case 'edit':
      return `${who} saved version ${event.version}.`
    case 'request':
      return `${who} asked for the permit with version ${event.version}.`
    case 'return':
      return `${who} sent it back for a change.`
    case 'refuse':
      return `${who} refused it.`
    case 'approve':
      return `${who} approved version ${event.version}, in principle and for its window.`
    case 'change-terms':
      return event.fromState === 'approved'
        ? `${who} changed the terms: the approval is void, and version ${event.version} waits for an officer.`
        : `${who} changed the terms in version ${event.version}, which waits for an officer.`
    case 'withdraw':
      return `${who} withdrew it before work began.`
    case 'discard':
      return `${who} threw the draft away.`
    case 'lapse':
      return 'It lapsed: nobody had taken it up in time.'
    case 'site-check':
      return `${who} checked the site with its barriers in place.`
    case 'accept':
      return `${who} accepted it on site. It was live from then on.`
    case 'hand-over':
      return `${who} took it over as holder.`
    case 'revalidate':
      return `${who} revalidated it on site.`
    case 'extend':
      return `${who} extended the window.`
    case 'suspend':
      return `${who} stopped the work: suspended.`
    case 'made-safe':
      return `${who} recorded how it was made safe.`
    case 'resume':
      return `${who} let the work go on: live again, with its validity as it was.`
    case 'expire':
      return 'It ran out and can never be live again.'
    case 'hand-back':
      return event.fromState === 'expired'
        ? `${who} handed it back, after it had run out.`
        : `${who} handed it back.`
    case 'return-to-holder':
      return `${who} inspected the site and gave it back to the holder: suspended.`
    case 'cancel':
      return `${who} inspected the site and cancelled it. It has ended.`
  }
}

function more(event: StoryEvent): string[] {
  switch (event.kind) {
    case 'act':
      return [
        ...(event.reason === '' ? [] : [`Reason: ${event.reason}`]),
        ...event.details,
        ...event.differences.map(differenceText),
      ]
    case 'lock-verified':
      return event.found === '' ? [] : [event.found]
    case 'lock-off':
    case 'test':
      return event.note === '' ? [] : [event.note]
    case 'round':
    case 'ruling':
      return event.text === '' ? [] : [event.text]
    case 'attempt':
      return event.reason === '' ? [] : [`Why not: ${event.reason}`]
    case 'danger-over':
    case 'danger-tolerated':
      return event.reason === '' ? [] : [`Reason: ${event.reason}`]
    case 'heating':
      return event.how === '' ? [] : [`Known by: ${event.how}`]
    default:
      return []
  }
}

function differenceText({ label, before, after }: PermitDifference): string {
  if (before === '') return `${label}: now “${after}”, nothing before`
  if (after === '') return `${label}: no longer “${before}”`
  return `${label}: “${before}” became “${after}”`
}
