import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { insertDue } from '#app/db/queries/rollups.server.ts'
import { isolationTest, limitValue, reading, segmentState } from '#app/db/schema/index.ts'
import { qualityCode } from '#app/domain/readings.ts'
import {
  acceptedIsolationTest,
  decideIsolationTest,
  readIsolationDraft,
  readIsolationTest,
  recordIsolationTest,
} from '#app/services/isolation-tests.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { setSegmentState } from '#app/services/segment-states.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createState,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const HOUR = 3600
/** The port was shut so long before the morning. */
const CLOSED = after(MORNING, -14 * HOUR)
const RATE = 6e-6
const REMARK = 'Straight, as hydrogen is; no argon seen'

let bram: TestUser
let pim: TestUser
let tag: string
let segmentId: number
let channelId: number
beforeEach(async () => {
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  await createSite(db)
  const segment = await createSegment(db, { innerDiameterM: 0.5, endM: 150 })
  tag = segment.tag
  segmentId = segment.id
  await createState(db, { segmentId, setBy: pim.personId, state: 'in-service' })
  await setSegmentState(db, pim, MORNING, {
    tag,
    from: 'in-service',
    state: 'isolated-test',
    since: CLOSED,
    reason: 'port shut over night',
    unusual: false,
  })
  const position = await createPosition(db, { segmentId, tag: 'HC-77B' })
  const source = await createSource(db)
  channelId = (await createChannel(db, { sourceId: source.id, positionId: position.id })).id
  await db.insert(limitValue).values({
    kind: 'isolation-rise',
    value: 1.2e-5,
    unit: 'Pa/h',
    startsAt: after(MORNING, -1e6),
    reason: 'for a test',
    recordedAt: MORNING,
  })
  await readings(CLOSED, 14 * HOUR, (hours) => 5e-8 + RATE * hours)
})

async function readings(from: Date, seconds: number, pa: (hours: number) => number): Promise<void> {
  await db.insert(reading).values(
    Array.from({ length: seconds / 120 }, (_, index) => ({
      channelId,
      at: after(from, index * 120),
      value: pa((index * 120) / HOUR) * (1 + 0.02 * Math.sin(index * 12.9898)),
      quality: qualityCode('good'),
      marks: 0,
      importId: 1,
      lineNo: index,
    })),
  )
  // Written past the product, so it is said by hand that no rollup holds them yet.
  await insertDue(db, [{ channelId, from, last: after(from, seconds) }])
}

const window = (from = 1, to = 12) => ({
  gauge: 'HC-77B',
  closedAt: CLOSED,
  fitFrom: after(CLOSED, from * HOUR),
  fitTo: after(CLOSED, to * HOUR),
})

const recorded = (to?: number) =>
  recordIsolationTest(db, pim, MORNING, tag, { ...window(1, to), note: 'quiet night' })

function decide(
  id: number,
  intent: 'accept' | 'void',
  options: { revision?: number; actor?: TestUser; handle?: typeof db } = {},
) {
  const { revision = 1, actor = bram, handle = db } = options
  return decideIsolationTest(handle, actor, MORNING, tag, id, {
    intent,
    revision,
    remark: REMARK,
    password: PASSWORD,
    knowingly: false,
  })
}

test('the form proposes the isolation that the states know of, without its first hour', async () => {
  const draft = await readIsolationDraft(db, pim, MORNING, tag, null)
  expect(draft.window).toEqual({
    gauge: 'HC-77B',
    closedAt: CLOSED,
    fitFrom: after(CLOSED, HOUR),
    fitTo: MORNING,
  })
  expect(draft.stateSaysIsolated).toBe(true)
  expect(draft.answer).toMatchObject({ kind: 'fitted', finding: { kind: 'steady' } })
  expect(draft.curve.opening).toBeNull()
})

test('a test is recorded with the fit of its window, and read again as it was', async () => {
  const id = await recorded()
  const { test: found, curve } = await readIsolationTest(db, pim, MORNING, tag, id)
  expect(found).toMatchObject({
    state: 'recorded',
    limitPaPerHour: 1.2e-5,
    note: 'quiet night',
    recordedByName: 'Pim',
  })
  expect(found.finding.ratePaPerHour / RATE).toBeCloseTo(1, 2)
  // 29.45 m3 of tube.
  expect(found.finding.throughputPaM3S / ((RATE * 29.45) / 3600)).toBeCloseTo(1, 2)
  expect(curve.points.length).toBeGreaterThan(100)
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    { act: 'isolation test recorded', person: 'Pim', effectiveAt: CLOSED },
  ])
})

test('a window across a change of state is refused, with the moment and the window before it', async () => {
  await setSegmentState(db, pim, MORNING, {
    tag,
    from: 'isolated-test',
    state: 'in-service',
    since: after(CLOSED, 10 * HOUR),
    reason: 'port open again',
    unusual: false,
  })
  const { answer } = await readIsolationDraft(db, pim, MORNING, tag, window())
  expect(answer).toMatchObject({
    kind: 'refused',
    opening: { at: after(CLOSED, 10 * HOUR), what: 'state set to "In service"' },
    offer: { from: after(CLOSED, HOUR), to: after(CLOSED, 10 * HOUR - 60) },
  })
  await expect(recorded()).rejects.toMatchObject({ code: 'not-acceptable-now' })
  const id = await recorded(9)
  expect((await readIsolationTest(db, pim, MORNING, tag, id)).curve.opening?.at).toEqual(
    after(CLOSED, 10 * HOUR),
  )
})

test('a window across an opening that only the gauge shows is refused near the moment it fell', async () => {
  await db.delete(reading)
  await readings(CLOSED, 10 * HOUR, (hours) => 5e-8 + RATE * hours)
  await readings(after(CLOSED, 10 * HOUR), 4 * HOUR, () => 8e-8)
  const { answer } = await readIsolationDraft(db, pim, MORNING, tag, window(1, 13))
  if (answer?.kind !== 'refused') throw new Error('expected a refusal')
  const at = answer.opening?.at.getTime() ?? 0
  expect(Math.abs(at - after(CLOSED, 10 * HOUR).getTime())).toBeLessThan(240_000)
  // What is offered can be fitted.
  if (answer.offer === null) throw new Error('expected an offer')
  const again = { ...window(), fitFrom: answer.offer.from, fitTo: answer.offer.to }
  expect((await readIsolationDraft(db, pim, MORNING, tag, again)).answer?.kind).toBe('fitted')
})

test('too few readings, a window upside down, an unknown gauge and the future are refused in words', async () => {
  const refused = async (change: object) =>
    (await readIsolationDraft(db, pim, MORNING, tag, { ...window(), ...change })).answer
  expect(await refused({ fitTo: after(CLOSED, HOUR + 300) })).toMatchObject({
    message: expect.stringContaining('at least 8'),
  })
  expect(await refused({ fitFrom: after(CLOSED, -60) })).toMatchObject({ kind: 'refused', offer: null })
  const record = (change: object) =>
    recordIsolationTest(db, pim, MORNING, tag, { ...window(), note: '', ...change })
  await expect(record({ gauge: 'HC-00X' })).rejects.toMatchObject({ fields: { gauge: [expect.any(String)] } })
  await expect(record({ fitTo: after(MORNING, 60) })).rejects.toMatchObject({
    fields: { fitTo: [expect.any(String)] },
  })
  expect(await db.select().from(isolationTest)).toEqual([])
})

test('without a limit nothing is recorded', async () => {
  await db.delete(limitValue)
  await expect(recorded()).rejects.toMatchObject({
    code: 'not-acceptable-now',
    message: expect.stringContaining('limit'),
  })
})

test('an engineer accepts, signed; from then on it counts, until it is voided', async () => {
  const id = await recorded()
  expect(await acceptedIsolationTest(db, segmentId, MORNING)).toBeNull()
  await decide(id, 'accept')
  expect(await acceptedIsolationTest(db, segmentId, MORNING)).toMatchObject({
    id,
    acceptedByName: 'Bram',
    acceptRemark: REMARK,
    acceptedAt: MORNING,
  })
  await decide(id, 'void', { revision: 2 })
  expect(await acceptedIsolationTest(db, segmentId, MORNING)).toBeNull()
  const { test: found } = await readIsolationTest(db, pim, MORNING, tag, id)
  expect(found).toMatchObject({ state: 'voided', acceptedByName: 'Bram', voidRemark: REMARK })
  expect(found.acceptSignedActId).not.toBe(found.voidSignedActId)
  await expect(decide(id, 'accept', { revision: 3 })).rejects.toMatchObject({ code: 'conflict' })
})

test('a test from before the segment was opened counts no more', async () => {
  const id = await recorded()
  await decide(id, 'accept')
  await db
    .update(segmentState)
    .set({ endedAt: after(CLOSED, 13 * HOUR) })
    .where(eq(segmentState.state, 'isolated-test'))
  await createState(db, { segmentId, setBy: pim.personId, state: 'vented', since: after(CLOSED, 13 * HOUR) })
  expect(await acceptedIsolationTest(db, segmentId, after(CLOSED, 12.9 * HOUR))).toMatchObject({ id })
  expect(await acceptedIsolationTest(db, segmentId, MORNING)).toBeNull()
  expect((await readIsolationTest(db, pim, MORNING, tag, id)).openedSince).toEqual(MORNING)
})

test('a technician may not accept, and a wrong password signs nothing', async () => {
  const id = await recorded()
  await expect(decide(id, 'accept', { actor: pim })).rejects.toMatchObject({ code: 'forbidden' })
  await expect(
    decideIsolationTest(db, bram, MORNING, tag, id, {
      intent: 'accept',
      revision: 1,
      remark: REMARK,
      password: 'not mine',
      knowingly: false,
    }),
  ).rejects.toMatchObject({ code: 'signature-refused' })
  expect((await readIsolationTest(db, pim, MORNING, tag, id)).test.state).toBe('recorded')
})

test('a rise over the limit is accepted only knowingly', async () => {
  await db.update(limitValue).set({ value: 5e-6 })
  const id = await recorded()
  await expect(decide(id, 'accept')).rejects.toMatchObject({ fields: { knowingly: [expect.any(String)] } })
  await decideIsolationTest(db, bram, MORNING, tag, id, {
    intent: 'accept',
    revision: 1,
    remark: REMARK,
    password: PASSWORD,
    knowingly: true,
  })
  expect(await acceptedIsolationTest(db, segmentId, MORNING)).toMatchObject({ id })
})

test('of two engineers at once, over two connections, one is first and the other is told', async () => {
  const second = await createUser(db, { roles: ['engineer'], name: 'Rafe' })
  const id = await recorded()
  const results = await Promise.allSettled([
    decide(id, 'accept'),
    decide(id, 'void', { actor: second, handle: other }),
  ])
  const refused = results.filter((result) => result.status === 'rejected')
  expect(refused).toHaveLength(1)
  expect(refused[0]?.reason).toMatchObject({ code: 'conflict' })
  const { test: found } = await readIsolationTest(db, pim, MORNING, tag, id)
  expect(found.revision).toBe(2)
  expect([found.acceptedByName, found.voidedByName].filter((name) => name !== null)).toHaveLength(1)
})

test('a test of another segment is not found here', async () => {
  const id = await recorded()
  const elsewhere = await createSegment(db)
  await expect(readIsolationTest(db, pim, MORNING, elsewhere.tag, id)).rejects.toMatchObject({
    code: 'not-found',
  })
})
