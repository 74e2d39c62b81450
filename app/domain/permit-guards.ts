/** What must be true of a permit, its place and its plant for an act, whoever does it. */

import { TAKE_UP_HOURS } from './permit-clock.ts'
import { annexComplete, windowFault } from './permit-completeness.ts'
import { ATTENDED_HOURS, LONGEST_WINDOW_HOURS, UNATTENDED_HOURS } from './permit-content.ts'
import type { PermitFacts } from './permit-facts.ts'
import { hasApproved } from './permit-people.ts'
import { condition, type Reason, spanText } from './permit-reasons.ts'
import { PERMIT_TEST_LABELS } from './permit-words.ts'

const MOST_EXTENSIONS = 2
export const MOST_EXTENDED_HOURS = 72

const HOUR_MS = 3_600_000

export type Guard = (facts: PermitFacts, now: Date) => Reason[]

/** When a permit was last put into a state by another act than those that keep it there. */
function lastActAt(facts: PermitFacts, wanted: readonly PermitFacts['acts'][number]['act'][]): Date | null {
  return facts.acts.findLast(({ act }) => wanted.includes(act))?.at ?? null
}

/** Whether work has been done under this permit: it then ends by hand-back and inspection, in no other way. */
export function wasLive({ acts }: PermitFacts): boolean {
  return acts.some(({ act }) => act === 'accept')
}

function hasExpired({ acts }: PermitFacts): boolean {
  return acts.some(({ toState }) => toState === 'expired')
}

/** Since when a suspended permit is suspended. */
export function suspendedSince(facts: PermitFacts): Date | null {
  return lastActAt(facts, ['suspend', 'return-to-holder'])
}

/** Hours for which a permit is valid from the moment somebody signs for it on site. */
function validityHours(facts: PermitFacts): number {
  const content = facts.permit.approvedContent ?? facts.permit.content
  return annexComplete(content) ? UNATTENDED_HOURS : ATTENDED_HOURS
}

/** The end of the current validity that a signature now gives: never beyond the window. */
export function validityEnd(facts: PermitFacts, now: Date): Date {
  const end = now.getTime() + validityHours(facts) * HOUR_MS
  return new Date(Math.min(end, facts.permit.windowTo?.getTime() ?? end))
}

export function nothingMissing({ missing }: PermitFacts): Reason[] {
  return missing.map(({ text }) => condition('incomplete', `Still missing: ${text}`))
}

/** The window as the form says it: an end after the start, not too long, and a start that can still be met. */
export function windowInOrder(facts: PermitFacts, now: Date): Reason[] {
  const { from, to } = facts.permit.content
  // That one is missing is told by what the sections lack.
  if (from === null || to === null) return []
  const [start, end] = [new Date(from), new Date(to)]
  const fault = windowFault(start, end)
  // Also told by what the sections lack.
  const reasons: Reason[] =
    fault === null || facts.missing.some(({ field }) => field === 'to') ? [] : [condition('window', fault)]
  if (now.getTime() >= start.getTime() + TAKE_UP_HOURS * HOUR_MS) {
    reasons.push(
      condition(
        'window-past',
        `The window began ${spanText(now.getTime() - start.getTime())} ago, and a permit that is not taken up within ${TAKE_UP_HOURS} h lapses. Give a later start.`,
      ),
    )
  } else if (now >= end)
    reasons.push(condition('window-past', 'The window has ended already. Give a later one.'))
  const live = firstLiveAt(facts)
  if (live !== null) {
    // The same length as a permit that keeps its terms: the longest window and what it has been extended by.
    const most = LONGEST_WINDOW_HOURS + facts.permit.extendedHours
    if (end.getTime() - live.getTime() > most * HOUR_MS) {
      reasons.push(
        condition(
          'window-total',
          `This permit went live first ${spanText(now.getTime() - live.getTime())} ago; with new terms it cannot run longer than with the old ones. Shorten the window, or hand this permit back and ask for another.`,
        ),
      )
    }
  }
  return reasons
}

function firstLiveAt({ acts }: PermitFacts): Date | null {
  return acts.find(({ act }) => act === 'accept')?.at ?? null
}

export function thresholdsAdopted({ unadopted }: PermitFacts): Reason[] {
  return unadopted.map(({ text }) =>
    condition('not-adopted', `Not set by site: ${text} A safety officer adopts a value for this site first.`),
  )
}

/** No bake on an untested tube: what the bake plan needs from the records stands there today, not only when it was asked. */
export function tubePrepared({ unprepared }: PermitFacts): Reason[] {
  return unprepared.map(({ text }) => condition('unprepared', text))
}

export function noBlockingConflict({ conflicts }: PermitFacts): Reason[] {
  return conflicts
    .filter(({ effect }) => effect === 'block')
    .map(({ rule, text, wayOut }) => condition('conflict-block', `${rule}: ${text} ${wayOut}`))
}

/** Every conflict that an officer has to decide is decided, on the facts of now, and allowed. */
export function conflictsRuled({ conflicts }: PermitFacts): Reason[] {
  return conflicts
    .filter(
      ({ effect, ruling }) => effect === 'ruling' && (ruling === null || ruling.stale || !ruling.allowed),
    )
    .map(({ rule, text, wayOut, ruling }) => {
      const lacks =
        ruling === null
          ? 'An officer has not ruled on it yet.'
          : ruling.stale
            ? `${ruling.by} ruled on other facts; an officer rules anew.`
            : `${ruling.by} has ruled against it.`
      return condition('conflict-ruling', `${rule}: ${text} ${lacks} ${wayOut}`)
    })
}

export function windowOpen({ permit }: PermitFacts, now: Date): Reason[] {
  const { windowFrom, windowTo } = permit
  if (windowFrom === null || windowTo === null) {
    return [condition('no-window', 'The permit has no window. Ask an officer to approve one.')]
  }
  if (now < windowFrom) {
    const wait = spanText(windowFrom.getTime() - now.getTime())
    return [condition('too-early', `The window begins in ${wait}. Come back then.`)]
  }
  if (now >= windowTo) {
    const past = spanText(now.getTime() - windowTo.getTime())
    return [condition('too-late', `The window ended ${past} ago. Ask for a new permit.`)]
  }
  return []
}

/**
 * Every point that makes heating safe is locked and verified, by somebody other than who locked it and who approved.
 * Points that take the heating's energy away are for work afterwards or beside: their locks come off before it heats.
 */
export function isolationVerified(facts: PermitFacts): Reason[] {
  const content = facts.permit.approvedContent ?? facts.permit.content
  return content.points.flatMap(({ tag, purpose }): Reason[] => {
    if (purpose === 'to-work') return []
    const point =
      facts.points.find((each) => each.tag === tag && each.holds) ??
      facts.points.findLast((each) => each.tag === tag && !each.removed)
    if (point === undefined || point.lockNumber === null || point.appliedBy === null) {
      return [condition('isolation', `${tag} is not locked. Lock it and have somebody else verify it.`)]
    }
    if (!point.holds || point.verifiedBy === null) {
      return [condition('isolation', `${tag} is locked and not verified. Somebody else verifies it.`)]
    }
    if (point.verifiedBy === point.appliedBy) {
      return [condition('isolation', `${tag} was verified by who locked it. Somebody else has to verify it.`)]
    }
    if (hasApproved(facts, point.verifiedBy)) {
      return [
        condition(
          'isolation',
          `${tag} was verified by who approved this permit. Somebody else has to verify it.`,
        ),
      ]
    }
    return []
  })
}

/** Every test that the permit asks for has a good result that is not due again yet. */
export function testsInDate(facts: PermitFacts): Reason[] {
  return testFaults(facts, null)
}

function testFaults(facts: PermitFacts, since: Date | null): Reason[] {
  const content = facts.permit.approvedContent ?? facts.permit.content
  return content.tests.flatMap(({ kind, place, everyHours }): Reason[] => {
    const name = `${PERMIT_TEST_LABELS[kind]}${place === '' ? '' : ` at ${place}`}`
    const fact = facts.tests.find((each) => each.kind === kind && each.place === place)
    if (fact === undefined || fact.state === 'missing') {
      return [condition('test', `${name}: there is no result yet. Test it.`)]
    }
    if (fact.state === 'failed') {
      return [condition('test', `${name}: the last result is not good. Mend the cause and test again.`)]
    }
    if (fact.state === 'overdue') {
      return [condition('test', `${name}: the last good result is too old. Test again.`)]
    }
    if (since !== null && everyHours !== null && (fact.takenAt === null || fact.takenAt < since)) {
      return [condition('test', `${name}: the last result is from before work was stopped. Test again.`)]
    }
    return []
  })
}

/** Tests that are repeated have been repeated since work was stopped. */
export function testsSinceSuspension(facts: PermitFacts): Reason[] {
  return testFaults(facts, suspendedSince(facts))
}

function siteChecked(facts: PermitFacts, since: Date | null, when: string): Reason[] {
  const last = facts.acts.findLast(({ act, at }) => act === 'site-check' && (since === null || at >= since))
  if (last === undefined) {
    return [
      condition('site-check', `The site has not been checked since ${when}. Check barriers and signs first.`),
    ]
  }
  const detail = last.detail as { barriersPlaced?: boolean; signsPosted?: boolean } | null
  if (detail?.barriersPlaced === true && detail.signsPosted === true) return []
  return [
    condition(
      'site-check',
      'At the last site check barriers or signs were not in order. Mend that and check again.',
    ),
  ]
}

export function siteCheckedSinceApproval(facts: PermitFacts): Reason[] {
  return siteChecked(facts, lastActAt(facts, ['approve']), 'it was approved')
}

export function siteCheckedSinceSuspension(facts: PermitFacts): Reason[] {
  return siteChecked(facts, suspendedSince(facts), 'work was stopped')
}

/** A suspended permit goes on for what was left of its validity, and not at all when nothing is left. */
export function validityLeft({ permit }: PermitFacts, now: Date): Reason[] {
  const end = permit.currentUntil
  if (end !== null && now < end) return []
  return [
    condition(
      'validity-over',
      'The validity that was running when work stopped has ended; resuming gives no more time. Hand it back and ask for a new permit.',
    ),
  ]
}

/** A signature now makes the validity longer than it is. */
export function validityGains(facts: PermitFacts, now: Date): Reason[] {
  const { currentUntil, windowTo } = facts.permit
  if (currentUntil === null || windowTo === null || currentUntil < validityEnd(facts, now)) return []
  return [
    condition(
      'whole-window',
      'It is valid to the end of its window already. An officer can extend the window, where the site allows that.',
    ),
  ]
}

export function extensionAllowed({ permit, policy }: PermitFacts): Reason[] {
  const reasons: Reason[] = []
  if (!policy.extensionAllowed) {
    reasons.push(
      condition('policy', 'This site extends no permits. Hand it back in time and ask for a new permit.'),
    )
  }
  if (permit.extensions >= MOST_EXTENSIONS) {
    reasons.push(
      condition(
        'extensions',
        `It has been extended ${permit.extensions} times, which is the most. Hand it back in time and ask for a new permit.`,
      ),
    )
  }
  return reasons
}

/** Terms change while work is stopped and the heating is known to be off. */
export function heatingOffWhenSuspended({ permit, heating }: PermitFacts): Reason[] {
  if (permit.state !== 'suspended' || heating.on === false) return []
  return [
    condition(
      'heating',
      heating.on === null
        ? 'Nobody knows whether heating is off. Look, and have it written down; then change the terms.'
        : 'Heating is recorded as on. Switch it off and have that written down; then change the terms.',
    ),
  ]
}

export function heatingNotOn({ heating }: PermitFacts): Reason[] {
  if (heating.on !== true) return []
  return [condition('heating', 'Heating is recorded as on. Switch it off and have that written down first.')]
}

export function neverExpired(facts: PermitFacts): Reason[] {
  if (!hasExpired(facts)) return []
  return [
    condition(
      'expired-before',
      'This permit has run out once and is not brought back. Ask for a new permit.',
    ),
  ]
}

export function neverLive(facts: PermitFacts): Reason[] {
  if (!wasLive(facts)) return []
  return [
    condition(
      'was-live',
      'Work has been done under this permit: it ends when its holder hands it back and an officer has inspected the place. Return it with the reason, or have it handed back.',
    ),
  ]
}

export function noLocksOut({ locksOut }: PermitFacts): Reason[] {
  if (locksOut.length === 0) return []
  const many = locksOut.length === 1 ? 'One lock still hangs' : `${locksOut.length} locks still hang`
  return [
    condition(
      'locks-out',
      `${many} for this permit: ${locksOut.join(', ')}. Its owner removes it; or it goes by the written procedure for an owner who is away; or it is transferred to another permit by number.`,
    ),
  ]
}
