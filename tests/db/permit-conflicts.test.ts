/** Conflicts of permits from what the database holds, and an officer's rulings on them. */
import { beforeEach, expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import {
  bakePlan,
  bakePlanVersion,
  competence,
  isolationPoint,
  limitValue,
  lockInUse,
  person,
  plannedWork,
  valve,
} from '#app/db/schema/index.ts'
import type { PermitContent } from '#app/domain/permit-content.ts'
import { readConflicts, ruleOnConflict } from '#app/services/permit-conflicts.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createLine,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const db = freshDatabase()
const other = secondConnection()
const DAY = 86_400

let bram: TestUser
let pim: TestUser
let ione: TestUser
let rafe: TestUser
let west: { id: number; tag: string }
let east: { id: number; tag: string }

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  rafe = await createUser(db, { roles: ['safety-officer'], name: 'Rafe' })
  const lineId = await createLine(db, { code: 'MAIN' })
  west = await createSegment(db, { lineId, tag: 'SG-05', startM: 600, endM: 750 })
  east = await createSegment(db, { lineId, tag: 'SG-06', startM: 750, endM: 900 })
  await db.insert(valve).values({
    tag: 'GV-05',
    kind: 'gate',
    lineId,
    chainageM: 750,
    segmentId: west.id,
    eastSegmentId: east.id,
    seal: 'metal',
    limitC: 300,
    partRiseShare: 1,
    normalPosition: 'open',
  })
  await limitOf('power-cap-day', 200, 'kW')
  await limitOf('power-cap-night', 260, 'kW')
})

function limitOf(kind: typeof limitValue.$inferInsert.kind, value: number, unit: string) {
  const startsAt = after(MORNING, -DAY)
  return db
    .insert(limitValue)
    .values({ kind, value, unit, startsAt, reason: 'for a test', recordedAt: startsAt })
}

/** A permit on SG-05 from an hour before the morning for four days, whose people need no competence. */
async function asked(
  more: Partial<PermitContent> = {},
  row: Partial<Parameters<typeof createPermitRow>[1]> = {},
) {
  return createPermitRow(db, {
    state: 'requested',
    createdBy: bram.personId,
    requestedBy: bram.personId,
    content: {
      segments: ['SG-05'],
      fromM: 600,
      toM: 750,
      supply: null,
      equipment: [],
      holderId: null,
      deputyIds: [],
      crewIds: [],
      isolatingPersonId: null,
      electricianId: null,
      points: [],
      ...more,
    },
    ...row,
  })
}

async function conflictsOf(number: string, now = MORNING) {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error(`no permit ${number}`)
  return readConflicts(db, permit, now)
}

async function keysOf(number: string, now = MORNING) {
  return (await conflictsOf(number, now)).map(({ key, effect }) => `${key} ${effect}`)
}

async function spray(more: Partial<typeof plannedWork.$inferInsert> = {}): Promise<number> {
  const [made] = await db.insert(plannedWork).values({
    kind: 'bay-work',
    title: 'Cables',
    segmentId: east.id,
    startsAt: after(MORNING, 3600),
    endsAt: after(MORNING, 7200),
    people: 'Two',
    state: 'planned',
    createdBy: pim.personId,
    createdAt: MORNING,
    ...more,
  })
  return made.insertId
}

const ruling = (key: string, more: object = {}) => ({
  key,
  allowed: true,
  text: 'Chain at 762 m, watched by crew B.',
  password: PASSWORD,
  revision: 1,
  ...more,
})

test('a neighbour’s permit, and one on the same segment, are found whichever of the two is asked', async () => {
  const one = await asked()
  const two = await asked({ segments: ['SG-06'] })
  const three = await asked()
  expect(await keysOf(one.number)).toEqual([`K1:SG-05:${three.number} block`, `K2:GV-05:${two.number} block`])
  expect(await keysOf(two.number)).toEqual([`K2:GV-05:${one.number} block`, `K2:GV-05:${three.number} block`])
})

test('drafts claim nothing, and what has ended neither claims nor conflicts', async () => {
  const live = await asked()
  const draft = await asked({}, { state: 'draft' })
  const over = await asked({}, { state: 'cancelled' })
  expect(await keysOf(live.number)).toEqual([])
  expect(await keysOf(draft.number)).toEqual([`K1:SG-05:${live.number} block`])
  expect(await keysOf(over.number)).toEqual([])
})

test('a draft is compared by the window that it asks for, an extended permit by the one that it has', async () => {
  const live = await asked({}, { state: 'issued', windowTo: after(MORNING, 6 * DAY) })
  const after5 = { from: after(MORNING, 5 * DAY).toISOString(), to: after(MORNING, 8 * DAY).toISOString() }
  const draft = await asked(after5, { state: 'draft', windowFrom: null, windowTo: null })
  expect(await keysOf(draft.number)).toEqual([`K1:SG-05:${live.number} block`])
})

test('a gate valve counts as shut once its lock hangs and is verified', async () => {
  const { number, id } = await asked({
    points: [{ tag: 'IP-1', isolates: 'GV-05', required: 'shut', purpose: 'to-heat', boxed: false }],
  })
  const workId = await spray({ kind: 'vent', fromM: 800, toM: 900 })
  expect(await keysOf(number)).toEqual([`K4:work:${workId}:GV-05 warning`])
  const [point] = await db.insert(isolationPoint).values({
    permitId: id,
    tag: 'IP-1',
    isolates: 'GV-05',
    required: 'shut',
    purpose: 'to-heat',
    lockNumber: 'L-1',
    appliedBy: pim.personId,
    appliedAt: MORNING,
  })
  await db
    .insert(lockInUse)
    .values({ lockNumber: 'L-1', permitId: id, pointId: point.insertId, since: MORNING })
  expect(await keysOf(number)).toEqual([`K4:work:${workId}:GV-05 warning`])
  await db.update(isolationPoint).set({ verifiedBy: ione.personId, verifiedAt: MORNING })
  expect(await keysOf(number)).toEqual([])
})

test('S3: a licence that ends inside the window blocks with its date; a second electrician clears it', async () => {
  const [wendel] = await db.insert(person).values({ name: 'Wendel Quarrie', createdAt: MORNING })
  const [second] = await db.insert(person).values({ name: 'Second Electrician', createdAt: MORNING })
  const licence = (personId: number, number: string, endsAt: Date | null) => ({
    personId,
    kind: 'electrician-licence' as const,
    number,
    startsAt: after(MORNING, -9 * DAY),
    endsAt,
    enteredBy: ione.personId,
    enteredAt: MORNING,
  })
  // Midnight of the site at the end of 11 November.
  await db.insert(competence).values(licence(wendel.insertId, 'QE-1187', new Date('2026-11-11T23:00:00Z')))
  const { number } = await asked({ electricianId: wendel.insertId, crewIds: [second.insertId] })
  const [k8] = await conflictsOf(number)
  expect(k8).toMatchObject({
    rule: 'K8',
    effect: 'block',
    key: `K8:person:${wendel.insertId}:electrician-licence`,
  })
  expect(k8?.text).toContain('QE-1187 ends with the day 2026-11-11')
  await db.insert(competence).values(licence(second.insertId, 'QE-2', null))
  expect(await keysOf(number)).toEqual([])
})

test('the limits of the register decide how far the exclusion reaches and from which heat on', async () => {
  const { number } = await asked({ maxCelsius: 70 })
  const workId = await spray({ fromM: 762, toM: 800 })
  expect(await keysOf(number)).toEqual([])
  await limitOf('exclusion-length', 15, 'm')
  expect(await keysOf(number)).toEqual([`K3:work:${workId} ruling`])
  await limitOf('exclusion-temperature', 80, '°C')
  expect(await keysOf(number)).toEqual([])
})

test('an officer’s ruling is signed, stands on the record and holds until the facts change', async () => {
  const { number } = await asked()
  const workId = await spray()
  const key = `K3:work:${workId}`
  await ruleOnConflict(db, ione, MORNING, number, ruling(key))
  const [found] = await conflictsOf(number)
  expect(found?.ruling).toEqual({
    allowed: true,
    stale: false,
    text: 'Chain at 762 m, watched by crew B.',
    by: 'Ione',
    at: MORNING,
  })
  const [line] = await listRecord(db, { limit: 1 })
  expect(line).toMatchObject({ act: 'permit conflict allowed', person: 'Ione', subjectId: number })
  await db.update(plannedWork).set({ endsAt: after(MORNING, 9000) })
  expect((await conflictsOf(number))[0]?.ruling).toMatchObject({ allowed: true, stale: true })
  await ruleOnConflict(
    db,
    rafe,
    after(MORNING, 60),
    number,
    ruling(key, { allowed: false, text: 'No longer: too long.' }),
  )
  expect((await conflictsOf(number))[0]?.ruling).toMatchObject({ allowed: false, stale: false, by: 'Rafe' })
})

test('nobody rules who asked for it, drew it up, planned its bake or holds it, nor anybody without the role', async () => {
  const officer = (name: string) => createUser(db, { roles: ['safety-officer', 'engineer'], name })
  const [requester, drafter, planner, holder] = [
    await officer('Requester'),
    await officer('Drafter'),
    await officer('Planner'),
    await officer('Holder'),
  ]
  const [plan] = await db
    .insert(bakePlan)
    .values({ title: 'Bake', state: 'ready', createdBy: bram.personId, createdAt: MORNING })
  const content = {
    segments: ['SG-05'],
    startsAt: null,
    prepHours: 48,
    celsius: 150,
    upKH: 10,
    holdPa: 0.01,
    abortPa: null,
    spreadK: 20,
    soakHours: 60,
    soakEnd: { fallPercent: 10, waterBehind: true },
    cooling: { kind: 'natural' },
    pumpChangeC: 80,
    coldC: 40,
    testHours: 48,
    supply: null,
    cart: null,
    targetPa: 2e-7,
    remarks: '',
  }
  await db.insert(bakePlanVersion).values({
    planId: plan.insertId,
    version: 1,
    content,
    madeBy: planner.personId,
    madeAt: MORNING,
  })
  const { number } = await asked(
    { planId: plan.insertId, deputyIds: [holder.personId] },
    { createdBy: drafter.personId, requestedBy: requester.personId },
  )
  // The deputy has no competence on record, which is another conflict.
  const key = `K3:work:${await spray()}`
  for (const [who, why] of [
    [requester, 'asked for it'],
    [drafter, 'drew it up'],
    [planner, 'planned the bake'],
    [holder, 'stand in for its holder'],
  ] as const) {
    await expect(ruleOnConflict(db, who, MORNING, number, ruling(key))).rejects.toMatchObject({
      code: 'forbidden',
      message: expect.stringContaining(why),
    })
  }
  await expect(ruleOnConflict(db, bram, MORNING, number, ruling(key))).rejects.toMatchObject({
    code: 'forbidden',
  })
  await ruleOnConflict(db, ione, MORNING, number, ruling(key))
})

test('a ruling on what is blocked, gone, only a warning, or on another revision is refused and not kept', async () => {
  const { number } = await asked()
  const rival = await asked()
  const key = `K3:work:${await spray()}`
  const power = await spray({ kind: 'power-maintenance', segmentId: null })
  const refused = (form: ReturnType<typeof ruling>) =>
    expect(ruleOnConflict(db, ione, MORNING, number, form)).rejects
  await refused(ruling(`K1:SG-05:${rival.number}`)).toMatchObject({ code: 'not-acceptable-now' })
  await refused(ruling(`K11:work:${power}`)).toMatchObject({ code: 'not-acceptable-now' })
  await refused(ruling('K3:work:999')).toMatchObject({ code: 'conflict' })
  await refused(ruling(key, { revision: 2 })).toMatchObject({ code: 'conflict' })
  await refused(ruling(key, { password: 'not mine' })).toMatchObject({ code: 'signature-refused' })
  expect((await conflictsOf(number)).every((one) => one.ruling === null)).toBe(true)
  const draft = await asked({}, { state: 'draft' })
  await expect(ruleOnConflict(db, ione, MORNING, draft.number, ruling(key))).rejects.toMatchObject({
    code: 'not-acceptable-now',
  })
  await expect(ruleOnConflict(db, ione, MORNING, 'HSP-1999-001', ruling(key))).rejects.toMatchObject({
    code: 'not-found',
  })
})

test('of two officers who rule at once both stand on record, and the last holds', async () => {
  const { number } = await asked()
  const key = `K3:work:${await spray()}`
  await Promise.all([
    ruleOnConflict(db, ione, MORNING, number, ruling(key)),
    ruleOnConflict(
      other,
      rafe,
      MORNING,
      number,
      ruling(key, { allowed: false, text: 'Not while it soaks.' }),
    ),
  ])
  const record = await listRecord(db, { subjectKind: 'permit', subjectId: number, limit: 5 })
  expect(record.map(({ person: who }) => who).sort()).toEqual(['Ione', 'Rafe'])
  expect((await conflictsOf(number))[0]?.ruling?.by).toBe(record[0]?.person)
})
