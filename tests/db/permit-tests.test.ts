import { asc } from 'drizzle-orm'
import { beforeEach, describe, expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import {
  attachment,
  bayClosure,
  equipment,
  permitRound,
  permitTest,
  safetyEvent,
} from '#app/db/schema/index.ts'
import type { PermitRoundForm, PermitTestForm } from '#app/domain/schemas/permit-site.ts'
import { addPermitPhoto, listPermitPhotos, openPermitPhoto } from '#app/services/permit-photos.server.ts'
import { readSiteHub, readSiteTests } from '#app/services/permit-site.server.ts'
import { readPermitHistory } from '#app/services/permit-story.server.ts'
import { recordPermitRound, recordPermitTest } from '#app/services/permit-test-steps.server.ts'
import { readTests } from '#app/services/permit-tests.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after as later, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createInstrument,
  createSegment,
  createSite,
  createUser,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const db = freshDatabase()
const other = secondConnection()
const HOUR = 3600

let pim: TestUser
let wendel: TestUser
let number: string

beforeEach(async () => {
  await createSite(db)
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  wendel = await createUser(db, { name: 'Wendel', noPassword: true })
  await createSegment(db, { tag: 'SG-T1' })
  await createInstrument(db, {
    serial: 'X-5001',
    kind: 'oxygen-monitor',
    quantity: 'oxygen',
    calibrationDue: later(MORNING, 1000 * HOUR),
  })
  number = (await createPermitRow(db, { state: 'issued', createdBy: pim.personId })).number
})

/** Oxygen at bay 5, wanted 19.5 to 23.5 % every 12 h, see fullContent. */
const oxygen = (change: Partial<PermitTestForm> = {}): PermitTestForm => ({
  kind: 'oxygen',
  place: 'bay 5',
  value: 20.8,
  says: null,
  instrument: 'X-5001',
  calibrationDue: null,
  segment: '',
  takenAt: MORNING,
  by: null,
  note: '',
  ...change,
})
const record = (change: Partial<PermitTestForm> = {}, handle = db) =>
  recordPermitTest(handle, pim, MORNING, number, oxygen(change))
const rows = () => db.select().from(permitTest).orderBy(asc(permitTest.id))
async function fact(kind: string, now = MORNING) {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error('no permit')
  return (await readTests(db, permit, now)).find((each) => each.kind === kind)
}
const badField = (name: string, pattern: RegExp) => ({
  code: 'bad-input',
  fields: { [name]: [expect.stringMatching(pattern)] },
})

test('a good test counts until it is due again, and then it is overdue', async () => {
  expect(await fact('oxygen')).toMatchObject({ state: 'missing' })
  expect(await record()).toMatchObject({ passed: true, leave: false })
  expect(await fact('oxygen')).toMatchObject({ state: 'good', nextDueAt: later(MORNING, 12 * HOUR) })
  expect(await fact('oxygen', later(MORNING, 12 * HOUR))).toMatchObject({ state: 'overdue' })
  expect(await rows()).toMatchObject([
    {
      kind: 'oxygen',
      value: 20.8,
      unit: '%',
      passed: true,
      instrumentSerial: 'X-5001',
      calibrationDue: later(MORNING, 1000 * HOUR),
      testerId: pim.personId,
      witnessId: null,
      nextDueAt: later(MORNING, 12 * HOUR),
    },
  ])
  const [line] = await listRecord(db, { subjectKind: 'permit', subjectId: number, limit: 5 })
  expect(line).toMatchObject({ act: 'permit test recorded', effectiveAt: MORNING })
  expect(await db.select().from(safetyEvent)).toEqual([])
})

describe('an instrument', () => {
  test('past its calibration makes a test that is kept and does not count', async () => {
    await createInstrument(db, {
      serial: 'X-5002',
      kind: 'oxygen-monitor',
      quantity: 'oxygen',
      calibrationDue: later(MORNING, -HOUR),
    })
    const outcome = await record({ instrument: 'X-5002' })
    expect(outcome).toMatchObject({ passed: false, leave: false })
    expect(outcome.text).toMatch(/calibration ran out 2026-11-09 07:00/)
    expect(await fact('oxygen')).toMatchObject({ state: 'failed' })
    expect((await rows())[0]?.note).toMatch(/calibration ran out/)
  })

  test('that the register does not have is taken with the date from its label', async () => {
    await expect(record({ instrument: 'Z-1' })).rejects.toMatchObject(
      badField('calibrationDue', /The register has no Z-1/),
    )
    expect(await rows()).toEqual([])
    await record({ instrument: 'Z-1', calibrationDue: later(MORNING, HOUR) })
    expect(await fact('oxygen')).toMatchObject({ state: 'good' })
  })

  test('may be equipment of the register; its own date counts, not the typed one', async () => {
    await db
      .insert(equipment)
      .values({ tag: 'OX-7', kind: 'oxygen monitor', facts: '', calibrationDue: later(MORNING, -1) })
    expect(await record({ instrument: 'OX-7', calibrationDue: later(MORNING, HOUR) })).toMatchObject({
      passed: false,
    })
  })

  test('of another quantity, or none, is asked for again', async () => {
    await createInstrument(db, { serial: 'HC-9', calibrationDue: later(MORNING, HOUR) })
    await expect(record({ instrument: 'HC-9' })).rejects.toMatchObject(
      badField('instrument', /reads pressure/),
    )
    await expect(record({ instrument: '' })).rejects.toMatchObject(badField('instrument', /serial number/))
    await expect(record({ value: null })).rejects.toMatchObject(badField('value', /in %/))
  })
})

test('low oxygen raises the alarm and closes the stretch, even without a serial number', async () => {
  const outcome = await record({ value: 19.2, instrument: '' })
  expect(outcome).toMatchObject({ passed: false, leave: true })
  expect(outcome.text).toMatch(/Leave at once/)
  expect(await db.select().from(safetyEvent)).toMatchObject([{ kind: 'low-oxygen', endedAt: null }])
  expect(await db.select().from(bayClosure)).toMatchObject([{ fromM: 0, toM: 160, releasedAt: null }])
  expect(await fact('oxygen')).toMatchObject({ state: 'failed' })
  const page = await readSiteTests(db, pim, MORNING, number)
  expect(page.dangers.map(({ kind }) => kind)).toContain('low-oxygen')
})

test('what is tried rather than measured is the tester’s word', async () => {
  const stop = { kind: 'emergency-stop' as const, place: 'HX-1', value: null, instrument: '' }
  await expect(record(stop)).rejects.toMatchObject(badField('says', /passed or failed/))
  await record({ ...stop, says: true })
  expect(await fact('emergency-stop')).toMatchObject({ state: 'good', nextDueAt: null })
})

test('somebody without a log-in tests before a witness, and nobody writes for somebody who has one', async () => {
  await record({ by: wendel.personId })
  expect(await rows()).toMatchObject([{ testerId: wendel.personId, witnessId: pim.personId }])
  const corwin = await createUser(db, { roles: ['technician'], name: 'Corwin' })
  await expect(record({ by: corwin.personId })).rejects.toMatchObject(badField('by', /Corwin has a log-in/))
})

test('the same test sent twice, at once over two connections, is one', async () => {
  await Promise.all([record(), record({}, other)])
  expect(await rows()).toHaveLength(1)
  expect((await record()).text).toMatch(/already/)
  await record({ value: 20.9 })
  expect(await rows()).toHaveLength(2)
})

test('a test of the future, of long ago, or of a permit that is over is not taken', async () => {
  await expect(record({ takenAt: later(MORNING, HOUR) })).rejects.toMatchObject(
    badField('takenAt', /or earlier/),
  )
  await expect(record({ takenAt: later(MORNING, -32 * 24 * HOUR) })).rejects.toMatchObject(
    badField('takenAt', /31 days/),
  )
  for (const state of ['draft', 'cancelled'] as const) {
    number = (await createPermitRow(db, { state, createdBy: pim.personId })).number
    await expect(record()).rejects.toMatchObject({ code: 'not-acceptable-now' })
  }
  number = 'HSP-1999-001'
  await expect(record()).rejects.toMatchObject({ code: 'not-found' })
})

test('a manager writes down neither tests nor rounds nor photos', async () => {
  const magnus = await createUser(db, { roles: ['manager'], name: 'Magnus' })
  await expect(recordPermitTest(db, magnus, MORNING, number, oxygen())).rejects.toMatchObject({
    code: 'forbidden',
  })
  await expect(recordPermitRound(db, magnus, MORNING, number, round())).rejects.toMatchObject({
    code: 'forbidden',
  })
  await expect(photo({}, magnus)).rejects.toMatchObject({ code: 'forbidden' })
})

const round = (change: Partial<PermitRoundForm> = {}): PermitRoundForm => ({
  at: MORNING,
  hottestC: 74,
  hottestAtM: 31.5,
  inOrder: true,
  text: '',
  ...change,
})

test('a round is written down once, and not as in order where something was too hot', async () => {
  const walk = (change: Partial<PermitRoundForm> = {}) =>
    recordPermitRound(db, pim, MORNING, number, round(change))
  await walk()
  expect(await walk()).toMatch(/already/)
  await expect(walk({ hottestC: 151 })).rejects.toMatchObject(
    badField('inOrder', /151 °C is above the 150 °C/),
  )
  await expect(walk({ inOrder: false })).rejects.toMatchObject(badField('text', /not in order/))
  await walk({ hottestC: 151, inOrder: false, text: 'Insulation slipped at 31 m' })
  expect(await db.select().from(permitRound).orderBy(asc(permitRound.id))).toMatchObject([
    {
      hottestC: 74,
      hottestAtM: 31.5,
      inOrder: true,
      personId: pim.personId,
      at: MORNING,
      recordedAt: MORNING,
    },
    { hottestC: 151, inOrder: false },
  ])
})

const PNG = Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex')
async function* pieces(bytes: Uint8Array) {
  yield bytes
}
function photo(change: { caption?: string; bytes?: Uint8Array } = {}, who = pim) {
  const { caption = 'Barrier at 0 m', bytes = PNG } = change
  return addPermitPhoto(db, who, MORNING, number, { caption, fileName: 'IMG_1.png', content: pieces(bytes) })
}

test('a photo is kept with its caption, sha and sender, and comes back as it was', async () => {
  expect(await photo()).toBe(`Barrier at 0 m – IMG_1.png is kept with ${number}.`)
  const [kept] = await listPermitPhotos(db, number)
  expect(kept).toMatchObject({
    contentType: 'image/png',
    byteSize: 16,
    createdByName: 'Pim',
    createdAt: MORNING,
  })
  const opened = await openPermitPhoto(db, pim, number, kept?.id ?? 0)
  expect(Buffer.from(await new Response(opened.body).arrayBuffer()).equals(PNG)).toBe(true)
  const hub = await readSiteHub(db, pim, MORNING, number)
  expect(hub.photos).toHaveLength(1)
  const { lines } = await readPermitHistory(db, number)
  expect(lines.map(({ text }) => text)).toContainEqual(
    expect.stringMatching(/added the picture Barrier at 0 m – IMG_1\.png\.$/),
  )
})

test('what is no picture is refused by its content, whatever its name, and leaves nothing', async () => {
  await expect(photo({ bytes: Buffer.from('<script>alert(1)</script>') })).rejects.toMatchObject({
    code: 'wrong-type',
  })
  await expect(photo({ bytes: Buffer.from('%PDF-1.7 and so on') })).rejects.toMatchObject({
    code: 'wrong-type',
  })
  const large = Buffer.concat([PNG, Buffer.alloc(12 * 1024 * 1024)])
  await expect(photo({ bytes: large })).rejects.toMatchObject({ code: 'too-large' })
  expect(await db.select().from(attachment)).toEqual([])
})

test('a photo of one permit is not found under another', async () => {
  await photo()
  const [kept] = await listPermitPhotos(db, number)
  const elsewhere = await createPermitRow(db, { state: 'issued', createdBy: pim.personId })
  await expect(openPermitPhoto(db, pim, elsewhere.number, kept?.id ?? 0)).rejects.toMatchObject({
    code: 'not-found',
  })
  await expect(openPermitPhoto(db, pim, number, Number.NaN)).rejects.toMatchObject({ code: 'not-found' })
})
