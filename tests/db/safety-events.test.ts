import { beforeEach, expect, test } from 'vitest'
import { listSafetyEvents } from '#app/db/queries/safety-events.server.ts'
import { permit } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { readHeating } from '#app/services/heating.server.ts'
import { stateHeating } from '#app/services/heating-statements.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { noteDangers, readDangers, tolerateDanger, watchDangers } from '#app/services/safety-events.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, PASSWORD, type TestUser } from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'
import { createSupply, type TestSupply } from '#tests/support/supply.ts'

const db = freshDatabase()
const other = secondConnection()
const ON = { volts: 23.4, amps: 1083 }
const HOT = after(MORNING, -4 * 86_400)

let bram: TestUser
let pim: TestUser
let ione: TestUser
let supply: TestSupply
beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  await createSegment(db, { tag: 'SG-T1' })
  await createSegment(db, { tag: 'SG-T2' })
  supply = await createSupply(db)
})

const make = (state: typeof permit.$inferInsert.state, segments = ['SG-T1'], feed: string | null = 'HX-1') =>
  createPermitRow(db, { state, createdBy: bram.personId, content: { segments, supply: feed } })
const note = (number: string, now = MORNING) => tx(db, (inside) => noteDangers(inside, number, now))
const open = async (now = MORNING) => {
  const rows = await listSafetyEvents(db, { since: now })
  return rows.filter(({ endedAt }) => endedAt === null).map(({ kind }) => kind)
}
const say = (on: boolean, at = MORNING, tags = ['SG-T1'], by = '') =>
  stateHeating(db, pim, at, tags, { on, at, supply: by, how: 'read at the set' })

test('the set that the live permit names, since the first reading that shows it on', async () => {
  await make('issued')
  await supply.posts(after(HOT, -300), 'off')
  await supply.posts(HOT, { volts: 2, amps: 90 })
  await supply.posts(after(MORNING, -300), ON)
  expect(await readHeating(db, ['SG-T1'], MORNING)).toMatchObject({
    on: true,
    basis: 'supply',
    knownAt: after(MORNING, -300),
    since: HOT,
  })
  expect(await readHeating(db, ['SG-T2'], MORNING)).toMatchObject({ on: null, basis: 'nothing' })
})

test('a set that a live permit has elsewhere says nothing about one that waits for it', async () => {
  await supply.posts(MORNING, ON)
  await make('approved', ['SG-T2'])
  expect(await readHeating(db, ['SG-T2'], MORNING)).toMatchObject({ on: true })
  await make('issued', ['SG-T1'])
  expect(await readHeating(db, ['SG-T2'], MORNING)).toMatchObject({ on: null })
  expect(await readHeating(db, ['SG-T1'], MORNING)).toMatchObject({ on: true })
})

test('readings older than a quarter of an hour leave it unknown, and never off', async () => {
  await make('issued')
  await supply.posts(after(MORNING, -901), 'off')
  expect(await readHeating(db, ['SG-T1'], MORNING)).toMatchObject({
    on: null,
    knownAt: after(MORNING, -901),
  })
})

test('somebody who read it off at the set is believed until the next post says otherwise', async () => {
  await make('suspended')
  await supply.posts(after(MORNING, -240), ON)
  expect(await say(false)).toMatchObject({ on: false, basis: 'person' })
  await supply.posts(after(MORNING, 60), ON)
  expect(await readHeating(db, ['SG-T1'], after(MORNING, 90))).toMatchObject({ on: true, basis: 'supply' })
})

test('a statement of what will be, or of a set that is not there, is refused; by whom is kept', async () => {
  const form = { on: true, at: after(MORNING, 60), supply: '', how: 'read at the set' }
  await expect(stateHeating(db, pim, MORNING, ['SG-T1'], form)).rejects.toMatchObject({
    fields: { at: [expect.stringContaining('or earlier')] },
  })
  await expect(
    stateHeating(db, pim, MORNING, ['SG-T1'], { ...form, at: MORNING, supply: 'HX-9' }),
  ).rejects.toMatchObject({ fields: { supply: [expect.any(String)] } })
  await expect(stateHeating(db, pim, MORNING, ['SG-99'], { ...form, at: MORNING })).rejects.toMatchObject({
    code: 'not-found',
  })
  const manager = await createUser(db, { roles: ['manager'] })
  await expect(stateHeating(db, manager, MORNING, ['SG-T1'], { ...form, at: MORNING })).rejects.toMatchObject(
    { code: 'forbidden' },
  )
  await say(true, MORNING, ['SG-T1'], 'HX-1')
  expect(await listRecord(db, { subjectKind: 'segment', limit: 1 })).toMatchObject([
    { act: 'heating stated on', person: 'Pim', subjectId: 'SG-T1', after: { supply: 'HX-1' } },
  ])
})

test('suspended with the heat on: one event however often it is looked at, ended by the word that it is off', async () => {
  const { number } = await make('suspended')
  await supply.posts(after(MORNING, -60), ON)
  await note(number)
  await note(number, after(MORNING, 30))
  expect(await open()).toEqual(['suspended-while-heated', 'permit-suspended'])
  await say(false, after(MORNING, 40))
  expect(await open(MORNING)).toEqual(['permit-suspended'])
  const ended = (await listSafetyEvents(db, { since: MORNING })).find(({ endedAt }) => endedAt !== null)
  expect(ended).toMatchObject({
    kind: 'suspended-while-heated',
    endedAt: after(MORNING, 40),
    endReason: expect.stringContaining('Pim said off for SG-T1'),
  })
})

test('on again afterwards is another event, which begins after the first ended', async () => {
  const { number } = await make('expired')
  await supply.posts(after(MORNING, -60), ON)
  await note(number)
  await say(false, after(MORNING, 60))
  await supply.posts(after(MORNING, 120), ON)
  await note(number, after(MORNING, 130))
  const events = (await listSafetyEvents(db, { since: MORNING })).filter(
    ({ kind }) => kind === 'expired-while-heated',
  )
  expect(events).toMatchObject([{ endedAt: null }, { endedAt: after(MORNING, 60) }])
  expect(events[0]?.startedAt.getTime()).toBeGreaterThanOrEqual(after(MORNING, 60).getTime())
})

test('a new state does not hide it, and not knowing does not end it', async () => {
  const { id, number } = await make('suspended')
  await supply.posts(after(MORNING, -60), ON)
  await note(number)
  await db.update(permit).set({ state: 'cancelled' })
  await watchDangers(db, after(MORNING, 60))
  expect(await open()).toEqual(expect.arrayContaining(['suspended-while-heated']))
  // Twenty minutes without a post: nobody knows.
  await watchDangers(db, after(MORNING, 1200))
  expect(await open()).toContain('suspended-while-heated')
  expect(await readDangers(db, number)).not.toEqual([])
  expect(id).toBeGreaterThan(0)
})

test('heat that only a person knows of, on a segment without any permit', async () => {
  await say(true)
  expect(await open()).toEqual(['heating-without-live-permit'])
  await watchDangers(db, after(MORNING, 60))
  expect(await open()).toHaveLength(1)
  await say(false, after(MORNING, 120))
  expect(await open(MORNING)).toEqual([])
})

test('two looks at once write it down once', async () => {
  const { number } = await make('approved')
  await supply.posts(after(MORNING, -60), ON)
  await Promise.all([
    tx(db, (inside) => noteDangers(inside, number, MORNING)),
    tx(other, (inside) => noteDangers(inside, number, after(MORNING, 1))),
  ])
  expect(await open()).toEqual(['heating-without-live-permit'])
})

test('an officer writes why it goes on; it stays in sight, and others may not', async () => {
  const { number } = await make('suspended')
  await supply.posts(after(MORNING, -60), ON)
  await note(number)
  const [event] = await readDangers(db, number)
  const id = event?.id ?? 0
  const form = { reason: 'Cooling in one go would tear the jacket', password: PASSWORD }
  await expect(tolerateDanger(db, pim, MORNING, id, form)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(tolerateDanger(db, ione, MORNING, id, { ...form, password: 'wrong' })).rejects.toMatchObject({
    code: 'signature-refused',
  })
  await tolerateDanger(db, ione, MORNING, id, form)
  await note(number, after(MORNING, 60))
  expect((await readDangers(db, number))[0]).toMatchObject({
    kind: 'suspended-while-heated',
    endedAt: null,
    tolerated: { reason: form.reason, by: 'Ione' },
  })
  const suspension = (await readDangers(db, number)).find(({ kind }) => kind === 'permit-suspended')
  await expect(tolerateDanger(db, ione, MORNING, suspension?.id ?? 0, form)).rejects.toMatchObject({
    code: 'conflict',
  })
  await say(false, after(MORNING, 120))
  await expect(tolerateDanger(db, ione, after(MORNING, 130), id, form)).rejects.toMatchObject({
    code: 'conflict',
    message: expect.stringContaining('has ended'),
  })
})
