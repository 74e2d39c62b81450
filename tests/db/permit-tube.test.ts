/** A permit for a bake rests on what the log shows of its tube: without a counted isolation test nothing goes on. */
import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import { bakePlan, isolationTest, logEntry, segment, valve } from '#app/db/schema/index.ts'
import type { IsolationFinding } from '#app/domain/isolation-tests.ts'
import { readPermitPage } from '#app/services/permit-page.server.ts'
import { actOnPermit, createPermit } from '#app/services/permits.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createPosition, PASSWORD, type TestUser } from '#tests/support/factories.ts'
import { createPermitWorld, type PermitWorld, worldContent } from '#tests/support/permit-world.ts'

const db = freshDatabase()
const BEFORE = after(MORNING, -48 * 3600)
const FINDING: IsolationFinding = {
  gauge: 'HC-T',
  kind: 'steady',
  points: 100,
  binSeconds: 300,
  firstPa: 1e-7,
  lastPa: 2e-5,
  ratePaPerHour: 6e-6,
  rateSePaPerHour: 1e-7,
  volumeM3: 42.4,
  throughputPaM3S: 7e-8,
  throughputSePaM3S: 1e-9,
  throughput95PaM3S: [6.8e-8, 7.2e-8],
  firstThroughputPaM3S: 7e-8,
  hydrogenPaM3S: 1.6e-7,
  bend: null,
  rmsRelative: 0.01,
  temperatureC: null,
}

let world: PermitWorld
let planId: number
beforeEach(async () => {
  world = await createPermitWorld(db)
  const [made] = await db.insert(bakePlan).values({
    title: 'Bake of SG-T1',
    state: 'ready',
    version: 1,
    createdBy: world.nerys.personId,
    createdAt: BEFORE,
  })
  planId = made.insertId
  await db.insert(logEntry).values({
    segmentId: world.segmentId,
    kind: 'leak-check',
    eventAt: after(BEFORE, -7200),
    writtenAt: BEFORE,
    text: 'Every joint sprayed, nothing seen.',
    authorId: world.pim.personId,
    onChart: true,
  })
})

async function isolated(): Promise<number> {
  const [made] = await db.insert(isolationTest).values({
    segmentId: world.segmentId,
    positionId: (await createPosition(db, { segmentId: world.segmentId })).id,
    state: 'accepted',
    closedAt: after(BEFORE, -86_400),
    fitFrom: after(BEFORE, -80_000),
    fitTo: after(BEFORE, -40_000),
    limitPaPerHour: 1e-5,
    result: FINDING,
    recordedBy: world.pim.personId,
    recordedAt: BEFORE,
    acceptedBy: world.bram.personId,
    acceptedAt: BEFORE,
  })
  return made.insertId
}

async function act(number: string, what: 'request' | 'approve', who: TestUser) {
  const revision = (await findPermit(db, number))?.revision ?? 0
  const form = { act: what, revision, reason: '', password: PASSWORD, detail: {} }
  return actOnPermit(db, who, BEFORE, number, form)
}

const draft = (changes = {}) =>
  createPermit(db, world.bram, BEFORE, { content: worldContent(world, { planId, ...changes }) })

const UNTESTED = /SG-T1 has no accepted isolation test since it was last open/

test('a bake on a tube without an isolation test is not asked for; small heat without a plan is', async () => {
  await expect(act(await draft(), 'request', world.bram)).rejects.toMatchObject({
    fields: { form: [expect.stringMatching(UNTESTED)] },
  })
  expect(await act(await draft({ planId: null }), 'request', world.bram)).toMatchObject({
    state: 'requested',
  })
})

test('a test that is voided after the request blocks the approval, and the page says why', async () => {
  const testId = await isolated()
  const number = await draft()
  await act(number, 'request', world.bram)
  const voided = {
    voidedBy: world.bram.personId,
    voidedAt: BEFORE,
    voidRemark: 'A filament came on mid-test.',
  }
  await db
    .update(isolationTest)
    .set({ state: 'voided', ...voided })
    .where(eq(isolationTest.id, testId))
  await expect(act(number, 'approve', world.ione)).rejects.toMatchObject({
    fields: { form: [expect.stringMatching(/voided: A filament came on mid-test/)] },
  })
  const { checklist, offers } = await readPermitPage(db, world.ione, BEFORE, number)
  const item = checklist?.items.find(({ text }) => text.includes('tube'))
  expect(item).toMatchObject({ status: 'not-done', missing: [expect.stringMatching(UNTESTED)] })
  expect(offers.find(({ act: each }) => each === 'approve')?.reasons).toEqual(item?.missing)
})

test('a part that would get hotter than it stands is told for the temperature that the permit names', async () => {
  await isolated()
  await db.insert(valve).values({
    tag: 'GV-T',
    kind: 'gate',
    lineId: (await db.select({ lineId: segment.lineId }).from(segment))[0]?.lineId ?? 0,
    chainageM: 150,
    segmentId: world.segmentId,
    seal: 'fluoro-elastomer bonnet',
    normalPosition: 'open',
    limitC: 120,
    partRiseShare: 1,
  })
  await expect(act(await draft({ maxCelsius: 150 }), 'request', world.bram)).rejects.toMatchObject({
    fields: { form: [expect.stringMatching(/GV-T would reach 150 °C of 120 allowed/)] },
  })
  expect(await act(await draft({ maxCelsius: 110 }), 'request', world.bram)).toMatchObject({
    state: 'requested',
  })
})
