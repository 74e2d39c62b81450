/** Bake plans in the database: versions, ticks, signature, permit request, two people at once, and the files made of one. */
import { beforeEach, expect, test } from 'vitest'
import {
  bakePlanVersion,
  competence,
  heaterCircuit,
  isolationTest,
  logEntry,
  person,
  pump,
  segmentState,
  supplySet,
} from '#app/db/schema/index.ts'
import type { BakePlanContent } from '#app/domain/bake-plan.ts'
import { TICKED_ITEM_KEYS } from '#app/domain/bake-plan-readiness.ts'
import type { IsolationFinding } from '#app/domain/isolation-tests.ts'
import {
  addPlanVersion,
  createPlan,
  movePlanOn,
  permitRequest,
  setPlanPriority,
  signPlanReady,
  tickPlanStep,
  withdrawPlan,
} from '#app/services/bake-plans.server.ts'
import { planCalendar, planCsv } from '#app/services/bake-plans-export.server.ts'
import { readBakesPage, readPlanForm, readPlanPage } from '#app/services/bake-plans-page.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createPosition,
  createSegment,
  createSite,
  createState,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
let bram: TestUser
let pim: TestUser
let magnus: TestUser
let segmentId: number
let positionId: number

const content: BakePlanContent = {
  segments: ['SG-A'],
  startsAt: '2026-11-16T17:00:00.000Z',
  prepHours: 48,
  celsius: 150,
  upKH: 10,
  holdPa: 1e-2,
  abortPa: null,
  spreadK: 20,
  soakHours: 100,
  soakEnd: { fallPercent: 10, waterBehind: true },
  cooling: { kind: 'natural' },
  pumpChangeC: 80,
  coldC: 40,
  testHours: 48,
  supply: 'HX-T',
  cart: 'MC-T',
  targetPa: 2e-7,
  remarks: '',
}

const FINDING = {
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
} satisfies IsolationFinding

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { roles: ['engineer'] })
  pim = await createUser(db, { roles: ['technician'] })
  magnus = await createUser(db, { roles: ['manager'] })
  const geometry = {
    startM: 0,
    endM: 150,
    innerDiameterM: 0.6,
    wallM: 0.003,
    insulationM: 0.1,
    insulationWPerMK: 0.045,
  }
  const made = await createSegment(db, {
    ...geometry,
    tag: 'SG-A',
    resistance20Ohm: 0.0191,
    bellowsCount: 10,
  })
  segmentId = made.id
  await createSegment(db, { ...geometry, tag: 'SG-N', innerDiameterM: 0.5, lineId: made.lineId })
  positionId = (await createPosition(db, { segmentId })).id
  await db.insert(supplySet).values({ tag: 'HX-T', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
  await db.insert(heaterCircuit).values({ tag: 'BH-T', kind: 'blanket', segmentId, powerW: 6000 })
  const speeds = { H2: 0.45, H2O: 0.45, N2: 0.45 }
  await db.insert(pump).values({ tag: 'MC-T', kind: 'turbomolecular-cart', speeds })
})

function plan(change: Partial<BakePlanContent> = {}, actor: TestUser = bram): Promise<number> {
  return createPlan(db, actor, MORNING, { title: 'Bake of SG-A', content: { ...content, ...change } })
}

/** Everything the checklist wants, apart from the ticks. */
async function makeReadyOnRecord(): Promise<void> {
  await db.insert(logEntry).values({
    segmentId,
    kind: 'leak-check',
    eventAt: after(MORNING, -7200),
    writtenAt: MORNING,
    text: 'Every joint sprayed, nothing seen.',
    authorId: pim.personId,
    onChart: true,
  })
  await db.insert(isolationTest).values({
    segmentId,
    positionId,
    state: 'accepted',
    closedAt: after(MORNING, -86_400),
    fitFrom: after(MORNING, -80_000),
    fitTo: after(MORNING, -40_000),
    limitPaPerHour: 1e-5,
    result: FINDING,
    recordedBy: pim.personId,
    recordedAt: MORNING,
    acceptedBy: bram.personId,
    acceptedAt: MORNING,
  })
  const [electrician] = await db.insert(person).values({ name: 'Quarrie', createdAt: MORNING })
  await db.insert(competence).values({
    personId: electrician.insertId,
    kind: 'electrician-licence',
    number: 'QE-1',
    startsAt: after(MORNING, -86_400),
    endsAt: new Date('2027-01-01T00:00:00.000Z'),
    enteredBy: bram.personId,
    enteredAt: MORNING,
  })
}

async function tickAll(planId: number): Promise<void> {
  for (const item of TICKED_ITEM_KEYS) {
    await tickPlanStep(db, pim, MORNING, planId, { item, done: true, note: '' })
  }
}

async function readyPlan(): Promise<number> {
  await makeReadyOnRecord()
  const id = await plan()
  await tickAll(id)
  await signPlanReady(db, bram, MORNING, id, { revision: await revisionOf(id), password: PASSWORD })
  return id
}

async function revisionOf(planId: number): Promise<number> {
  return (await readPlanPage(db, bram, MORNING, planId)).revision
}

test('a draft keeps its content and prediction and stands on the record', async () => {
  const id = await plan()
  const page = await readPlanPage(db, bram, MORNING, id)
  expect(page).toMatchObject({
    state: 'draft',
    version: 1,
    baselineVersion: null,
    content,
    createdBy: bram.name,
  })
  expect(page.prediction.peakKW).toBeGreaterThan(30)
  expect(page.prediction.segments[0]?.n2Pa.length).toBeGreaterThan(0)
  expect(await listRecord(db, { limit: 5 })).toMatchObject([{ act: 'bake plan made', subjectId: String(id) }])
  const bakes = await readBakesPage(db, pim, MORNING)
  expect(bakes.plans).toMatchObject([{ id, segments: ['SG-A'], celsius: 150 }])
  expect(bakes.mayPlan).toBe(false)
})

test.each([
  ['a segment the register does not have', { segments: ['SG-Z'] }, 'segments', /no segment "SG-Z"/],
  ['a pair of two diameters', { segments: ['SG-A', 'SG-N'] }, 'segments', /0\.6.*0\.5|0\.5.*0\.6/],
  ['a pair of one segment', { segments: ['SG-A', 'SG-A'] }, 'segments', /named twice/],
  ['a bake below the touch limit', { celsius: 40, pumpChangeC: 30 }, 'celsius', /touch limit/],
  ['a change of pumps hotter than the bake', { pumpChangeC: 200 }, 'pumpChangeC', /below 150/],
])('%s is refused at its field', async (_what, wrong, field, words) => {
  await expect(plan(wrong)).rejects.toMatchObject({
    code: 'bad-input',
    fields: { [field]: [expect.stringMatching(words)] },
  })
  expect(await db.select().from(bakePlanVersion)).toEqual([])
})

test('a technician plans nothing, and a manager sets the priority only', async () => {
  await expect(plan({}, pim)).rejects.toMatchObject({ code: 'forbidden' })
  const id = await plan()
  await setPlanPriority(db, magnus, MORNING, id, {
    revision: 1,
    priority: 'urgent',
    reason: 'beam in December',
  })
  expect(await readPlanPage(db, magnus, MORNING, id)).toMatchObject({ priority: 'urgent', revision: 2 })
  await expect(
    withdrawPlan(db, magnus, MORNING, id, { revision: 2, reason: 'no longer wanted' }),
  ).rejects.toMatchObject({ code: 'forbidden' })
})

test('signing is refused while steps are missing, and says which (E8); so is the permit', async () => {
  const id = await plan()
  const missing = {
    code: 'not-acceptable-now',
    fields: { form: expect.arrayContaining([expect.stringMatching(/SG-A has no accepted isolation test/)]) },
  }
  await expect(
    signPlanReady(db, bram, MORNING, id, { revision: 1, password: PASSWORD }),
  ).rejects.toMatchObject(missing)
  await expect(permitRequest(db, bram, MORNING, id)).rejects.toMatchObject(missing)
  expect(await readPlanPage(db, bram, MORNING, id)).toMatchObject({ state: 'draft' })
})

test('with every step done a draft is signed, its version frozen, and a permit can be asked for', async () => {
  const id = await readyPlan()
  expect(await readPlanPage(db, bram, MORNING, id)).toMatchObject({
    state: 'ready',
    baselineVersion: 1,
    readyBy: bram.name,
    readyAt: MORNING,
  })
  const request = await permitRequest(db, bram, MORNING, id)
  expect(request).toMatchObject({ segments: ['SG-A'], supply: 'HX-T', cart: 'MC-T', planner: bram.name })
  expect(request.windows).toHaveLength(1)
  expect(request.windows[0]?.from).toEqual(new Date('2026-11-16T17:00:00.000Z'))
  expect((await listRecord(db, { limit: 1 }))[0]).toMatchObject({ act: 'bake plan ready', signed: true })
})

test('a wrong password signs nothing', async () => {
  await makeReadyOnRecord()
  const id = await plan()
  await tickAll(id)
  await expect(
    signPlanReady(db, bram, MORNING, id, { revision: await revisionOf(id), password: 'wrong' }),
  ).rejects.toMatchObject({ code: 'signature-refused' })
  expect(await readPlanPage(db, bram, MORNING, id)).toMatchObject({ state: 'draft', readyBy: null })
})

test('a later version takes "ready" back and says what differs; the first stays as it was', async () => {
  const id = await readyPlan()
  const changed = { ...content, soakHours: 120 }
  const form = { revision: await revisionOf(id), title: 'Bake of SG-A', reason: 'more hydrogen than thought' }
  const made = await addPlanVersion(db, bram, MORNING, id, { ...form, content: changed })
  expect(made).toEqual({ version: 2, wasReady: true })
  const page = await readPlanPage(db, bram, MORNING, id)
  expect(page).toMatchObject({ state: 'draft', version: 2, baselineVersion: null, readyBy: null })
  expect(page.versions.map(({ differences }) => differences)).toEqual([['Soak: 100 h → 120 h'], []])
  await expect(permitRequest(db, bram, MORNING, id)).rejects.toMatchObject({
    message: expect.stringMatching(/draft.*signed as ready/),
  })
})

test('a version that changes nothing is refused', async () => {
  const id = await plan()
  await expect(
    addPlanVersion(db, bram, MORNING, id, {
      revision: 1,
      title: 'Bake of SG-A',
      content,
      reason: 'no reason',
    }),
  ).rejects.toMatchObject({ code: 'bad-input' })
})

test('taking a tick back makes a ready plan a draft again', async () => {
  const id = await readyPlan()
  await tickPlanStep(db, pim, MORNING, id, { item: 'bars-torqued', done: false, note: 'one came loose' })
  const page = await readPlanPage(db, bram, MORNING, id)
  expect(page.state).toBe('draft')
  expect(page.checklist.find(({ key }) => key === 'bars-torqued')).toMatchObject({ met: false })
})

test('of two versions made at once from one reading the second is told, and nothing of it is kept', async () => {
  const id = await plan()
  const form = { revision: 1, title: 'Bake of SG-A', reason: 'both at once' }
  const results = await Promise.allSettled([
    addPlanVersion(db, bram, MORNING, id, { ...form, content: { ...content, celsius: 140 } }),
    addPlanVersion(other, bram, MORNING, id, { ...form, content: { ...content, celsius: 130 } }),
  ])
  expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  const rejected = results.find((one) => one.status === 'rejected')
  expect(rejected?.reason).toMatchObject({ code: 'conflict' })
  expect(await db.select().from(bakePlanVersion)).toHaveLength(2)
})

test('a withdrawn plan can no longer be changed, ticked or signed', async () => {
  const id = await plan()
  await withdrawPlan(db, bram, MORNING, id, { revision: 1, reason: 'beam time moved' })
  const page = await readPlanPage(db, bram, MORNING, id)
  expect(page).toMatchObject({
    state: 'withdrawn',
    closeReason: 'beam time moved',
    may: { plan: false, tick: false },
  })
  const closed = { code: 'not-acceptable-now' }
  await expect(
    tickPlanStep(db, pim, MORNING, id, { item: 'barriers-up', done: true, note: '' }),
  ).rejects.toMatchObject(closed)
  await expect(
    withdrawPlan(db, bram, MORNING, id, { revision: 2, reason: 'once more' }),
  ).rejects.toMatchObject(closed)
  await expect(readPlanForm(db, MORNING, new URLSearchParams({ of: String(id) }))).rejects.toMatchObject(
    closed,
  )
})

test('a plan is under way when its segment is hot, and done when it is cold again', async () => {
  const id = await readyPlan()
  const move = async (to: 'under-way' | 'done') =>
    movePlanOn(db, pim, MORNING, id, { revision: await revisionOf(id), to, reason: 'HX-T switched' })
  await expect(move('under-way')).rejects.toMatchObject({
    message: expect.stringMatching(/not recorded as heated/),
  })
  await createState(db, { segmentId, setBy: pim.personId, state: 'heating' })
  await expect(move('done')).rejects.toMatchObject({ message: expect.stringMatching(/plan is ready/) })
  await move('under-way')
  const second = await plan()
  const list = (await readPlanPage(db, bram, MORNING, second)).checklist
  expect(list.find(({ key }) => key === 'supply')?.detail).toMatch(/HX-T heats SG-A/)
  await expect(move('done')).rejects.toMatchObject({
    message: expect.stringMatching(/still recorded as hot/),
  })
  await db.update(segmentState).set({ state: 'in-service' })
  await move('done')
  expect(await readPlanPage(db, bram, MORNING, id)).toMatchObject({
    state: 'done',
    baselineVersion: 1,
    closedAt: MORNING,
  })
})

test('the form begins with what the option said, or with the version that stands', async () => {
  const asked = new URLSearchParams({ segments: 'SG-A,SG-N', celsius: '165', hours: '80.2', target: '1e-7' })
  const fresh = await readPlanForm(db, MORNING, asked)
  expect(fresh.values).toMatchObject({
    segment: 'SG-A',
    second: 'SG-N',
    celsius: '165',
    soakHours: '81',
    targetPa: '1e-7',
  })
  const id = await plan({ celsius: 137 })
  const again = await readPlanForm(db, MORNING, new URLSearchParams({ of: String(id) }))
  expect(again).toMatchObject({ of: { id, version: 1, revision: 1 }, values: { celsius: '137' } })
})

test('a plan as a table: one line a point, with its units in the heads', async () => {
  const lines = (await planCsv(db, await plan())).trimEnd().split('\r\n')
  const heads = lines[0]?.split(',') ?? []
  expect(heads).toEqual(
    expect.arrayContaining(['hours_from_heating', 'wall_degC', 'power_kW', 'SG-A_pressure_N2eq_Pa']),
  )
  expect(lines.length).toBeGreaterThan(100)
  expect(lines.every((line) => line.split(',').length === heads.length)).toBe(true)
})

test('a plan as a calendar: one event a step and permit, in UTC, lines folded at 75 octets', async () => {
  const id = await plan()
  const text = await planCalendar(db, id, MORNING)
  // RFC 5545, 3.1: lines end in CRLF and are folded at 75 octets.
  const lines = text.split('\r\n')
  expect(lines.every((line) => Buffer.byteLength(line) <= 75)).toBe(true)
  const unfolded = text.replaceAll('\r\n ', '')
  expect(unfolded.match(/BEGIN:VEVENT/g)).toHaveLength(6)
  expect(unfolded).toContain('SUMMARY:Ramp: SG-A\r\n')
  expect(unfolded).toContain('DTSTART:20261116T170000Z')
  expect(unfolded).toMatch(/SUMMARY:Permit 1 of 1: SG-A/)
  expect(new Set(unfolded.match(/^UID:.*$/gm)).size).toBe(6)
  await expect(planCalendar(db, await plan({ startsAt: null }), MORNING)).rejects.toMatchObject({
    code: 'not-acceptable-now',
  })
})
