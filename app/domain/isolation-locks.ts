/**
 * Rules of isolation points and their locks. Pure: each rule takes what is known and gives every reason against a step
 * at once, each with the way out; none means that the step may be taken. Persons are compared as persons, whatever
 * their roles.
 *
 * The order is the lockout rule's: apply, release what is stored, verify; and a lock is taken away by whoever put it
 * there (US 29 CFR 1910.147(d) to (f); from memory, not verified).
 */
import type { HeatingFact, PointFact } from './permit-facts.ts'
import {
  ENDED_PERMIT_STATES,
  PERMIT_STATE_LABELS,
  type PermitState,
  type PointPurpose,
} from './permit-words.ts'

/** What a rule has to know of a permit. */
export interface LockPermit {
  number: string
  state: PermitState
  approvedBy: number | null
}

/** A point as the permit asks for it. */
interface AskedPoint {
  tag: string
  isolates: string
  required: string
  purpose: PointPurpose
  boxed: boolean
}

/** One application of a lock at a point of a permit. */
export interface PointLock {
  id: number
  permit: string
  tag: string
  isolates: string
  required: string
  purpose: PointPurpose
  lockNumber: string
  appliedBy: number
  appliedWitness: number | null
  verifiedBy: number | null
  verifiedWitness: number | null
  removed: boolean
}

/** Where a lock number hangs at this moment. */
export interface LockUse {
  permit: string
  /** The point's tag, or the code of the lock box. */
  place: string
  /** Since when, in words. */
  since: string
}

export interface LockPerson {
  personId: number
  name: string
  /** Whether they can sign in and enter their own step. */
  signsIn: boolean
}

/** Who does the step, and who signs for it having entered it: the same person, or a witness of somebody without a log-in. */
export interface Doers {
  by: LockPerson
  signer: LockPerson
}

/** How a lock number is written: letters, a dash, figures. Uniqueness rests on everybody writing it in one way. */
export function lockNumberOf(typed: string): string {
  const text = typed.trim().toUpperCase().replaceAll(/\s+/g, ' ')
  const parts = /^([A-Z]+)[ ._–-]*(\d+)$/.exec(text)
  return parts === null ? text : `${parts[1]}-${parts[2]}`
}

/** Locks are put on in these states: the points are agreed, and nothing is over yet. */
const APPLY_STATES: readonly PermitState[] = ['approved', 'issued', 'suspended', 'expired', 'handed-back']
/** A lock goes over only to a permit in one of these. */
const TAKES_OVER: readonly PermitState[] = ['approved', 'issued', 'suspended']

function stateWord(state: PermitState): string {
  return PERMIT_STATE_LABELS[state].toLowerCase()
}

/** Whether two points are the same device in the same position, whatever each permit calls them. */
export function samePoint(
  a: { isolates: string; required: string },
  b: { isolates: string; required: string },
): boolean {
  const plain = (text: string) => text.trim().toLowerCase().replaceAll(/\s+/g, ' ')
  return plain(a.isolates) === plain(b.isolates) && plain(a.required) === plain(b.required)
}

/** Whether a lock holds: it hangs, and somebody else has verified that it isolates. */
export function holds(lock: PointLock): boolean {
  return !lock.removed && lock.verifiedBy !== null
}

/** Refusals of a step entered for somebody else. Nobody signs as somebody else; a witness says what they saw done. */
export function witnessRefusals({ by, signer }: Doers, approvedBy: number | null): string[] {
  if (by.personId === signer.personId) return []
  const refusals: string[] = []
  if (by.signsIn) {
    refusals.push(
      `${by.name} has a log-in and signs their own step. Ask ${by.name} to sign in here; a witness enters only what people without a log-in have done.`,
    )
  }
  if (signer.personId === approvedBy) {
    refusals.push(
      'You approved this permit and cannot be a witness on it. Ask somebody else who saw it done.',
    )
  }
  return refusals
}

export interface ApplyFacts extends Doers {
  permit: LockPermit
  /** Undefined when the permit does not list the point. */
  point: AskedPoint | undefined
  tag: string
  lockNumber: string
  /** All locks of the permit, removed ones too. */
  locks: readonly PointLock[]
  inUse: LockUse | null
  /** Personal locks on the box at this moment. */
  onBox: number
}

/** Why a lock cannot be put on a point. */
export function applyRefusals(facts: ApplyFacts): string[] {
  const { permit, point, tag, lockNumber, locks, inUse, onBox } = facts
  const refusals: string[] = []
  if (!APPLY_STATES.includes(permit.state)) {
    refusals.push(
      ENDED_PERMIT_STATES.includes(permit.state)
        ? `${permit.number} is ${stateWord(permit.state)}; nothing is locked for it any more. Lock the point for the permit that needs it.`
        : `${permit.number} is ${stateWord(permit.state)}: its points are not agreed yet. Locks go on once it is approved.`,
    )
  }
  if (point === undefined) {
    refusals.push(`${permit.number} does not list a point ${tag}. Change its terms to add one.`)
  }
  const there = locks.find((lock) => lock.tag === tag && !lock.removed)
  if (there !== undefined) {
    refusals.push(
      `${there.lockNumber} already hangs at ${tag}; a point takes one lock. Its owner takes it away first.`,
    )
  }
  const use = lockInUseRefusal(lockNumber, inUse)
  if (use !== null) refusals.push(use)
  if (point?.boxed === true && onBox > 0) {
    refusals.push(
      `The key of ${tag} belongs in the lock box, and ${onBox} personal ${onBox === 1 ? 'lock is' : 'locks are'} on it. They come off first.`,
    )
  }
  return [...refusals, ...witnessRefusals(facts, permit.approvedBy)]
}

/** A lock hangs in one place on the whole site; where it already does. */
export function lockInUseRefusal(lockNumber: string, inUse: LockUse | null): string | null {
  if (inUse === null) return null
  return `${lockNumber} hangs at ${inUse.place} for ${inUse.permit} since ${inUse.since}. A lock can be in one place only: read its number again, or take another lock.`
}

export interface VerifyFacts extends Doers {
  permit: LockPermit
  lock: PointLock
}

/** Why a lock cannot be verified by this person. */
export function verifyRefusals(facts: VerifyFacts): string[] {
  const { permit, lock, by, signer } = facts
  const refusals: string[] = []
  if (lock.removed) {
    return [`${lock.lockNumber} has been taken away from ${lock.tag}. Apply a lock before it is verified.`]
  }
  if (lock.verifiedBy !== null) {
    return [`${lock.lockNumber} at ${lock.tag} is verified already.`]
  }
  if (!APPLY_STATES.includes(permit.state)) {
    refusals.push(
      `${permit.number} is ${stateWord(permit.state)}. Points are verified from its approval until its end.`,
    )
  }
  const applied = [lock.appliedBy, lock.appliedWitness]
  if (applied.includes(by.personId)) {
    refusals.push(
      lock.appliedBy === by.personId
        ? `${by.name} applied ${lock.lockNumber}; somebody else verifies it. Ask another person to try the point.`
        : `${by.name} entered the application of ${lock.lockNumber} as its witness; somebody else verifies it.`,
    )
  }
  if (by.personId === permit.approvedBy) {
    refusals.push(
      `${by.name} approved this permit and verifies none of its points. Ask the holder or a colleague.`,
    )
  }
  if (by.personId !== signer.personId && applied.includes(signer.personId)) {
    refusals.push(
      `You had a hand in applying ${lock.lockNumber}, so you cannot enter its verification. Ask somebody else who saw it.`,
    )
  }
  return [...refusals, ...witnessRefusals(facts, permit.approvedBy)]
}

export interface RemoveFacts extends Doers {
  permit: LockPermit
  lock: PointLock
  /** All locks of the permit. */
  locks: readonly PointLock[]
  /** Whether the key lies in the lock box, and how many personal locks are on it. */
  boxed: boolean
  onBox: number
  heating: Pick<HeatingFact, 'on'>
  how: 'owner' | 'owner-absent'
  /** Whether the signer may have somebody else's lock cut or opened, see the permission permit:clear-lock. */
  mayClear: boolean
  ownerName: string
}

/** Why a lock cannot be taken away, by its owner or by the written procedure for an owner who is not there. */
export function removeRefusals(facts: RemoveFacts): string[] {
  const { permit, lock, by, signer, how, ownerName } = facts
  if (lock.removed) return [`${lock.lockNumber} has been taken away from ${lock.tag} already.`]
  const refusals = [...loadRefusals(facts), ...boxedRefusals(facts)]
  if (how === 'owner-absent') {
    if (signer.personId === lock.appliedBy) {
      refusals.push(`${lock.lockNumber} is your own lock. Take it away as its owner.`)
    }
    if (!facts.mayClear) {
      refusals.push(
        `Taking away a lock whose owner is not there is signed by a safety officer or an engineer. ${lock.lockNumber} is ${ownerName}'s.`,
      )
    }
    return refusals
  }
  if (by.personId !== lock.appliedBy) {
    refusals.push(
      `${lock.lockNumber} is ${ownerName}'s lock, and only ${ownerName} takes it away. If they cannot come, an officer or engineer follows the written procedure for an absent owner.`,
    )
  } else if (by.personId !== signer.personId && signer.personId === lock.verifiedBy) {
    refusals.push(
      `You verified ${lock.lockNumber} and cannot be the witness of its removal. Ask somebody else who saw it.`,
    )
  }
  return [...refusals, ...witnessRefusals(facts, permit.approvedBy)]
}

/**
 * What rests on a lock. One that keeps something from moving or being fed while the segment is heated stays on as long
 * as the permit is live, and afterwards until heating is known to be off: the acceptance was signed on the strength of
 * it, and "not known" is not "off". One that keeps heating energy from people stays while the heating is said to be on,
 * since lock and word contradict each other; otherwise its owner may take it away, or heating could never begin again.
 * Where a second verified lock holds the same point, nothing rests on the first.
 */
function loadRefusals({ permit, lock, locks, heating }: RemoveFacts): string[] {
  if (locks.some((other) => other.id !== lock.id && other.tag === lock.tag && holds(other))) return []
  const { state, number } = permit
  if (lock.purpose === 'to-work') {
    return heating.on === true
      ? [
          `${lock.lockNumber} keeps heating energy away from people, yet heating is recorded as on. Find out which is true and state it first.`,
        ]
      : []
  }
  if (state === 'issued') {
    return [
      `${number} is live and rests on ${lock.tag}. Hand it back or suspend it first; if the lock is off already, suspend it now.`,
    ]
  }
  if (heating.on === true) {
    return [
      `Heating is recorded as on and ${lock.tag} holds what must not move or be fed meanwhile. Switch it off and record that, or transfer the lock to the permit under which heating goes on.`,
    ]
  }
  const everHeated = state !== 'approved' && !ENDED_PERMIT_STATES.includes(state)
  if (everHeated && heating.on === null) {
    return [
      `Nobody has recorded whether heating is off, and unknown is not off. State it, with how you know, and then take ${lock.lockNumber} away.`,
    ]
  }
  return []
}

function boxedRefusals({ lock, boxed, onBox }: { lock: PointLock; boxed: boolean; onBox: number }): string[] {
  if (!boxed || onBox === 0) return []
  return [
    `The key of ${lock.lockNumber} lies in the lock box, and ${onBox} personal ${onBox === 1 ? 'lock is' : 'locks are'} on it. Everybody takes their own off first.`,
  ]
}

export interface TransferFacts {
  permit: LockPermit
  lock: PointLock
  locks: readonly PointLock[]
  boxed: boolean
  onBox: number
  to: LockPermit
  /** The other permit's points. */
  toPoints: readonly AskedPoint[]
  signer: LockPerson
  owner: LockPerson
  mayClear: boolean
}

/** The point of the other permit that is the same as the lock's, if it lists one. */
export function pointToTakeOver(lock: PointLock, toPoints: readonly AskedPoint[]): AskedPoint | undefined {
  return toPoints.find((point) => samePoint(point, lock))
}

/**
 * Why a lock cannot go over to another permit. It stays where it hangs and stays its owner's; what changes is for which
 * permit. The other permit has it verified anew, since its approver and holder are others.
 */
export function transferRefusals(facts: TransferFacts): string[] {
  const { permit, lock, locks, to, signer, owner } = facts
  if (lock.removed) return [`${lock.lockNumber} has been taken away from ${lock.tag} already.`]
  const refusals = boxedRefusals(facts)
  if (to.number === permit.number) {
    refusals.push(`${lock.lockNumber} hangs for ${permit.number} already. Name another permit.`)
  }
  const held = locks.some((other) => other.id !== lock.id && other.tag === lock.tag && holds(other))
  if (permit.state === 'issued' && !held) {
    refusals.push(
      `${permit.number} is live and rests on ${lock.tag}. Its lock goes over once it is suspended or handed back.`,
    )
  }
  if (!TAKES_OVER.includes(to.state)) {
    refusals.push(
      `${to.number} is ${stateWord(to.state)}; a lock goes over to a permit that is approved, issued or suspended.`,
    )
  }
  if (pointToTakeOver(lock, facts.toPoints) === undefined) {
    refusals.push(
      `${to.number} does not list “${lock.isolates}” as ${lock.required}. Only a permit with the same point in the same position takes the lock over.`,
    )
  }
  if (signer.personId !== owner.personId && !facts.mayClear) {
    refusals.push(...witnessRefusals({ by: owner, signer }, permit.approvedBy))
  }
  return refusals
}

/** What the permit's rules are told of each point: the lock that holds it, else the one that hangs, else the last. */
export function pointFacts(points: readonly { tag: string }[], locks: readonly PointLock[]): PointFact[] {
  return points.map(({ tag }) => {
    const own = locks.filter((lock) => lock.tag === tag).toSorted((a, b) => a.id - b.id)
    const lock = own.find(holds) ?? own.find(({ removed }) => !removed) ?? own.at(-1)
    if (lock === undefined) {
      return { tag, lockNumber: null, appliedBy: null, verifiedBy: null, holds: false, removed: false }
    }
    return {
      tag,
      lockNumber: lock.lockNumber,
      appliedBy: lock.appliedBy,
      verifiedBy: lock.verifiedBy,
      holds: holds(lock),
      removed: lock.removed,
    }
  })
}
