import { describe, expect, test } from 'vitest'
import {
  applyRefusals,
  lockNumberOf,
  type PointLock,
  pointFacts,
  removeRefusals,
  samePoint,
  transferRefusals,
  verifyRefusals,
} from '#app/domain/isolation-locks.ts'
import { type BoxLock, boxOffRefusals, boxOnRefusals } from '#app/domain/lock-box.ts'
import type { PermitState } from '#app/domain/permit-words.ts'

const ODALYS = { personId: 1, name: 'Odalys', signsIn: true }
const PIM = { personId: 2, name: 'Pim', signsIn: true }
const CORWIN = { personId: 3, name: 'Corwin', signsIn: true }
const IONE = { personId: 4, name: 'Ione', signsIn: true }
const WENDEL = { personId: 5, name: 'Wendel', signsIn: false }
const HANS = { personId: 6, name: 'Hans', signsIn: false }

const permit = (state: PermitState = 'approved', number = 'HSP-2026-031') => ({
  number,
  state,
  approvedBy: IONE.personId,
})
const point = {
  tag: 'IP-05-1',
  isolates: 'NV-05 vent valve',
  required: 'shut',
  purpose: 'to-heat' as const,
  boxed: true,
}
const lock = (change: Partial<PointLock> = {}): PointLock => ({
  id: 1,
  permit: 'HSP-2026-031',
  tag: 'IP-05-1',
  isolates: 'NV-05 vent valve',
  required: 'shut',
  purpose: 'to-heat',
  lockNumber: 'L-114',
  appliedBy: ODALYS.personId,
  appliedWitness: null,
  verifiedBy: null,
  verifiedWitness: null,
  removed: false,
  ...change,
})
const self = (person: typeof PIM) => ({ by: person, signer: person })
const sentence = (refusals: readonly string[]) => refusals.join('\n')

describe('a lock number', () => {
  test.each([
    ['L-114', 'L-114'],
    [' l 114 ', 'L-114'],
    ['l114', 'L-114'],
    ['L–114', 'L-114'],
    ['L.114', 'L-114'],
    ['red 7 b', 'RED 7 B'],
    ['L-0114', 'L-0114'],
  ])('%s is %s', (typed, number) => {
    expect(lockNumberOf(typed)).toBe(number)
  })
})

describe('applying a lock', () => {
  const apply = (change: Partial<Parameters<typeof applyRefusals>[0]> = {}) =>
    applyRefusals({
      ...self(ODALYS),
      permit: permit(),
      point,
      tag: point.tag,
      lockNumber: 'L-114',
      locks: [],
      inUse: null,
      onBox: 0,
      ...change,
    })

  test('is taken once the permit is approved', () => {
    expect(apply()).toEqual([])
  })

  test.each<[PermitState, boolean]>([
    ['draft', false],
    ['requested', false],
    ['returned', false],
    ['refused', false],
    ['approved', true],
    ['issued', true],
    ['suspended', true],
    ['expired', true],
    ['handed-back', true],
    ['cancelled', false],
    ['lapsed', false],
    ['withdrawn', false],
    ['discarded', false],
  ])('while the permit is %s: %s', (state, taken) => {
    expect(apply({ permit: permit(state) }).length === 0).toBe(taken)
  })

  test('a number in use is refused with permit, place and since when', () => {
    const inUse = { permit: 'HSP-2026-030', place: 'IP-08-6', since: '2026-10-31 06:20 (UTC+01:00)' }
    expect(sentence(apply({ inUse }))).toMatch(
      /L-114 hangs at IP-08-6 for HSP-2026-030 since 2026-10-31 06:20/,
    )
  })

  test('a point that the permit does not list, or that has a lock, takes none', () => {
    expect(sentence(apply({ point: undefined }))).toMatch(/does not list/)
    expect(sentence(apply({ locks: [lock({ lockNumber: 'L-7' })] }))).toMatch(/L-7 already hangs/)
    expect(apply({ locks: [lock({ removed: true })] })).toEqual([])
  })

  test('its key goes into the box, which must be open', () => {
    expect(sentence(apply({ onBox: 2 }))).toMatch(/2 personal locks are on it/)
    expect(apply({ onBox: 2, point: { ...point, boxed: false } })).toEqual([])
  })

  test('somebody without a log-in does it before a witness; nobody signs as somebody else', () => {
    expect(apply({ by: WENDEL, signer: ODALYS })).toEqual([])
    expect(sentence(apply({ by: PIM, signer: ODALYS }))).toMatch(/Pim has a log-in and signs their own step/)
    expect(sentence(apply({ by: WENDEL, signer: IONE }))).toMatch(/You approved this permit/)
  })

  test('all reasons come at once', () => {
    const inUse = { permit: 'HSP-2026-030', place: 'IP-08-6', since: 'yesterday' }
    expect(apply({ permit: permit('draft'), point: undefined, inUse, by: PIM }).length).toBe(4)
  })
})

describe('verifying a lock', () => {
  const verify = (change: Partial<Parameters<typeof verifyRefusals>[0]> = {}) =>
    verifyRefusals({ ...self(PIM), permit: permit(), lock: lock(), ...change })

  test('is somebody else’s than who applied it; the holder may', () => {
    expect(verify()).toEqual([])
    expect(sentence(verify(self(ODALYS)))).toMatch(/Odalys applied L-114; somebody else verifies it/)
  })

  test('is not the approver’s, not a witness’s of the application, and not entered by either', () => {
    expect(sentence(verify(self(IONE)))).toMatch(/Ione approved this permit/)
    const witnessed = lock({ appliedBy: WENDEL.personId, appliedWitness: ODALYS.personId })
    expect(sentence(verify({ lock: witnessed, ...self(ODALYS) }))).toMatch(/as its witness/)
    expect(verify({ lock: witnessed, ...self(CORWIN) })).toEqual([])
    expect(sentence(verify({ lock: witnessed, by: HANS, signer: ODALYS }))).toMatch(/had a hand in applying/)
    expect(sentence(verify({ by: HANS, signer: IONE }))).toMatch(/cannot be a witness/)
    expect(sentence(verify({ by: HANS, signer: ODALYS }))).toMatch(/had a hand in applying/)
    expect(verify({ by: HANS, signer: PIM })).toEqual([])
  })

  test('comes after the application, once, and not after removal', () => {
    expect(sentence(verify({ lock: lock({ removed: true }) }))).toMatch(/taken away/)
    expect(sentence(verify({ lock: lock({ verifiedBy: CORWIN.personId }) }))).toMatch(/verified already/)
    expect(sentence(verify({ permit: permit('cancelled') }))).toMatch(/cancelled/)
  })
})

describe('taking a lock away', () => {
  const remove = (change: Partial<Parameters<typeof removeRefusals>[0]> = {}) =>
    removeRefusals({
      ...self(ODALYS),
      permit: permit('suspended'),
      lock: lock({ verifiedBy: PIM.personId }),
      locks: [],
      boxed: true,
      onBox: 0,
      heating: { on: false },
      how: 'owner',
      mayClear: false,
      ownerName: 'Odalys',
      ...change,
    })

  test.each<[PermitState, boolean | null, boolean]>([
    // Not heated yet: nothing rests on it, whether or not anybody has said that heating is off.
    ['approved', null, true],
    ['approved', false, true],
    ['approved', true, false],
    ['issued', true, false],
    ['issued', null, false],
    ['issued', false, false],
    ['suspended', true, false],
    ['suspended', null, false],
    ['suspended', false, true],
    ['expired', true, false],
    ['expired', null, false],
    ['expired', false, true],
    ['handed-back', true, false],
    ['handed-back', null, false],
    ['handed-back', false, true],
    ['requested', null, false],
    ['requested', false, true],
    ['cancelled', null, true],
    ['lapsed', null, true],
    ['withdrawn', true, false],
  ])('that heating needs, while %s and heating is %s: %s', (state, on, taken) => {
    expect(remove({ permit: permit(state), heating: { on } }).length === 0).toBe(taken)
  })

  test.each<[PermitState, boolean | null, boolean]>([
    ['suspended', null, true],
    ['suspended', false, true],
    ['suspended', true, false],
    ['issued', false, true],
    ['issued', true, false],
  ])('that keeps heating from people, while %s and heating is %s: %s', (state, on, taken) => {
    const own = lock({ purpose: 'to-work' })
    expect(remove({ permit: permit(state), heating: { on }, lock: own }).length === 0).toBe(taken)
  })

  test('where another verified lock holds the same point nothing rests on it', () => {
    const other = lock({ id: 2, lockNumber: 'L-9', verifiedBy: PIM.personId })
    const live = { permit: permit('issued'), heating: { on: true } }
    expect(remove({ ...live, locks: [other] })).toEqual([])
    expect(remove({ ...live, locks: [{ ...other, verifiedBy: null }] })).not.toEqual([])
    expect(remove({ ...live, locks: [{ ...other, removed: true }] })).not.toEqual([])
    expect(remove({ ...live, locks: [{ ...other, tag: 'IP-05-2' }] })).not.toEqual([])
  })

  test('is the owner’s, or witnessed where the owner has no log-in', () => {
    expect(remove()).toEqual([])
    expect(sentence(remove(self(PIM)))).toMatch(/only Odalys takes it away/)
    const wendels = lock({
      appliedBy: WENDEL.personId,
      appliedWitness: ODALYS.personId,
      verifiedBy: CORWIN.personId,
    })
    const done = { lock: wendels, by: WENDEL, ownerName: 'Wendel' }
    expect(remove({ ...done, signer: ODALYS })).toEqual([])
    expect(sentence(remove({ ...done, signer: CORWIN }))).toMatch(/You verified L-114/)
    expect(sentence(remove({ ...done, signer: IONE }))).toMatch(/cannot be a witness/)
  })

  test('of an absent owner is signed by an officer or engineer, and never by the owner', () => {
    const absent = { how: 'owner-absent' as const, ...self(IONE) }
    expect(remove({ ...absent, mayClear: true })).toEqual([])
    expect(sentence(remove({ ...absent, mayClear: false }))).toMatch(/safety officer or an engineer/)
    expect(sentence(remove({ how: 'owner-absent', ...self(ODALYS), mayClear: true }))).toMatch(
      /your own lock/,
    )
    expect(remove({ ...absent, mayClear: true, permit: permit('issued') })).not.toEqual([])
  })

  test('waits until nobody has a lock on the box', () => {
    expect(sentence(remove({ onBox: 1 }))).toMatch(/1 personal lock is on it/)
    expect(remove({ onBox: 1, boxed: false })).toEqual([])
  })
})

describe('transferring a lock', () => {
  const other = permit('approved', 'HSP-2026-034')
  const transfer = (change: Partial<Parameters<typeof transferRefusals>[0]> = {}) =>
    transferRefusals({
      permit: permit('handed-back'),
      lock: lock({ verifiedBy: PIM.personId }),
      locks: [],
      boxed: false,
      onBox: 0,
      to: other,
      toPoints: [{ ...point, tag: 'IP-06-2', isolates: ' nv-05  Vent valve ' }],
      signer: ODALYS,
      owner: ODALYS,
      mayClear: false,
      ...change,
    })

  test('goes to a permit that lists the same point in the same position', () => {
    expect(transfer()).toEqual([])
    expect(sentence(transfer({ toPoints: [{ ...point, required: 'open' }] }))).toMatch(/does not list/)
    expect(sentence(transfer({ to: permit() }))).toMatch(/Name another permit/)
    expect(samePoint({ isolates: 'GV-04', required: 'Shut' }, { isolates: 'gv-04 ', required: 'shut' })).toBe(
      true,
    )
  })

  test.each<[PermitState, boolean]>([
    ['draft', false],
    ['requested', false],
    ['approved', true],
    ['issued', true],
    ['suspended', true],
    ['expired', false],
    ['handed-back', false],
    ['cancelled', false],
  ])('to one that is %s: %s', (state, taken) => {
    expect(transfer({ to: permit(state, 'HSP-2026-034') }).length === 0).toBe(taken)
  })

  test('does not leave a live permit without it', () => {
    expect(sentence(transfer({ permit: permit('issued') }))).toMatch(/live and rests on/)
  })

  test('is the owner’s, a witness’s, or of whoever may clear locks', () => {
    expect(transfer({ signer: PIM })).not.toEqual([])
    expect(transfer({ signer: PIM, owner: WENDEL })).toEqual([])
    expect(transfer({ signer: IONE, mayClear: true })).toEqual([])
  })
})

test('a point is told by the lock that holds it, else the one that hangs, else the last', () => {
  const points = [{ tag: 'IP-05-1' }, { tag: 'IP-05-2' }, { tag: 'IP-05-3' }]
  const locks = [
    lock({ id: 1, removed: true }),
    lock({ id: 2, lockNumber: 'L-2', verifiedBy: PIM.personId }),
    lock({ id: 3, lockNumber: 'L-3' }),
    lock({ id: 4, tag: 'IP-05-2', lockNumber: 'L-4', verifiedBy: PIM.personId, removed: true }),
  ]
  expect(pointFacts(points, locks)).toEqual([
    { tag: 'IP-05-1', lockNumber: 'L-2', appliedBy: 1, verifiedBy: 2, holds: true, removed: false },
    { tag: 'IP-05-2', lockNumber: 'L-4', appliedBy: 1, verifiedBy: 2, holds: false, removed: true },
    { tag: 'IP-05-3', lockNumber: null, appliedBy: null, verifiedBy: null, holds: false, removed: false },
  ])
})

describe('the lock box', () => {
  const held = lock({ verifiedBy: PIM.personId })
  const onBox = (id: number, ownerId: number, primary = false): BoxLock => ({
    id,
    boxCode: 'BOX-2',
    lockNumber: `P-${id}`,
    ownerId,
    primary,
    off: false,
  })
  const on = (change: Partial<Parameters<typeof boxOnRefusals>[0]> = {}) =>
    boxOnRefusals({
      ...self(PIM),
      permit: permit(),
      boxCode: 'BOX-2',
      lockNumber: 'P-9',
      primary: false,
      points: [point],
      locks: [held],
      box: [onBox(1, CORWIN.personId, true)],
      inUse: null,
      ...change,
    })

  test('the primary lock goes on first, once, when every key is inside', () => {
    expect(on({ box: [], primary: true })).toEqual([])
    expect(sentence(on({ box: [] }))).toMatch(/primary authorised person puts their lock on first/)
    expect(sentence(on({ primary: true }))).toMatch(/P-1 is the primary lock already/)
    expect(sentence(on({ locks: [lock()] }))).toMatch(/IP-05-1: not locked and verified yet/)
    expect(sentence(on({ points: [{ ...point, boxed: false }] }))).toMatch(/No point/)
  })

  test('one box a permit, one lock a person', () => {
    expect(on()).toEqual([])
    expect(sentence(on({ boxCode: 'BOX-3' }))).toMatch(/lie in box BOX-2/)
    expect(sentence(on({ box: [onBox(1, PIM.personId, true)] }))).toMatch(/Pim has P-1 on the box already/)
    expect(on({ box: [onBox(1, CORWIN.personId, true), { ...onBox(2, PIM.personId), off: true }] })).toEqual(
      [],
    )
  })

  const off = (change: Partial<Parameters<typeof boxOffRefusals>[0]> = {}) =>
    boxOffRefusals({
      ...self(PIM),
      permit: permit(),
      lock: onBox(2, PIM.personId),
      box: [onBox(1, CORWIN.personId, true), onBox(2, PIM.personId)],
      how: 'owner',
      mayClear: false,
      ownerName: 'Pim',
      ...change,
    })

  test('everybody takes their own off, the primary last', () => {
    expect(off()).toEqual([])
    const primary = { lock: onBox(1, CORWIN.personId, true), ownerName: 'Corwin', ...self(CORWIN) }
    expect(sentence(off(primary))).toMatch(/comes off last. Still on the box: P-2/)
    expect(off({ ...primary, box: [onBox(1, CORWIN.personId, true)] })).toEqual([])
    expect(sentence(off(self(ODALYS)))).toMatch(/only Pim takes it off/)
    expect(off({ ...self(IONE), how: 'owner-absent', mayClear: true })).toEqual([])
    expect(off({ ...self(ODALYS), how: 'owner-absent' })).not.toEqual([])
  })
})
