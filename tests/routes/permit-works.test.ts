/** Works, rulings and competences as a browser without script sends them: refused forms keep what was typed. */
import { beforeAll, expect, test } from 'vitest'
import { competence, plannedWork } from '#app/db/schema/index.ts'
import type { Role } from '#app/domain/roles.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createLine,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'

const people = new Map<Role, number>()
const SECRET = 'not my password at all'
let permit: { id: number; number: string }

beforeAll(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  for (const role of ['technician', 'safety-officer', 'manager', 'administrator'] as const)
    people.set(role, (await createUser(db, { roles: [role] })).personId)
  const engineer = await createUser(db, { roles: ['engineer'] })
  const lineId = await createLine(db, { code: 'MAIN' })
  await createSegment(db, { lineId, tag: 'SG-05', startM: 600, endM: 750 })
  await createSegment(db, { lineId, tag: 'SG-06', startM: 750, endM: 900 })
  permit = await createPermitRow(db, {
    state: 'approved',
    createdBy: engineer.personId,
    requestedBy: engineer.personId,
    content: {
      segments: ['SG-05'],
      holderId: null,
      deputyIds: [],
      crewIds: [],
      isolatingPersonId: null,
      electricianId: null,
    },
  })
})

async function send(role: Role, path: string, form?: Record<string, string>) {
  const cookie = await signIn(people.get(role) ?? 0)
  const response = await request(path, { cookie, ...(form === undefined ? {} : { form }) })
  return { status: response.status, to: response.headers.get('Location'), html: await response.text() }
}

const WORK = {
  kind: 'leak-check',
  title: 'Spray all of it',
  place: 'segment:SG-06',
  fromM: '750,0',
  toM: '900',
  startsAt: '2026-11-09 07:00',
  endsAt: '2026-11-09 18:00',
  people: 'Two of crew A',
  note: '',
}

test('work is planned, shown with what it would meet, not begun, limited and begun', async () => {
  const made = await send('technician', '/permits/works/new', WORK)
  expect(made.status).toBe(302)
  const path = made.to ?? ''
  const page = await send('technician', path)
  expect(page.html).toContain('750 to 760 m')
  expect(page.html).toContain('no entry from')
  const begin = (revision: string) => send('technician', path, { act: 'start', revision })
  const refused = await begin('1')
  expect(refused.status).toBe(422)
  expect(refused.html).toContain('This work cannot begin')
  const limit = { act: 'limit', revision: '1', toM: '900', barrier: 'Mesh door, locked', password: PASSWORD }
  const ruling = 'East of the mesh door only; it stays locked.'
  const near = await send('safety-officer', path, { ...limit, fromM: '755,5', ruling })
  expect(near.status).toBe(422)
  expect(near.html).toContain('755.5 to 760 m')
  expect(near.html).toContain(ruling)
  expect((await send('safety-officer', path, { ...limit, fromM: '760', ruling })).status).toBe(302)
  expect((await begin('2')).status).toBe(302)
  expect((await send('technician', path)).html).toContain('under way')
})

test('a plan that cannot be read comes back as it was typed', async () => {
  const { status, html } = await send('technician', '/permits/works/new', {
    ...WORK,
    startsAt: 'after lunch',
    fromM: 'x',
  })
  expect(status).toBe(400)
  expect(html).toContain('value="after lunch"')
  expect(html).toContain('value="x"')
  expect(html).toContain('value="Spray all of it"')
})

test('a limit that is refused keeps its words and not the password', async () => {
  const db = testDb()
  const [made] = await db.insert(plannedWork).values({
    kind: 'bay-work',
    title: 'Cables',
    segmentId: null,
    startsAt: after(MORNING, -3600),
    endsAt: after(MORNING, 3600),
    state: 'planned',
    createdBy: people.get('technician') ?? 0,
    createdAt: MORNING,
  })
  const { status, html } = await send('safety-officer', `/permits/works/${made.insertId}`, {
    act: 'refuse',
    revision: '7',
    ruling: 'Not in this stretch of the tunnel.',
    password: SECRET,
  })
  expect(status).toBe(409)
  expect(html).toContain('Not in this stretch of the tunnel.')
  expect(html).not.toContain(SECRET)
})

test('an officer rules on a conflict from the permit’s page; a refused ruling keeps its words', async () => {
  const [made] = await testDb()
    .insert(plannedWork)
    .values({
      kind: 'fire-detection-off',
      title: 'Detectors washed',
      startsAt: after(MORNING, 3600),
      endsAt: after(MORNING, 7200),
      state: 'planned',
      createdBy: people.get('technician') ?? 0,
      createdAt: MORNING,
    })
  const path = `/permits/${permit.number}`
  const form = {
    act: 'rule',
    key: `K9:work:${made.insertId}`,
    revision: '1',
    allowed: 'yes',
    text: 'Crew B keeps a fire watch meanwhile.',
    password: SECRET,
  }
  const wrong = await send('safety-officer', path, form)
  expect(wrong.status).toBe(422)
  expect(wrong.html).toContain('Crew B keeps a fire watch meanwhile.')
  expect(wrong.html).not.toContain(SECRET)
  expect((await send('manager', path, { ...form, password: PASSWORD })).status).toBe(403)
  const right = await send('safety-officer', path, { ...form, password: PASSWORD })
  expect(right.status).toBe(302)
  expect((await send('manager', path)).html).toContain('Allowed by ruling')
})

test('an officer enters a competence on a person’s page and sees nothing of the account there', async () => {
  const id = people.get('technician') ?? 0
  const form = {
    intent: 'competence-enter',
    kind: 'permit-holder',
    number: 'PH-1',
    startsAt: '2025-01-01',
    until: '2027-01-01',
    note: 'Certificate seen',
  }
  const bad = await send('safety-officer', `/people/${id}`, { ...form, until: '1.1.2027' })
  expect(bad.status).toBe(400)
  expect(bad.html).toContain('value="1.1.2027"')
  expect((await send('safety-officer', `/people/${id}`, form)).status).toBe(302)
  const page = await send('safety-officer', `/people/${id}`)
  expect(page.html).toContain('PH-1')
  expect(page.html).not.toContain('Give a role')
  expect(page.html).not.toContain('@example.test')
  expect((await send('administrator', `/people/${id}`)).html).toContain('Give a role')
  expect(
    (await send('safety-officer', `/people/${id}`, { intent: 'grant', role: 'safety-officer' })).status,
  ).toBe(403)
  expect((await send('manager', '/people/competences')).html).toContain('PH-1')
  expect(await testDb().select().from(competence)).toHaveLength(1)
})
