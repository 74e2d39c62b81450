/** Whether a permit waits for a person, and for what: what stands on top of the register and counts beside its name. */
import { stateAsOf } from './permit-clock.ts'
import type { PermitContent } from './permit-content.ts'
import type { PermitState } from './permit-words.ts'

/** Current validity that ends sooner than this asks for a revalidation now, hours. */
const SOON_HOURS = 3
/** An approved permit is announced to its holder so long before its window begins, hours. */
const AHEAD_HOURS = 24
const HOUR_MS = 3_600_000

/** What of a permit decides on it. */
export interface WaitingPermit {
  state: PermitState
  createdBy: number
  requestedBy: number | null
  holderId: number | null
  windowFrom: Date | null
  windowTo: Date | null
  currentUntil: Date | null
  content: Pick<PermitContent, 'holderId' | 'deputyIds'>
  /** Everybody who wrote a version of the bake plan it rests on. */
  plannerIds: readonly number[]
}

export interface WaitingActor {
  personId: number
  mayDraft: boolean
  mayApprove: boolean
}

/** What a permit waits for from this person at an instant, in words that follow its number; null for nothing. */
export function waitsFor(permit: WaitingPermit, actor: WaitingActor, now: Date): string | null {
  const { state } = stateAsOf(permit, now)
  return forOfficer(state, permit, actor) ?? forHands(state, permit, actor, now)
}

function forOfficer(state: PermitState, permit: WaitingPermit, actor: WaitingActor): string | null {
  if (!actor.mayApprove) return null
  switch (state) {
    case 'requested':
      // Whoever had a hand in it decides nothing here: it waits for another officer.
      return isInvolved(permit, actor.personId) ? null : 'asks for your decision'
    case 'suspended':
      return 'is suspended: decide whether and when it goes on'
    case 'expired':
      return 'has run out: see that the heating is off and it is handed back'
    case 'handed-back':
      return 'is handed back: inspect the site, then cancel it or give it back'
    default:
      return null
  }
}

function forHands(state: PermitState, permit: WaitingPermit, actor: WaitingActor, now: Date): string | null {
  if (!actor.mayDraft) return null
  const { content } = permit
  const holder = permit.holderId ?? content.holderId
  const named = holder === actor.personId || content.deputyIds.includes(actor.personId)
  const asked = (permit.requestedBy ?? permit.createdBy) === actor.personId
  const hoursTo = (at: Date | null) =>
    at === null ? Number.POSITIVE_INFINITY : (at.getTime() - now.getTime()) / HOUR_MS
  if (state === 'returned' && asked) return 'came back to you for a change'
  if (!named) return null
  switch (state) {
    case 'approved':
      return hoursTo(permit.windowFrom) <= AHEAD_HOURS ? 'is approved: accept it on site' : null
    case 'issued':
      // At the end of its window it is handed back, and not revalidated.
      return hoursTo(permit.currentUntil) <= SOON_HOURS && !sameInstant(permit.currentUntil, permit.windowTo)
        ? 'wants to be revalidated on site'
        : hoursTo(permit.windowTo) <= SOON_HOURS
          ? 'is near the end of its window: hand it back'
          : null
    case 'suspended':
      return holder === actor.personId ? 'is suspended: see that it is safe' : null
    case 'expired':
      return 'has run out: heating off, then hand it back'
    default:
      return null
  }
}

function isInvolved(
  { createdBy, requestedBy, holderId, content, plannerIds }: WaitingPermit,
  id: number,
): boolean {
  const hands = [createdBy, requestedBy, holderId, content.holderId]
  return hands.includes(id) || content.deputyIds.includes(id) || plannerIds.includes(id)
}

function sameInstant(a: Date | null, b: Date | null): boolean {
  return a !== null && b !== null && a.getTime() === b.getTime()
}
