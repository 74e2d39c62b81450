/**
 * What time alone does to a permit. Elapsed time is counted in UTC, so a clock change neither shortens nor lengthens a
 * validity; an end belongs to what comes after it: at the very second a permit that runs until then has run out.
 */
import type { PermitState } from './permit-words.ts'

/** An approved permit that nobody has taken up so long after the beginning of its window lapses. */
export const TAKE_UP_HOURS = 2

const HOUR_MS = 3_600_000

/** The times of a permit that decide on its state. */
export interface PermitTimes {
  state: PermitState
  windowFrom: Date | null
  windowTo: Date | null
  currentUntil: Date | null
}

/** Something that the product does to a permit by itself, because a time has passed. */
export interface DueAct {
  act: 'expire' | 'lapse'
  toState: 'expired' | 'lapsed'
  /** When it is due: the act takes effect then, whenever it is noticed. */
  at: Date
  /** For an expiry: whether the window itself has ended, or a revalidation was missed inside it. */
  because: 'window' | 'revalidation' | 'take-up'
}

/** What time will do to a permit next, whether or not it is due yet; null where time does nothing to it. */
export function nextDue(permit: PermitTimes): DueAct | null {
  if (permit.state === 'approved') {
    if (permit.windowFrom === null) return null
    const at = new Date(permit.windowFrom.getTime() + TAKE_UP_HOURS * HOUR_MS)
    return { act: 'lapse', toState: 'lapsed', at, because: 'take-up' }
  }
  if (permit.state !== 'issued' && permit.state !== 'suspended') return null
  const { windowTo, currentUntil } = permit
  if (currentUntil !== null && (windowTo === null || currentUntil < windowTo)) {
    return { act: 'expire', toState: 'expired', at: currentUntil, because: 'revalidation' }
  }
  return windowTo === null ? null : { act: 'expire', toState: 'expired', at: windowTo, because: 'window' }
}

/** What is due at an instant; null while nothing is. */
export function dueAct(permit: PermitTimes, now: Date): DueAct | null {
  const due = nextDue(permit)
  return due !== null && due.at <= now ? due : null
}

/**
 * The state a permit is in at an instant, also where the product has not yet written down that a time has passed.
 *
 * @returns the state; and what has become due and is not written down yet, or null
 */
export function stateAsOf(permit: PermitTimes, now: Date): { state: PermitState; due: DueAct | null } {
  const due = dueAct(permit, now)
  return { state: due?.toState ?? permit.state, due }
}
