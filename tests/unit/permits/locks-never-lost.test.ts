/**
 * A thousand random steps by random people at three permits. Beside the rules stands a world of its own: padlocks that
 * hang on devices. The record may never say that nothing hangs where something does, nor the other way round.
 */
import fc from 'fast-check'
import { expect, test } from 'vitest'
import {
  applyRefusals,
  holds,
  type LockPermit,
  type PointLock,
  pointFacts,
  pointToTakeOver,
  removeRefusals,
  transferRefusals,
  verifyRefusals,
} from '#app/domain/isolation-locks.ts'
import type { PermitState } from '#app/domain/permit-words.ts'

const PEOPLE = [
  { personId: 1, name: 'A', signsIn: true },
  { personId: 2, name: 'B', signsIn: true },
  { personId: 3, name: 'C', signsIn: true },
  { personId: 4, name: 'D', signsIn: false },
  { personId: 5, name: 'Officer', signsIn: true },
] as const
const APPROVER = 5
const DEVICES = ['NV-05', 'GV-04', 'BH-06']
/** The first ones come more often, or most steps would be refused. */
const STATES: readonly PermitState[] = [
  'approved',
  'suspended',
  'approved',
  'approved',
  'issued',
  'suspended',
  'expired',
  'handed-back',
  'cancelled',
]

const step = fc.record({
  what: fc.constantFrom('apply', 'apply', 'verify', 'remove', 'absent', 'transfer', 'state', 'heating'),
  permit: fc.nat(2),
  to: fc.nat(2),
  device: fc.nat(2),
  lock: fc.nat(5),
  by: fc.nat(4),
  signer: fc.nat(4),
  /** Most steps are done by whoever signs for them; two at random seldom fit. */
  alone: fc.constantFrom(true, true, false),
  state: fc.constantFrom(...STATES),
  on: fc.constantFrom(true, false, null),
})
type Step = typeof step extends fc.Arbitrary<infer T> ? T : never

class World {
  readonly permits: LockPermit[] = [1, 2, 3].map((number) => ({
    number: `HSP-${number}`,
    state: 'approved',
    approvedBy: APPROVER,
  }))
  heating: boolean | null = false
  rows: PointLock[] = []
  /** Padlock to device, as they really hang: changed by nothing but hands. */
  readonly padlocks = new Map<string, string>()
  /** How often a step was taken, so that a run that refuses everything is noticed. */
  taken = { apply: 0, verify: 0, remove: 0, absent: 0, transfer: 0 }

  points(permit: LockPermit) {
    return DEVICES.map((isolates, index) => ({
      tag: `${permit.number}/${index}`,
      isolates,
      required: 'shut',
      purpose: index === 2 ? ('to-work' as const) : ('to-heat' as const),
      boxed: false,
    }))
  }

  of(permit: LockPermit): PointLock[] {
    return this.rows.filter((row) => row.permit === permit.number)
  }

  take(one: Step): void {
    const permit = this.permits[one.permit] as LockPermit
    const by = PEOPLE[one.by] as (typeof PEOPLE)[number]
    const signer = one.alone ? by : (PEOPLE[one.signer] as (typeof PEOPLE)[number])
    const lockNumber = `L-${one.lock}`
    if (one.what === 'state') permit.state = this.allowed(permit, one.state)
    else if (one.what === 'heating') this.heating = one.on
    else if (one.what === 'apply') this.apply(permit, one.device, lockNumber, { by, signer })
    else this.withLock(one, permit, { by, signer })
  }

  /** A permit is live only with all points for heating held, and cancelled only without locks, as its own rules say. */
  private allowed(permit: LockPermit, to: PermitState): PermitState {
    const facts = pointFacts(this.points(permit).slice(0, 2), this.of(permit))
    if (to === 'issued' && !facts.every((fact) => fact.holds)) return permit.state
    if (to === 'cancelled' && this.of(permit).some(({ removed }) => !removed)) return permit.state
    return to
  }

  private apply(permit: LockPermit, device: number, lockNumber: string, doers: Doers): void {
    const point = this.points(permit)[device]
    const use = this.rows.find((row) => row.lockNumber === lockNumber && !row.removed)
    const refusals = applyRefusals({
      ...doers,
      permit,
      point,
      tag: point?.tag ?? '',
      lockNumber,
      locks: this.of(permit),
      inUse: use === undefined ? null : { permit: use.permit, place: use.tag, since: 'then' },
      onBox: 0,
    })
    if (refusals.length > 0 || point === undefined) return
    this.taken.apply += 1
    // A hand can put a padlock somewhere only if it does not hang already.
    expect(this.padlocks.has(lockNumber)).toBe(false)
    this.padlocks.set(lockNumber, point.isolates)
    this.rows.push({
      ...point,
      id: this.rows.length + 1,
      permit: permit.number,
      lockNumber,
      appliedBy: doers.by.personId,
      appliedWitness: doers.by === doers.signer ? null : doers.signer.personId,
      verifiedBy: null,
      verifiedWitness: null,
      removed: false,
    })
  }

  private withLock(one: Step, permit: LockPermit, doers: Doers): void {
    const hanging = this.of(permit).filter(({ removed }) => !removed)
    const lock = hanging[one.lock % Math.max(hanging.length, 1)]
    if (lock === undefined) return
    const owner = PEOPLE.find(({ personId }) => personId === lock.appliedBy) as (typeof PEOPLE)[number]
    const mayClear = doers.signer.personId === APPROVER
    if (one.what === 'verify') {
      if (verifyRefusals({ ...doers, permit, lock }).length > 0) return
      this.taken.verify += 1
      lock.verifiedBy = doers.by.personId
      lock.verifiedWitness = doers.by === doers.signer ? null : doers.signer.personId
      return
    }
    if (one.what === 'transfer') {
      const to = this.permits[one.to] as LockPermit
      const toPoints = this.points(to)
      const facts = {
        permit,
        lock,
        locks: this.of(permit),
        boxed: false,
        onBox: 0,
        to,
        toPoints,
        owner,
        mayClear,
      }
      if (transferRefusals({ ...facts, signer: doers.signer }).length > 0) return
      this.taken.transfer += 1
      const point = pointToTakeOver(lock, toPoints)
      expect(point?.isolates).toBe(lock.isolates)
      lock.removed = true
      this.rows.push({
        ...lock,
        ...point,
        id: this.rows.length + 1,
        permit: to.number,
        verifiedBy: null,
        verifiedWitness: null,
        removed: false,
      })
      return
    }
    const how = one.what === 'absent' ? ('owner-absent' as const) : ('owner' as const)
    const refusals = removeRefusals({
      ...doers,
      permit,
      lock,
      locks: this.of(permit),
      boxed: false,
      onBox: 0,
      heating: { on: this.heating },
      how,
      mayClear,
      ownerName: owner.name,
    })
    if (refusals.length > 0) return
    this.taken[how === 'owner' ? 'remove' : 'absent'] += 1
    this.padlocks.delete(lock.lockNumber)
    lock.removed = true
  }

  /** What record and world disagree in, or where a rule of separation is broken. Plain code: it runs after each step. */
  faults(): string[] {
    const faults: string[] = []
    const hanging = this.rows.filter(({ removed }) => !removed)
    // Each padlock that hangs stands in the record once, at its device; and nothing else stands there.
    if (hanging.length !== this.padlocks.size) faults.push('not as many on record as hang')
    for (const { lockNumber, isolates } of hanging) {
      if (this.padlocks.get(lockNumber) !== isolates) faults.push(`${lockNumber} is not at ${isolates}`)
    }
    for (const row of this.rows) {
      if (row.verifiedBy === null) continue
      for (const id of [row.verifiedBy, row.verifiedWitness]) {
        if (id === null) continue
        if (id === row.appliedBy || id === row.appliedWitness)
          faults.push(`${row.lockNumber}: one hand did both`)
        if (id === APPROVER) faults.push(`${row.lockNumber}: verified by the approver`)
      }
    }
    for (const permit of this.permits) {
      for (const [index, fact] of pointFacts(this.points(permit), this.of(permit)).entries()) {
        const own = this.of(permit).filter((row) => row.tag === fact.tag)
        if (fact.holds !== own.some(holds)) faults.push(`${fact.tag}: told wrongly`)
        // A live permit keeps what it was accepted on.
        if (permit.state === 'issued' && index < 2 && !fact.holds) faults.push(`${fact.tag}: lost while live`)
        if (permit.state === 'cancelled' && own.some(({ removed }) => !removed))
          faults.push(`${fact.tag}: still locked though cancelled`)
      }
    }
    return faults
  }
}
interface Doers {
  by: (typeof PEOPLE)[number]
  signer: (typeof PEOPLE)[number]
}

test('a lock that hangs is on record, once, until it is taken away', () => {
  const taken = { apply: 0, verify: 0, remove: 0, absent: 0, transfer: 0 }
  fc.assert(
    fc.property(fc.array(step, { minLength: 1000, maxLength: 1000, size: 'max' }), (steps) => {
      const world = new World()
      for (const one of steps) {
        world.take(one)
        const faults = world.faults()
        if (faults.length > 0) throw new Error(`after ${JSON.stringify(one)}: ${faults.join('; ')}`)
      }
      for (const key of Object.keys(taken) as (keyof typeof taken)[]) taken[key] += world.taken[key]
    }),
    // A walk of a thousand steps is not made shorter when it fails: that takes minutes, and the last step is told.
    { numRuns: 5, seed: 20261109, endOnFailure: true },
  )
  // Of 5000 steps; a walk that is refused everything would prove nothing.
  for (const [what, count] of Object.entries(taken)) expect(count, what).toBeGreaterThan(20)
})
