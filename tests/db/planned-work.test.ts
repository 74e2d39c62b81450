/** Work in the tunnel beside a heated segment: the officer's limit, the refusal to begin, and two people at once. */
import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { bayClosure, plannedWork, segmentState } from '#app/db/schema/index.ts'
import type { PlannedWorkForm } from '#app/domain/schemas/planned-work.ts'
import { ruleOnConflict } from '#app/services/permit-conflicts.server.ts'
import { actOnWork, changeWork, planWork } from '#app/services/planned-work.server.ts'
import { readWork, readWorks } from '#app/services/planned-work-page.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createLine,
  createSegment,
  createSite,
  createState,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const db = freshDatabase()
const other = secondConnection()
const HOUR = 3600
const RULING = 'Leak check east of the mesh door only; the door stays locked.'

let odalys: TestUser
let ione: TestUser
let rafe: TestUser
let hot: { id: number; tag: string }
let lineId: number
let permitNumber: string

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  odalys = await createUser(db, { roles: ['technician'], name: 'Odalys' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  rafe = await createUser(db, { roles: ['safety-officer'], name: 'Rafe' })
  lineId = await createLine(db, { code: 'MAIN' })
  hot = await createSegment(db, { lineId, tag: 'SG-05', startM: 600, endM: 750 })
  await createSegment(db, { lineId, tag: 'SG-06', startM: 750, endM: 900 })
  const permit = await createPermitRow(db, {
    state: 'issued',
    createdBy: odalys.personId,
    content: {
      segments: ['SG-05'],
      fromM: 600,
      toM: 750,
      holderId: null,
      deputyIds: [],
      isolatingPersonId: null,
      electricianId: null,
    },
  })
  permitNumber = permit.number
})

/** A leak check of SG-06 from two hours before the morning to four hours after. */
function leakCheck(more: Partial<PlannedWorkForm> = {}): PlannedWorkForm {
  return {
    kind: 'leak-check',
    title: 'Spray at the joints',
    place: 'segment:SG-06',
    fromM: null,
    toM: null,
    startsAt: after(MORNING, -2 * HOUR),
    endsAt: after(MORNING, 4 * HOUR),
    people: 'Two of crew A',
    note: '',
    ...more,
  }
}

const limit = (revision: number, fromM: number, toM = 900) => ({
  act: 'limit' as const,
  revision,
  fromM,
  toM,
  barrier: 'Mesh door at 760 m, locked',
  ruling: RULING,
  password: PASSWORD,
})

test('S4: a check from 750 m is not begun, the officer limits it to 760 m, then it begins and ends', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck())
  const page = await readWork(db, odalys, MORNING, id)
  expect(page.clashes.map(({ permit, rule, effect, place }) => ({ permit, rule, effect, place }))).toEqual([
    { permit: permitNumber, rule: 'K3', effect: 'ruling', place: { line: 'MAIN', fromM: 750, toM: 760 } },
    { permit: permitNumber, rule: 'K12', effect: 'warning', place: { line: 'MAIN', fromM: 750, toM: 760 } },
  ])
  expect(page.heated).toMatchObject([{ tag: 'SG-05', fromM: 600, toM: 750, westM: 10, eastM: 10 }])

  await expect(actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })).rejects.toMatchObject({
    code: 'not-acceptable-now',
    fields: { form: [expect.stringMatching(/K3: .*750 to 760 m.*officer/)] },
  })
  await actOnWork(db, ione, MORNING, id, limit(1, 760))
  expect(await readWork(db, odalys, MORNING, id)).toMatchObject({
    work: { state: 'limited', ruledByName: 'Ione', barrier: 'Mesh door at 760 m, locked', ruling: RULING },
    asked: { fromM: 750, toM: 900 },
    left: { fromM: 760, toM: 900 },
    clashes: [],
  })
  await actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 2 })
  await actOnWork(db, odalys, after(MORNING, HOUR), id, {
    act: 'finish',
    revision: 3,
    note: 'Nothing left behind',
  })
  expect((await readWork(db, odalys, MORNING, id)).work).toMatchObject({
    state: 'finished',
    note: 'Nothing left behind',
  })
  const record = await listRecord(db, { subjectKind: 'planned-work', subjectId: String(id), limit: 10 })
  expect(record.map(({ act, person }) => `${act}, ${person}`)).toEqual([
    'work finished, Odalys',
    'work started, Odalys',
    'work limited, Ione',
    'work planned, Odalys',
  ])
  const [row] = await db.select().from(plannedWork).where(eq(plannedWork.id, id))
  expect(row?.signedActId).not.toBeNull()
})

test('a limit that leaves it in the exclusion, or outside what was asked for, is refused with the figures', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck())
  await expect(actOnWork(db, ione, MORNING, id, limit(1, 755))).rejects.toMatchObject({
    code: 'not-acceptable-now',
    fields: { form: [expect.stringContaining('755 to 760 m')] },
  })
  await expect(actOnWork(db, ione, MORNING, id, limit(1, 760, 950))).rejects.toMatchObject({
    fields: { fromM: [expect.stringContaining('750 to 900 m')] },
  })
  expect((await readWork(db, odalys, MORNING, id)).work).toMatchObject({ state: 'planned', revision: 1 })
})

test('a ruling on the permit’s conflict lets it begin as well, until the work changes', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck())
  await ruleOnConflict(db, ione, MORNING, permitNumber, {
    key: `K3:work:${id}`,
    allowed: true,
    text: 'Nobody west of the chain at 756 m.',
    password: PASSWORD,
    revision: 1,
  })
  const [clash] = (await readWork(db, odalys, MORNING, id)).clashes
  expect(clash?.allowedBy).toBe('Ione: Nobody west of the chain at 756 m.')
  await changeWork(db, odalys, MORNING, id, {
    ...leakCheck({ endsAt: after(MORNING, 8 * HOUR) }),
    revision: 1,
    reason: 'takes longer',
  })
  await expect(actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 2 })).rejects.toMatchObject({
    code: 'not-acceptable-now',
  })
})

test('a ruling not to allow it lets nothing begin', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck())
  await ruleOnConflict(db, ione, MORNING, permitNumber, {
    key: `K3:work:${id}`,
    allowed: false,
    text: 'Not while it soaks.',
    password: PASSWORD,
    revision: 1,
  })
  await expect(actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })).rejects.toMatchObject({
    code: 'not-acceptable-now',
  })
})

test('a change takes the officer’s limit away', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck())
  await actOnWork(db, ione, MORNING, id, limit(1, 760))
  const form = { ...leakCheck({ title: 'Spray once more' }), revision: 2, reason: 'another day' }
  expect(await changeWork(db, odalys, MORNING, id, form)).toEqual({ wasLimited: true })
  expect((await readWork(db, odalys, MORNING, id)).work).toMatchObject({
    state: 'planned',
    limitedFromM: null,
    ruling: '',
    ruledByName: null,
  })
})

test('nobody rules on work of their own, a technician on none, and a wrong password signs nothing', async () => {
  const own = await planWork(db, ione, MORNING, leakCheck())
  await expect(actOnWork(db, ione, MORNING, own, limit(1, 760))).rejects.toMatchObject({ code: 'forbidden' })
  await expect(actOnWork(db, odalys, MORNING, own, limit(1, 760))).rejects.toMatchObject({
    code: 'forbidden',
  })
  await expect(
    actOnWork(db, rafe, MORNING, own, { ...limit(1, 760), password: 'not mine' }),
  ).rejects.toMatchObject({ code: 'signature-refused' })
  expect((await readWork(db, odalys, MORNING, own)).work.state).toBe('planned')
})

test('steel that is recorded as hot without a permit keeps people out too', async () => {
  await createSegment(db, { lineId, tag: 'SG-07', startM: 900, endM: 1040 }).then((segment) =>
    createState(db, { segmentId: segment.id, setBy: odalys.personId, state: 'cooling' }),
  )
  const id = await planWork(db, odalys, MORNING, leakCheck({ fromM: 800, toM: 895 }))
  await expect(actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })).rejects.toMatchObject({
    fields: { form: [expect.stringMatching(/SG-07 is recorded as “Cooling”.*890 to 895 m/)] },
  })
  await actOnWork(db, ione, MORNING, id, limit(1, 800, 890))
  await actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 2 })
})

test('a segment that is hot under its permit is said once', async () => {
  await createState(db, { segmentId: hot.id, setBy: odalys.personId, state: 'soak' })
  const id = await planWork(db, odalys, MORNING, leakCheck({ kind: 'bay-work' }))
  expect((await readWork(db, odalys, MORNING, id)).clashes.map(({ permit }) => permit)).toEqual([
    permitNumber,
  ])
  // Whatever the permit says: the state of the tube keeps people out as long as it is recorded as hot.
  await db.update(segmentState).set({ state: 'heating' })
  const later = after(MORNING, 5 * 86_400)
  const late = await planWork(db, odalys, later, leakCheck({ startsAt: later, endsAt: after(later, HOUR) }))
  expect((await readWork(db, odalys, later, late)).clashes).toMatchObject([
    { permit: null, rule: 'K3', effect: 'ruling' },
  ])
})

test('a permit that is only asked for keeps nothing from beginning, and is said', async () => {
  await createPermitRow(db, {
    state: 'requested',
    createdBy: odalys.personId,
    content: { segments: ['SG-06'], fromM: 750, toM: 900, holderId: null },
  })
  const id = await planWork(db, odalys, MORNING, leakCheck({ fromM: 800, toM: 900 }))
  const { clashes } = await readWork(db, odalys, MORNING, id)
  expect(clashes.every(({ effect, text }) => effect === 'warning' && text.startsWith('Asked for only'))).toBe(
    true,
  )
  expect(clashes.length).toBeGreaterThan(0)
  await actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })
})

test('nothing begins in a closed bay, before its time or after it', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck({ fromM: 800, toM: 900 }))
  await db
    .insert(bayClosure)
    .values({ lineId, fromM: 850, toM: 860, reason: 'Oxygen 19.2 %.', closedAt: MORNING })
  await expect(actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })).rejects.toMatchObject({
    fields: { form: [expect.stringMatching(/850 to 860 m has been closed.*19\.2 %/)] },
  })
  const visit = await planWork(db, odalys, MORNING, leakCheck({ kind: 'visit', place: '', people: '' }))
  await expect(actOnWork(db, odalys, MORNING, visit, { act: 'start', revision: 1 })).rejects.toMatchObject({
    fields: { form: [expect.stringContaining('closed')] },
  })
  await db.update(bayClosure).set({ releasedAt: MORNING, releasedBy: ione.personId })
  await expect(
    actOnWork(db, odalys, after(MORNING, -3 * HOUR), id, { act: 'start', revision: 1 }),
  ).rejects.toMatchObject({ fields: { form: [expect.stringContaining('planned from')] } })
  await expect(
    actOnWork(db, odalys, after(MORNING, 4 * HOUR), id, { act: 'start', revision: 1 }),
  ).rejects.toMatchObject({ fields: { form: [expect.stringContaining('was over')] } })
  await actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 })
})

test('places and times that cannot be are refused at their fields', async () => {
  const plan = (more: Partial<PlannedWorkForm>) => planWork(db, odalys, MORNING, leakCheck(more))
  await expect(plan({ place: 'segment:SG-99' })).rejects.toMatchObject({
    fields: { place: [expect.anything()] },
  })
  await expect(plan({ fromM: 700, toM: 800 })).rejects.toMatchObject({
    fields: { fromM: [expect.stringContaining('750 to 900 m')] },
  })
  await expect(plan({ place: 'line:MAIN', fromM: 10, toM: 9000 })).rejects.toMatchObject({
    fields: { toM: [expect.anything()] },
  })
  await expect(plan({ startsAt: after(MORNING, -9 * HOUR), endsAt: MORNING })).rejects.toMatchObject({
    fields: { endsAt: [expect.anything()] },
  })
  await expect(
    planWork(db, await createUser(db, { roles: ['manager'] }), MORNING, leakCheck()),
  ).rejects.toMatchObject({ code: 'forbidden' })
})

test('the list has what cannot begin on top, and what is over apart', async () => {
  const far = await planWork(
    db,
    odalys,
    MORNING,
    leakCheck({ fromM: 850, toM: 900, startsAt: after(MORNING, -3 * HOUR) }),
  )
  const near = await planWork(db, odalys, MORNING, leakCheck())
  const off = await planWork(db, odalys, MORNING, leakCheck())
  await actOnWork(db, odalys, MORNING, off, { act: 'call-off', revision: 1, reason: 'not needed' })
  const { ahead, over } = await readWorks(db, odalys, MORNING)
  expect(ahead.map(({ id, stopped }) => [id, stopped])).toEqual([
    [near, true],
    [far, false],
  ])
  expect(over.map(({ id, state }) => [id, state])).toEqual([[off, 'called-off']])
})

test('of two who act at once one wins and the other is told', async () => {
  const id = await planWork(db, odalys, MORNING, leakCheck({ fromM: 800, toM: 900 }))
  const outcomes = await Promise.allSettled([
    actOnWork(db, odalys, MORNING, id, { act: 'start', revision: 1 }),
    actOnWork(other, ione, MORNING, id, {
      act: 'refuse',
      revision: 1,
      ruling: 'Not today, the door is open.',
      password: PASSWORD,
    }),
  ])
  expect(outcomes.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  const lost = outcomes.find(({ status }) => status === 'rejected') as PromiseRejectedResult
  expect(lost.reason.code).toMatch(/conflict|not-acceptable-now/)
  expect((await readWork(db, odalys, MORNING, id)).work.revision).toBe(2)
})
