/**
 * The lock box of a permit: keys of its point locks lie inside, and everybody who relies on them has a lock of their own
 * on the box. As long as one personal lock is on, no key comes out. Pure rules, see isolation-locks.ts.
 */
import type { Doers, LockPermit, LockUse, PointLock } from './isolation-locks.ts'
import { holds, lockInUseRefusal, witnessRefusals } from './isolation-locks.ts'
import { ENDED_PERMIT_STATES } from './permit-words.ts'

export interface BoxLock {
  id: number
  boxCode: string
  lockNumber: string
  ownerId: number
  primary: boolean
  off: boolean
}

export interface BoxOnFacts extends Doers {
  permit: LockPermit
  boxCode: string
  lockNumber: string
  primary: boolean
  points: readonly { tag: string; boxed: boolean }[]
  locks: readonly PointLock[]
  box: readonly BoxLock[]
  inUse: LockUse | null
}

/** Why a personal lock cannot go on the box. The crew's first is that of their primary authorised person. */
export function boxOnRefusals(facts: BoxOnFacts): string[] {
  const { permit, boxCode, lockNumber, primary, by } = facts
  const on = facts.box.filter(({ off }) => !off)
  const first = on[0]
  const refusals: string[] = []
  if (ENDED_PERMIT_STATES.includes(permit.state) || permit.approvedBy === null) {
    refusals.push(`${permit.number} has no lock box in use: it is not approved, or over.`)
  }
  const boxed = facts.points.filter((point) => point.boxed)
  if (boxed.length === 0) {
    refusals.push('No point of this permit has its key in a lock box.')
  }
  const open = boxed.filter(({ tag }) => !facts.locks.some((lock) => lock.tag === tag && holds(lock)))
  if (open.length > 0) {
    refusals.push(
      `${open.map(({ tag }) => tag).join(', ')}: not locked and verified yet, so its key is not in the box. The box is closed when all keys are inside.`,
    )
  }
  if (first === undefined && !primary) {
    refusals.push('The crew’s primary authorised person puts their lock on first.')
  }
  if (first !== undefined && primary) {
    refusals.push(`${first.lockNumber} is the primary lock already; a box has one.`)
  }
  if (first !== undefined && first.boxCode !== boxCode) {
    refusals.push(`The keys of this permit lie in box ${first.boxCode}, not in ${boxCode}.`)
  }
  const own = on.find(({ ownerId }) => ownerId === by.personId)
  if (own !== undefined) refusals.push(`${by.name} has ${own.lockNumber} on the box already.`)
  const use = lockInUseRefusal(lockNumber, facts.inUse)
  if (use !== null) refusals.push(use)
  return [...refusals, ...witnessRefusals(facts, facts.permit.approvedBy)]
}

export interface BoxOffFacts extends Doers {
  lock: BoxLock
  box: readonly BoxLock[]
  permit: LockPermit
  how: 'owner' | 'owner-absent'
  mayClear: boolean
  ownerName: string
}

/** Why a personal lock cannot come off the box. The primary's comes off last. */
export function boxOffRefusals(facts: BoxOffFacts): string[] {
  const { lock, by, signer, ownerName } = facts
  if (lock.off) return [`${lock.lockNumber} is off the box already.`]
  const refusals: string[] = []
  const others = facts.box.filter(({ off, id }) => !off && id !== lock.id)
  if (lock.primary && others.length > 0) {
    refusals.push(
      `The primary lock comes off last. Still on the box: ${others.map(({ lockNumber }) => lockNumber).join(', ')}.`,
    )
  }
  if (facts.how === 'owner-absent') {
    if (signer.personId === lock.ownerId) {
      refusals.push(`${lock.lockNumber} is your own lock. Take it off as its owner.`)
    }
    if (!facts.mayClear) {
      refusals.push(
        `Taking off a lock whose owner is not there is signed by a safety officer or an engineer. ${lock.lockNumber} is ${ownerName}'s.`,
      )
    }
    return refusals
  }
  if (by.personId !== lock.ownerId) {
    refusals.push(
      `${lock.lockNumber} is ${ownerName}'s own lock, and only ${ownerName} takes it off. If they cannot come, an officer or engineer follows the written procedure for an absent owner.`,
    )
  }
  return [...refusals, ...witnessRefusals(facts, facts.permit.approvedBy)]
}
