import { asc, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, test } from 'vitest'
import type { Db } from '#app/db/client.server.ts'
import { findPermit } from '#app/db/queries/permits.server.ts'
import {
  heatingStatement,
  isolationPoint,
  lockInUse,
  permit as permitTable,
  signedAct,
} from '#app/db/schema/index.ts'
import { type PointStep, takePointStep } from '#app/services/isolation-point-steps.server.ts'
import { readLocksOut, readPoints } from '#app/services/isolation-points.server.ts'
import { type BoxStep, takeBoxStep } from '#app/services/lock-box.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, PASSWORD, type TestUser } from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const db = freshDatabase()
const other = secondConnection()
const ABSENCE = {
  verifiedAbsent: 'Asked at both gates; his badge went out at 14:10',
  efforts: 'Rang him three times and left word with his wife',
  informed: 'A note at his locker and on the board of the crew',
}

let odalys: TestUser
let pim: TestUser
let corwin: TestUser
let ione: TestUser
let wendel: TestUser
let segmentId: number
let number: string
let permitId: number

beforeEach(async () => {
  await createSite(db)
  odalys = await createUser(db, { roles: ['technician'], name: 'Odalys' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  corwin = await createUser(db, { roles: ['technician'], name: 'Corwin' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  wendel = await createUser(db, { name: 'Wendel', noPassword: true })
  segmentId = (await createSegment(db, { tag: 'SG-T1' })).id
  const made = await permitIn('approved')
  number = made.number
  permitId = made.id
})

function permitIn(state: typeof permitTable.$inferInsert.state, points?: 'same' | 'none') {
  return createPermitRow(db, {
    state,
    createdBy: pim.personId,
    approvedBy: ione.personId,
    ...(points === 'none' ? { content: { points: [] } } : {}),
  })
}

const setState = (state: typeof permitTable.$inferInsert.state) =>
  db
    .update(permitTable)
    .set({ state, currentUntil: after(MORNING, 12 * 3600) })
    .where(eq(permitTable.id, permitId))

type Given<Step extends { act: string }, Act extends Step['act']> = Partial<Extract<Step, { act: Act }>>
const take = (who: TestUser, step: PointStep, where: { handle?: Db; number?: string } = {}) =>
  takePointStep(where.handle ?? db, who, MORNING, where.number ?? number, step)
const apply = (
  who: TestUser,
  change: Given<PointStep, 'apply'> = {},
  where: { handle?: Db; number?: string } = {},
) =>
  take(
    who,
    {
      act: 'apply',
      tag: 'IP-1',
      lockNumber: 'L-114',
      tagNumber: 'T-9',
      by: null,
      note: '',
      password: PASSWORD,
      ...change,
    },
    where,
  )
const rows = () => db.select().from(isolationPoint).orderBy(asc(isolationPoint.id))
async function last() {
  const row = (await rows()).at(-1)
  if (row === undefined) throw new Error('no lock yet')
  return row
}
async function verify(who: TestUser, change: Given<PointStep, 'verify'> = {}, handle?: Db) {
  const { id, revision } = await last()
  const said = { releasedHow: 'None stored', zeroEnergy: 'Handwheel tried, does not move' }
  return take(
    who,
    { act: 'verify', pointId: id, revision, by: null, password: PASSWORD, ...said, ...change },
    handle === undefined ? {} : { handle },
  )
}
async function remove(who: TestUser, change: Given<PointStep, 'remove'> = {}, handle?: Db) {
  const { id, revision } = await last()
  return take(
    who,
    { act: 'remove', pointId: id, revision, by: null, note: '', password: PASSWORD, ...change },
    handle === undefined ? {} : { handle },
  )
}
const refused = (pattern: RegExp) => ({
  code: 'not-acceptable-now',
  fields: { form: expect.arrayContaining([expect.stringMatching(pattern)]) },
})
async function points(at = number) {
  const found = await findPermit(db, at)
  if (found === null) throw new Error('no permit')
  return readPoints(db, found)
}
const heatingOff = () =>
  db.insert(heatingStatement).values({
    segmentId,
    on: false,
    at: after(MORNING, -60),
    how: 'Read at the supply',
    personId: pim.personId,
    recordedAt: after(MORNING, -60),
  })

test('a lock is applied, verified by somebody else, and taken away by its owner: all signed, all on record', async () => {
  expect(await apply(odalys)).toBe('L-114 applied at IP-1. Somebody else verifies it now.')
  expect(await points()).toMatchObject([
    { tag: 'IP-1', lockNumber: 'L-114', appliedBy: odalys.personId, verifiedBy: null, holds: false },
    { tag: 'IP-2', lockNumber: null, holds: false, removed: false },
  ])
  expect(await readLocksOut(db, permitId)).toEqual(['L-114'])
  await verify(pim)
  expect((await points())[0]).toMatchObject({ verifiedBy: pim.personId, holds: true })
  await remove(odalys, { note: 'Work is called off' })
  expect((await points())[0]).toMatchObject({ holds: false, removed: true, lockNumber: 'L-114' })
  expect(await readLocksOut(db, permitId)).toEqual([])
  expect(await db.select().from(lockInUse)).toEqual([])
  const row = await last()
  expect(row).toMatchObject({
    tagNumber: 'T-9',
    isolates: 'NV-T1 vent valve',
    required: 'shut',
    releasedHow: 'None stored',
    removedHow: 'owner',
    note: 'Work is called off',
    revision: 3,
  })
  const signatures = [row.appliedSignedActId, row.verifiedSignedActId, row.removedSignedActId]
  expect(new Set(signatures).size).toBe(3)
  const signed = await db.select().from(signedAct).orderBy(asc(signedAct.id))
  expect(signed.map(({ personId, meaning, usedAt }) => [personId, meaning, usedAt !== null])).toEqual([
    [odalys.personId, 'apply isolation lock L-114', true],
    [pim.personId, 'verify isolation lock L-114', true],
    [odalys.personId, 'take away isolation lock L-114', true],
  ])
  const record = await listRecord(db, { subjectKind: 'permit', subjectId: number, limit: 10 })
  expect(record.map(({ act }) => act)).toEqual([
    'isolation lock taken away',
    'isolation lock verified',
    'isolation lock applied',
  ])
})

test('the wrong password writes nothing', async () => {
  await expect(apply(odalys, { password: 'not mine' })).rejects.toMatchObject({ code: 'signature-refused' })
  expect(await rows()).toEqual([])
  expect(await db.select().from(lockInUse)).toEqual([])
})

test('who may not lock is refused: a manager, and an officer for what is not theirs', async () => {
  const magnus = await createUser(db, { roles: ['manager'], name: 'Magnus' })
  await expect(apply(magnus)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(apply(ione)).rejects.toMatchObject({ code: 'forbidden' })
  await apply(odalys)
  const { id, revision } = await last()
  const clear = { act: 'remove-absent' as const, pointId: id, revision, ...ABSENCE, password: PASSWORD }
  await expect(take(magnus, clear)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(take(pim, clear)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(remove(pim)).rejects.toMatchObject(refused(/only Odalys takes it away/))
})

test('a lock in use is refused with permit, point and since when', async () => {
  await apply(odalys)
  const elsewhere = await permitIn('issued')
  await expect(apply(pim, { lockNumber: 'L-114' }, { number: elsewhere.number })).rejects.toMatchObject(
    refused(new RegExp(`L-114 hangs at IP-1 for ${number} since 2026-11-09 08:00`)),
  )
  await expect(apply(pim, { tag: 'IP-2' })).rejects.toMatchObject(refused(/L-114 hangs at IP-1/))
})

test('one lock, two points, two connections at once: one has it and the other is told where it hangs', async () => {
  const elsewhere = await permitIn('issued')
  for (let round = 1; round <= 5; round += 1) {
    const lockNumber = `L-${round}`
    const results = await Promise.allSettled([
      apply(odalys, { lockNumber }, { number: (await permitIn('approved')).number }),
      apply(pim, { lockNumber }, { handle: other, number: (await permitIn('approved')).number }),
      apply(corwin, { lockNumber, tag: round % 2 === 0 ? 'IP-1' : 'IP-2' }, { number: elsewhere.number }),
    ])
    const losers = results.filter((result) => result.status === 'rejected')
    expect(losers).toHaveLength(2)
    for (const loser of losers) expect(loser.reason).toMatchObject(refused(/hangs at|already hangs/))
    const hanging = (await rows()).filter((row) => row.lockNumber === lockNumber)
    expect(hanging).toHaveLength(1)
    expect(await db.select().from(lockInUse).where(eq(lockInUse.lockNumber, lockNumber))).toMatchObject([
      { pointId: hanging[0]?.id, permitId: hanging[0]?.permitId },
    ])
  }
})

test('verified and taken away at once over two connections: one is first, the other is told', async () => {
  for (const lockNumber of ['L-1', 'L-2', 'L-3']) {
    await apply(odalys, { lockNumber })
    const results = await Promise.allSettled([verify(pim), remove(odalys, {}, other)])
    const losers = results.filter((result) => result.status === 'rejected')
    expect(losers).toHaveLength(1)
    expect(losers[0]?.reason).toMatchObject({ code: 'conflict' })
    const row = await last()
    expect(row.revision).toBe(2)
    expect([row.verifiedAt, row.removedAt].filter((at) => at !== null)).toHaveLength(1)
    expect(await readLocksOut(db, permitId)).toEqual(row.removedAt === null ? [lockNumber] : [])
    if (row.removedAt === null) await remove(odalys)
  }
})

test('a page from before is told what happened since', async () => {
  await apply(odalys)
  await verify(pim)
  await expect(remove(odalys, { revision: 1 })).rejects.toMatchObject({
    code: 'conflict',
    message: expect.stringContaining('L-114 at IP-1 was verified by Pim since'),
  })
})

test('separation is by person: neither who applied, nor the witness, nor the approver verifies', async () => {
  const both = await createUser(db, { roles: ['technician', 'safety-officer'], name: 'Both' })
  await db.update(permitTable).set({ approvedBy: both.personId }).where(eq(permitTable.id, permitId))
  await apply(odalys, { by: wendel.personId })
  expect(await last()).toMatchObject({ appliedBy: wendel.personId, appliedWitness: odalys.personId })
  await expect(verify(odalys)).rejects.toMatchObject(refused(/as its witness/))
  await expect(verify(both)).rejects.toMatchObject(refused(/approved this permit/))
  await verify(corwin)
  await expect(apply(odalys, { by: pim.personId, tag: 'IP-2', lockNumber: 'L-2' })).rejects.toMatchObject(
    refused(/Pim has a log-in/),
  )
  await expect(remove(corwin, { by: wendel.personId })).rejects.toMatchObject(refused(/You verified/))
  await remove(odalys, { by: wendel.personId })
  expect(await last()).toMatchObject({ removedBy: wendel.personId, removedWitness: odalys.personId })
})

test('an account that has ended is no log-in, and a contractor’s does not reach these pages', async () => {
  const gone = await createUser(db, { roles: ['technician'], name: 'Gone', endsAt: after(MORNING, -1) })
  const tove = await createUser(db, { roles: ['contributor'], name: 'Tove' })
  await apply(odalys, { by: gone.personId })
  await apply(odalys, { by: tove.personId, tag: 'IP-2', lockNumber: 'L-2' })
  expect((await rows()).map(({ appliedBy }) => appliedBy)).toEqual([gone.personId, tove.personId])
})

describe('while a permit is heated', () => {
  beforeEach(async () => {
    await apply(odalys)
    await verify(pim)
    await setState('issued')
  })

  test('its locks stay on, and afterwards until heating is known to be off', async () => {
    await expect(remove(odalys)).rejects.toMatchObject(refused(/is live and rests on IP-1/))
    await setState('suspended')
    await expect(remove(odalys)).rejects.toMatchObject(refused(/unknown is not off/))
    await heatingOff()
    await remove(odalys)
    expect(await readLocksOut(db, permitId)).toEqual([])
  })

  test('and when its time is over it counts as expired, though the worker has not written it down', async () => {
    await db
      .update(permitTable)
      .set({ currentUntil: after(MORNING, -1) })
      .where(eq(permitTable.id, permitId))
    await heatingOff()
    await remove(odalys)
  })

  test('an absent owner’s lock comes off by the written procedure alone', async () => {
    await setState('handed-back')
    await heatingOff()
    const { id, revision } = await last()
    const message = await take(ione, {
      act: 'remove-absent',
      pointId: id,
      revision,
      ...ABSENCE,
      password: PASSWORD,
    })
    expect(message).toBe('L-114 taken away from IP-1.')
    expect(await last()).toMatchObject({
      removedHow: 'owner-absent',
      removedBy: ione.personId,
      removalDetail: ABSENCE,
    })
  })
})

describe('a transfer', () => {
  async function transfer(
    who: TestUser,
    to: string,
    handle?: Db,
    from?: { id: number; revision: number; number: string },
  ) {
    const { id, revision } = from ?? (await last())
    return take(
      who,
      { act: 'transfer', pointId: id, revision, to, note: 'The next bake begins there', password: PASSWORD },
      { number: from?.number ?? number, ...(handle === undefined ? {} : { handle }) },
    )
  }

  test('leaves the lock where it hangs, its owner’s, to be verified anew', async () => {
    await apply(odalys)
    await verify(pim)
    await setState('handed-back')
    const next = await permitIn('approved')
    expect(await transfer(odalys, next.number)).toBe(
      `L-114 now hangs for ${next.number} at IP-1, to be verified there.`,
    )
    expect(await readLocksOut(db, permitId)).toEqual([])
    expect(await readLocksOut(db, next.id)).toEqual(['L-114'])
    const [from, to] = await rows()
    expect(from).toMatchObject({
      removedHow: 'transferred',
      transferredToId: to?.id,
      verifiedBy: pim.personId,
    })
    expect(to).toMatchObject({
      permitId: next.id,
      appliedBy: odalys.personId,
      appliedAt: from?.appliedAt,
      verifiedBy: null,
      transferredToId: from?.id,
    })
    expect(await db.select().from(lockInUse)).toMatchObject([
      { lockNumber: 'L-114', permitId: next.id, pointId: to?.id, since: MORNING },
    ])
    expect((await points(next.number))[0]).toMatchObject({ lockNumber: 'L-114', holds: false })
  })

  test('is refused to a permit without the point, and by somebody whose lock it is not', async () => {
    await apply(odalys)
    const without = await permitIn('approved', 'none')
    await expect(transfer(odalys, without.number)).rejects.toMatchObject(
      refused(/does not list “NV-T1 vent valve”/),
    )
    const next = await permitIn('approved')
    await expect(transfer(pim, next.number)).rejects.toMatchObject(refused(/Odalys has a log-in/))
    await expect(transfer(odalys, 'HSP-1999-001')).rejects.toMatchObject({ code: 'not-found' })
  })

  test('two at once in opposite directions end without waiting for each other for good', async () => {
    await apply(odalys)
    const here = { ...(await last()), number }
    const next = await permitIn('approved')
    await apply(pim, { lockNumber: 'L-200' }, { number: next.number })
    const there = { ...(await last()), number: next.number }
    await Promise.all([transfer(odalys, next.number, db, here), transfer(pim, number, other, there)])
    expect(await readLocksOut(db, permitId)).toEqual(['L-200'])
    expect(await readLocksOut(db, next.id)).toEqual(['L-114'])
  })
})

describe('the lock box', () => {
  const box = (who: TestUser, step: BoxStep, handle: Db = db) =>
    takeBoxStep(handle, who, MORNING, number, step)
  const on = (who: TestUser, lockNumber: string, change: Given<BoxStep, 'box-on'> = {}, handle?: Db) =>
    box(
      who,
      {
        act: 'box-on',
        boxCode: 'BOX-2',
        lockNumber,
        primary: false,
        by: null,
        password: PASSWORD,
        ...change,
      },
      handle,
    )
  const off = async (who: TestUser, lockNumber: string) => {
    const [use] = await db.select().from(lockInUse).where(eq(lockInUse.lockNumber, lockNumber))
    return box(who, { act: 'box-off', boxLockId: use?.boxLockId ?? 0, by: null, password: PASSWORD })
  }
  beforeEach(async () => {
    await apply(odalys, { tag: 'IP-2' })
    await verify(pim)
  })

  test('keeps the keys in as long as one personal lock is on it', async () => {
    await expect(on(odalys, 'P-1')).rejects.toMatchObject(refused(/puts their lock on first/))
    await on(pim, 'P-1', { primary: true })
    await on(odalys, 'P-2')
    await on(odalys, 'P-3', { by: wendel.personId })
    expect((await readLocksOut(db, permitId)).toSorted()).toEqual(['L-114', 'P-1', 'P-2', 'P-3'])
    await expect(remove(odalys)).rejects.toMatchObject(refused(/3 personal locks are on it/))
    await expect(off(pim, 'P-1')).rejects.toMatchObject(refused(/comes off last. Still on the box: P-2, P-3/))
    await off(odalys, 'P-2')
    const [wendels] = await db.select().from(lockInUse).where(eq(lockInUse.lockNumber, 'P-3'))
    const id = wendels?.boxLockId ?? 0
    await box(ione, { act: 'box-off-absent', boxLockId: id, ...ABSENCE, password: PASSWORD })
    await off(pim, 'P-1')
    await remove(odalys)
    expect(await readLocksOut(db, permitId)).toEqual([])
    expect(await db.select().from(lockInUse)).toEqual([])
  })

  test('a lock that hangs at a point goes on no box, and two first ones at once are one', async () => {
    await expect(on(pim, 'L-114', { primary: true })).rejects.toMatchObject(refused(/L-114 hangs at IP-2/))
    const results = await Promise.allSettled([
      on(pim, 'P-1', { primary: true }),
      on(corwin, 'P-2', { primary: true }, other),
    ])
    const losers = results.filter((result) => result.status === 'rejected')
    expect(losers).toHaveLength(1)
    expect(losers[0]?.reason).toMatchObject(refused(/is the primary lock already/))
  })
})
