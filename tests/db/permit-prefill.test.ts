/** What a permit starts with, out of a real plan and register: which plans can be asked for, and what is carried over. */
import { beforeEach, expect, test } from 'vitest'
import {
  competence,
  heaterCircuit,
  isolationTest,
  logEntry,
  person,
  pump,
  supplySet,
  valve,
} from '#app/db/schema/index.ts'
import type { BakePlanContent } from '#app/domain/bake-plan.ts'
import { TICKED_ITEM_KEYS } from '#app/domain/bake-plan-readiness.ts'
import type { IsolationFinding } from '#app/domain/isolation-tests.ts'
import { createPlan, signPlanReady, tickPlanStep } from '#app/services/bake-plans.server.ts'
import { readPlanPage } from '#app/services/bake-plans-page.server.ts'
import { readPermitForm } from '#app/services/permit-form.server.ts'
import { prefillFromPlan, prefillFromSegments, readNewPermit } from '#app/services/permit-prefill.server.ts'
import { createPermit } from '#app/services/permits.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createPosition,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
let bram: TestUser
let pim: TestUser
let segmentId: number

const CONTENT: BakePlanContent = {
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
  const tube = { innerDiameterM: 0.6, wallM: 0.003, insulationM: 0.1, insulationWPerMK: 0.045 }
  const made = await createSegment(db, {
    ...tube,
    tag: 'SG-A',
    startM: 0,
    endM: 150,
    resistance20Ohm: 0.0191,
    bellowsCount: 10,
  })
  segmentId = made.id
  const { lineId } = made
  const east = await createSegment(db, { ...tube, tag: 'SG-B', startM: 150, endM: 300, lineId })
  await createSegment(db, { ...tube, tag: 'SG-N', startM: 300, endM: 450, innerDiameterM: 0.5, lineId })
  const common = { lineId, seal: 'all metal', limitC: 150, partRiseShare: 1, normalPosition: 'shut' }
  await db.insert(valve).values([
    { ...common, tag: 'NV-A', kind: 'vent', chainageM: 75, segmentId },
    { ...common, tag: 'GV-A', kind: 'gate', chainageM: 150, segmentId, eastSegmentId: east.id },
  ])
  await db.insert(supplySet).values({ tag: 'HX-T', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
  await db.insert(heaterCircuit).values([
    { tag: 'BH-A', kind: 'blanket', segmentId, powerW: 6000 },
    { tag: 'BH-B', kind: 'blanket', segmentId: east.id, powerW: 6000 },
    { tag: 'DC-A', kind: 'direct-current', segmentId, earthing: 'at 75 m' },
  ])
  await db
    .insert(pump)
    .values({ tag: 'MC-T', kind: 'turbomolecular-cart', speeds: { H2: 0.45, H2O: 0.45, N2: 0.45 } })
})

function plan(change: Partial<BakePlanContent> = {}): Promise<number> {
  return createPlan(db, bram, MORNING, { title: 'Bake of SG-A', content: { ...CONTENT, ...change } })
}

/** A plan with every step done and signed. What belongs to that is tried in bake-plans.test.ts. */
async function readyPlan(change: Partial<BakePlanContent> = {}): Promise<number> {
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
    positionId: (await createPosition(db, { segmentId })).id,
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
  const [electrician] = await db.insert(person).values({
    name: 'Quarrie',
    note: 'Licensed electrician, licence QE-1, until 2027-01-01',
    createdAt: MORNING,
  })
  await db.insert(competence).values({
    personId: electrician.insertId,
    kind: 'electrician-licence',
    number: 'QE-1',
    startsAt: after(MORNING, -86_400),
    endsAt: new Date('2027-01-01T23:00:00.000Z'),
    enteredBy: bram.personId,
    enteredAt: MORNING,
  })
  const id = await plan(change)
  for (const item of TICKED_ITEM_KEYS) {
    const notes: Partial<Record<typeof item, string>> = {
      'earthing-point-written': 'M12 stud at 80 m',
      'crew-named': 'Pim and Odalys',
    }
    await tickPlanStep(db, pim, MORNING, id, { item, done: true, note: notes[item] ?? '' })
  }
  const { revision } = await readPlanPage(db, bram, MORNING, id)
  await signPlanReady(db, bram, MORNING, id, { revision, password: PASSWORD })
  return id
}

test('a plan with steps missing makes no permit, and the page lists them (E8)', async () => {
  const id = await plan()
  const missing = expect.arrayContaining([expect.stringMatching(/SG-A has no accepted isolation test/)])
  await expect(prefillFromPlan(db, bram, MORNING, id, 1)).rejects.toMatchObject({
    code: 'not-acceptable-now',
    fields: { form: missing },
  })
  const { plans } = await readNewPermit(db, bram, MORNING, String(id))
  expect(plans).toMatchObject([{ id, links: [], refusal: { missing } }])
})

test('a plan that is ready is carried over, and a technician may ask for it too', async () => {
  const id = await readyPlan()
  const { plans, asked } = await readNewPermit(db, pim, MORNING, String(id))
  expect(asked).toBe(id)
  expect(plans).toMatchObject([{ id, refusal: null, permits: [] }])
  expect(plans[0]?.links).toHaveLength(1)
  const content = await prefillFromPlan(db, pim, MORNING, id, 1)
  expect(content).toMatchObject({
    title: 'Bake of SG-A',
    planId: id,
    planVersion: 1,
    segments: ['SG-A'],
    maxCelsius: 150,
    rampKH: 10,
    soakHours: 100,
    supply: 'HX-T',
    openCircuitVolts: 75,
    // What the checklist says comes before what the register says.
    earthing: 'M12 stud at 80 m',
    from: '2026-11-16T17:00:00.000Z',
    holderId: null,
    crewIds: [],
    hazards: {},
  })
  expect(content.maxAmps).toBeGreaterThan(500)
  expect(content.maxVolts).toBeLessThan(60)
  expect(content.points.map(({ isolates }) => isolates)).toEqual([
    'NV-A, vent valve',
    'GV-A, gate valve',
    'Spare feeds to the bars of SG-A, all but HX-T',
    'BH-B, blanket of SG-B next door',
    'Crane over 0 to 150 m',
  ])
  await expect(prefillFromPlan(db, pim, MORNING, id, 2)).rejects.toMatchObject({
    code: 'bad-input',
    message: expect.stringContaining('needs one permit and has no permit 2'),
  })
})

test('the crew that the plan names is a suggestion and nobody’s name in the form; a permit is shown at its plan', async () => {
  const id = await readyPlan()
  const number = await createPermit(db, pim, MORNING, {
    content: await prefillFromPlan(db, pim, MORNING, id, 1),
  })
  const form = await readPermitForm(db, pim, MORNING, number)
  expect(form.plan).toEqual({ id, title: 'Bake of SG-A', version: 1, newest: 1, crewNote: 'Pim and Odalys' })
  expect(form).toMatchObject({ mode: 'free', values: { holderId: '', crewIds: [] } })
  const { plans } = await readNewPermit(db, pim, MORNING, null)
  expect(plans[0]?.permits).toEqual([{ number, title: 'Bake of SG-A' }])
})

test('a bake longer than one permit gives a chain, each link with its own window', async () => {
  const id = await readyPlan({ soakHours: 400 })
  const [choice] = (await readNewPermit(db, bram, MORNING, null)).plans
  expect(choice?.links.map(({ number }) => number)).toEqual([1, 2])
  expect(choice?.links[0]?.text).toMatch(/^Permit 1 of 2: 240 h, 2026-11-16 18:00/)
  const first = await prefillFromPlan(db, bram, MORNING, id, 1)
  const second = await prefillFromPlan(db, bram, MORNING, id, 2)
  expect([first.from, first.to]).toEqual(['2026-11-16T17:00:00.000Z', '2026-11-26T17:00:00.000Z'])
  // The next begins before the last one ends, so that the handover leaves no gap.
  expect(second.from).toBe('2026-11-26T05:00:00.000Z')
  expect(second.title).toBe('Bake of SG-A, permit 2 of 2')
})

test('by hand: two of one diameter, or one; a supply that the register has', async () => {
  const asked = { segments: ['SG-A'], celsius: 120, supply: null }
  expect(await prefillFromSegments(db, pim, MORNING, asked)).toMatchObject({
    planId: null,
    maxCelsius: 120,
    maxAmps: null,
  })
  const wrong = (change: Partial<Omit<typeof asked, 'supply'>> & { supply?: string }) =>
    expect(prefillFromSegments(db, pim, MORNING, { ...asked, ...change })).rejects
  await wrong({ segments: ['SG-A', 'SG-N'] }).toMatchObject({
    fields: { second: [expect.stringMatching(/0\.60 m.*0\.50 m/)] },
  })
  await wrong({ segments: ['SG-Z'] }).toMatchObject({
    fields: { segments: [expect.stringContaining('no segment "SG-Z"')] },
  })
  await wrong({ supply: 'HX-9' }).toMatchObject({
    fields: { supply: [expect.stringContaining('"HX-9"')] },
  })
  const magnus = await createUser(db, { roles: ['manager'] })
  await expect(prefillFromSegments(db, magnus, MORNING, asked)).rejects.toMatchObject({ code: 'forbidden' })
})
