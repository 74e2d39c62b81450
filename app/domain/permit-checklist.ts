/**
 * What stands in the way of a permit's next step, judged by the rules of domain/permit-guards.ts themselves. Nothing
 * here can be ticked: a thing is done when it has been done and written down.
 */

import { stateAsOf } from './permit-clock.ts'
import type { PermitFacts } from './permit-facts.ts'
import {
  conflictsRuled,
  type Guard,
  heatingNotOn,
  isolationVerified,
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
  validityLeft,
  windowInOrder,
  windowOpen,
} from './permit-guards.ts'

export interface CheckItem {
  text: string
  /** `not-set`: the site has not adopted a value that this rests on. */
  status: 'done' | 'not-done' | 'not-set'
  /** What exactly is missing, and the way out. */
  missing: string[]
}

export interface Checklist {
  title: string
  items: CheckItem[]
}

const FORM: readonly [string, Guard] = ['Every section says what it has to', nothingMissing]
const WINDOW: readonly [string, Guard] = ['The window is in order', windowInOrder]
const TUBE: readonly [string, Guard] = ['The records show that the tube may be baked', tubePrepared]
const POINTS: readonly [string, Guard] = [
  'Isolation points are locked, and verified by a second person',
  isolationVerified,
]
const TESTS: readonly [string, Guard] = ['Tests are good and in date', testsInDate]
const BLOCKS: readonly [string, Guard] = ['Nothing on the line blocks it', noBlockingConflict]
const HEATING: readonly [string, Guard] = ['Heating is not recorded as on', heatingNotOn]

/** The list for a permit's next step at an instant; null where no step with conditions is ahead. */
export function permitChecklist(facts: PermitFacts, now: Date): Checklist | null {
  const list = (title: string, ...rules: readonly (readonly [string, Guard])[]): Checklist => ({
    title,
    items: rules.map(([text, guard]) => itemOf(text, guard, facts, now)),
  })
  switch (stateAsOf(facts.permit, now).state) {
    case 'draft':
    case 'returned':
      return list('Before it is asked for', FORM, WINDOW, TUBE)
    case 'requested':
      return list(
        'Before it is approved',
        FORM,
        WINDOW,
        TUBE,
        ['Cautions rest on values that this site has adopted', thresholdsAdopted],
        BLOCKS,
        ['An officer has ruled on each conflict that needs it', conflictsRuled],
      )
    case 'approved':
      return list(
        'Before it may be live',
        ['The window is open', windowOpen],
        TUBE,
        ['The site has been checked since the approval', siteCheckedSinceApproval],
        POINTS,
        TESTS,
        BLOCKS,
      )
    case 'issued':
      return list('While it is live', POINTS, TESTS, BLOCKS)
    case 'suspended':
      return list(
        'Before the work goes on',
        ['It has been made safe', madeSafe],
        ['Some of its validity is left', validityLeft],
        ['The site has been checked since the stop', siteCheckedSinceSuspension],
        ['Tests have been repeated since the stop', testsSinceSuspension],
        POINTS,
      )
    case 'expired':
      return list('Before it is handed back', HEATING)
    case 'handed-back':
      return list('Before it is cancelled', HEATING, ['No lock hangs for it any more', noLocksOut])
    default:
      return null
  }
}

function itemOf(text: string, guard: Guard, facts: PermitFacts, now: Date): CheckItem {
  const reasons = guard(facts, now)
  return {
    text,
    status:
      reasons.length === 0
        ? 'done'
        : reasons.every(({ code }) => code === 'not-adopted')
          ? 'not-set'
          : 'not-done',
    missing: reasons.map(({ text: why }) => why),
  }
}

/** Asked for on the page of a stopped permit, and kept with it; an officer may resume on a re-check all the same. */
function madeSafe(facts: PermitFacts): ReturnType<Guard> {
  const since = suspendedSince(facts)
  const done = facts.acts.some(({ act, at }) => act === 'made-safe' && (since === null || at >= since))
  return done
    ? []
    : [
        {
          kind: 'condition',
          code: 'made-safe',
          text: 'Nobody has written down how it was made safe, and when.',
        },
      ]
}
