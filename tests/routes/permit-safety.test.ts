/** Pages of heating, dangers, closed bays and policy, as a browser without script uses them. */
import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { equipment, permit } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { noteDangers, readAllDangers } from '#app/services/safety-events.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { after as later, MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createLine,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'
import { createSupply, type TestSupply } from '#tests/support/supply.ts'

const db = testDb()
const TYPED = '2026-11-09 08:00'
let pim: TestUser
let ione: TestUser
let juniper: TestUser
let supply: TestSupply

beforeEach(async () => {
  await cleanDatabase()
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseMachineAt: machineNow() })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper' })
  const lineId = await createLine(db, { code: 'QF' })
  await createSegment(db, { tag: 'SG-T1', lineId, startM: 0, endM: 150 })
  supply = await createSupply(db)
  await db.insert(equipment).values({ tag: 'OX-3', kind: 'oxygen monitor', facts: 'fixed' })
})

async function page(path: string, who: TestUser): Promise<string> {
  const response = await request(path, { cookie: await signIn(who.personId) })
  expect(response.status, path).toBe(200)
  return readable(await response.text())
}

/** What a reader sees: without scripts, and without the comments that React puts between two pieces of text. */
function readable(html: string): string {
  return html.replaceAll('<!-- -->', '').replaceAll(/<script.*?<\/script>/gs, '')
}
async function post(path: string, who: TestUser, form: Record<string, string>) {
  return request(path, { cookie: await signIn(who.personId), form })
}

const suspended = async () => {
  const made = await createPermitRow(db, { createdBy: pim.personId, state: 'suspended' })
  await supply.posts(later(MORNING, -30), { volts: 23.4, amps: 1083 })
  await tx(db, (inside) => noteDangers(inside, made.number, MORNING))
  return made.number
}

test('a suspended permit whose supply still gives current says so in red, until somebody writes that it is off', async () => {
  const number = await suspended()
  const shown = await page(`/permits/${number}`, pim)
  expect(shown).toContain('role="alert"')
  expect(shown).toContain('Permit suspended with the heating on')
  expect(await page('/', pim)).toContain('Permit suspended with the heating on')
  const said = await post(`/permits/${number}/heating`, pim, {
    on: 'off',
    at: TYPED,
    supply: 'HX-1',
    how: 'breaker off, 0 V at the bars',
  })
  expect(said.status).toBe(302)
  expect((await readAllDangers(db)).open.map(({ kind }) => kind)).toEqual(['permit-suspended'])
  expect(await page(`/permits/${number}/heating`, pim)).toContain('breaker off, 0 V at the bars')
})

test('a statement that lacks something keeps what was typed and has nothing ticked for it', async () => {
  const number = await suspended()
  const refused = await post(`/permits/${number}/heating`, pim, {
    at: TYPED,
    supply: '',
    how: 'read at the set',
  })
  expect(refused.status).toBe(400)
  const html = await refused.text()
  expect(html).toContain('read at the set')
  expect(html).toContain('Say whether the heating is on or off')
  expect(html).not.toContain('checked')
})

test('an officer lets it go on in writing; it stays in sight', async () => {
  const number = await suspended()
  const [danger] = (await readAllDangers(db)).open
  const form = {
    eventId: String(danger?.id),
    reason: 'Cooled by the plan, Pim watches it',
    password: 'wrong',
  }
  const refused = await post('/permits/dangers', ione, form)
  expect(refused.status).toBe(422)
  expect(await refused.text()).toContain(form.reason)
  expect((await post('/permits/dangers', ione, { ...form, password: PASSWORD })).status).toBe(302)
  const shown = await page(`/permits/${number}`, pim)
  expect(shown).toContain('It goes on by the word of Ione')
  expect(shown).toContain('Permit suspended with the heating on')
})

test('a permit past its time is shown as expired before the worker has written it', async () => {
  const made = await createPermitRow(db, {
    createdBy: pim.personId,
    state: 'issued',
    currentUntil: later(MORNING, -1),
  })
  const live = await createPermitRow(db, { createdBy: pim.personId, state: 'issued' })
  expect(await page(`/permits/${made.number}`, pim)).toContain('Expired')
  expect(await page(`/permits/${live.number}`, pim)).not.toContain('Expired')
  const [row] = await db.select({ state: permit.state }).from(permit).where(eq(permit.id, made.id))
  expect(row?.state).toBe('issued')
})

test('19.2 % of oxygen closes the stretch on every page, and an officer opens it on good readings', async () => {
  const reading = {
    intent: 'type-oxygen',
    segment: 'SG-T1',
    percent: '19,2',
    at: '2026-11-09 07:40',
    place: '60 m, at the floor',
    instrument: 'OX-3',
    tester: '',
  }
  const unreadable = await post('/permits/bays', pim, { ...reading, percent: 'low' })
  expect(unreadable.status).toBe(400)
  expect(await unreadable.text()).toContain('60 m, at the floor')
  expect((await post('/permits/bays', pim, reading)).status).toBe(302)
  for (const path of ['/', '/segments/SG-T1']) {
    expect(await page(path, pim)).toContain('Closed, keep out')
  }
  expect(await page('/permits/bays', pim)).toContain(
    'Do not go in to help anybody without breathing apparatus',
  )
  for (const at of ['2026-11-09 07:50', '2026-11-09 08:00']) {
    expect((await post('/permits/bays', pim, { ...reading, percent: '20.6', at })).status).toBe(302)
  }
  const form = page('/permits/bays', ione)
  const id = /name="closureId" value="(\d+)"/.exec(await form)?.[1] ?? ''
  const release = {
    intent: 'release',
    closureId: id,
    reason: 'Vent line shut and locked',
    password: PASSWORD,
  }
  expect((await post('/permits/bays', pim, release)).status).toBe(403)
  expect((await post('/permits/bays', ione, release)).status).toBe(302)
  expect(await page('/', pim)).not.toContain('Closed, keep out')
})

test('policy, hold and deletion: each form by whom it belongs to', async () => {
  const endedAt = later(MORNING, -3000 * 86_400)
  const old = await createPermitRow(db, { createdBy: pim.personId, state: 'cancelled', endedAt })
  expect(await page('/permits/policy', pim)).not.toContain('Sign: set it')
  const set = {
    intent: 'set-policy',
    seen: '0',
    extensionAllowed: 'no',
    keepDays: '100',
    reason: 'as the insurer asks',
    password: PASSWORD,
  }
  const short = await post('/permits/policy', ione, set)
  expect(short.status).toBe(400)
  expect(await short.text()).toContain('At least 366 days')
  expect((await post('/permits/policy', ione, { ...set, keepDays: '400' })).status).toBe(302)
  expect((await post('/permits/policy', pim, { ...set, keepDays: '400', seen: '1' })).status).toBe(403)

  expect((await post('/permits/policy', juniper, { intent: 'ask-run', password: PASSWORD })).status).toBe(302)
  const shown = await page('/permits/policy', ione)
  expect(shown).toContain(old.number)
  const runId = /name="runId" value="(\d+)"/.exec(shown)?.[1] ?? ''
  const manifest = await request(`/permits/policy/runs/${runId}/manifest.json`, {
    cookie: await signIn(ione.personId),
  })
  expect(manifest.headers.get('Content-Disposition')).toContain('attachment')
  expect(await manifest.json()).toMatchObject({
    askedBy: 'Juniper',
    permits: [{ number: old.number, deletedAt: null, sha256: expect.stringMatching(/^[0-9a-f]{64}$/) }],
  })
  const agree = { intent: 'agree', runId, revision: '1', password: PASSWORD }
  expect((await post('/permits/policy', juniper, agree)).status).toBe(403)
  expect((await post('/permits/policy', ione, agree)).status).toBe(302)
  expect(await db.select().from(permit)).toEqual([])
})
