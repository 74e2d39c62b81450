/** The pages of permits as a browser without script meets them. */
import { beforeEach, expect, test } from 'vitest'
import { findPermit } from '#app/db/queries/permits.server.ts'
import { permit } from '#app/db/schema/index.ts'
import type { PermitState } from '#app/domain/permit-words.ts'
import type { Role } from '#app/domain/roles.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { actOnPermit, createPermit, savePermit } from '#app/services/permits.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createState,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'
import { fullContent } from '#tests/support/permit-content.ts'

let engineer: TestUser
let holder: TestUser
let officer: TestUser

beforeEach(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  engineer = await createUser(db, { roles: ['engineer'], name: 'Ada Planner' })
  holder = await createUser(db, { roles: ['technician'], name: 'Hal Holder' })
  officer = await createUser(db, { roles: ['safety-officer'], name: 'Olga Officer' })
  const segment = await createSegment(db, { tag: 'SG-T1' })
  await createState(db, { segmentId: segment.id, setBy: engineer.personId, state: 'in-service' })
})

function content(title = 'Bake at 150 °C') {
  return fullContent({
    title,
    holderId: holder.personId,
    deputyIds: [],
    crewIds: [],
    isolatingPersonId: holder.personId,
    electricianId: holder.personId,
    from: after(MORNING, 3600).toISOString(),
    to: after(MORNING, 90 * 3600).toISOString(),
  })
}

/** A draft by the engineer, put into a state past the acts that lead there. */
async function permitIn(state: PermitState): Promise<{ number: string; revision: string }> {
  const number = await createPermit(testDb(), engineer, MORNING, { content: content() })
  await testDb()
    .update(permit)
    .set({
      state,
      holderId: holder.personId,
      requestedBy: engineer.personId,
      requestedAt: MORNING,
      currentUntil: after(MORNING, 6 * 3600),
    })
  return { number, revision: '1' }
}

async function open(user: TestUser, path: string, form?: Record<string, string>) {
  const cookie = await signIn(user.personId)
  const response = await request(path, { cookie, ...(form === undefined ? {} : { form }) })
  return { status: response.status, html: await response.text(), to: response.headers.get('Location') }
}

test('a refused hand-back says everything that is missing and keeps what was typed, but for the password', async () => {
  const { number, revision } = await permitIn('issued')
  const { status, html } = await open(holder, `/permits/${number}?act=hand-back`, {
    act: 'hand-back',
    revision,
    plantState: 'Valves shut & supply off',
    hottestC: 'warm',
    password: 'not to be seen again',
  })
  expect(status).toBe(400)
  expect(html).toContain('Valves shut &amp; supply off')
  expect(html).toContain('value="warm"')
  expect(html).not.toContain('not to be seen again')
  for (const missing of ['complete or was stopped', 'everybody is clear', 'tools and materials are out']) {
    expect(html).toContain(missing)
  }
})

test('an act on an old page is told what has happened since', async () => {
  const { number, revision } = await permitIn('issued')
  await actOnPermit(testDb(), holder, MORNING, number, {
    act: 'suspend',
    revision: 1,
    reason: 'fan stands still',
    password: '',
    detail: {},
  })
  const { status, html } = await open(holder, `/permits/${number}`, {
    act: 'suspend',
    revision,
    reason: 'smoke at the bars',
  })
  expect(status).toBe(409)
  expect(html).toContain('suspend by Hal Holder')
})

test('whoever sees nothing but the stop card can stop work with it, and sees that it is stopped', async () => {
  const { number, revision } = await permitIn('issued')
  const contributor = await createUser(testDb(), { roles: ['contributor'] })
  const card = await open(contributor, `/permits/${number}`)
  expect(card.status).toBe(200)
  expect(card.html).toContain('Stop card')
  expect(card.html).not.toContain('Hal Holder')
  const stopped = await open(contributor, `/permits/${number}`, {
    act: 'suspend',
    revision,
    reason: 'somebody is inside the barrier',
  })
  expect(stopped.status).toBe(302)
  expect((await findPermit(testDb(), number))?.state).toBe('suspended')
  const afterwards = await open(contributor, `/permits/${number}`)
  expect(afterwards.html).toContain('Suspended')
  expect(afterwards.html).not.toContain('Stop the work')
})

test('the page offers each reader their own acts and no others', async () => {
  const { number } = await permitIn('issued')
  // An act that would be refused is named a second time at the head, with the way to its reasons.
  const offered = async (user: TestUser) => {
    const { html } = await open(user, `/permits/${number}`)
    return [...new Set([...html.matchAll(/\?act=([a-z-]+)#act/g)].map(([, act]) => act))]
  }
  expect(await offered(holder)).toEqual(['revalidate', 'hand-back'])
  expect(await offered(officer)).toEqual(['extend'])
  expect(await offered(engineer)).toEqual([])
})

test('an officer who wrote the permit finds Approve, with why it is for somebody else and who that is', async () => {
  const both = await createUser(testDb(), { roles: ['engineer', 'safety-officer'], name: 'Bo Both' })
  const number = await createPermit(testDb(), both, MORNING, { content: content() })
  await testDb().update(permit).set({ state: 'requested', requestedBy: both.personId, requestedAt: MORNING })
  const { html } = await open(both, `/permits/${number}?act=approve`)
  expect(html).toContain('As things stand this will be refused')
  expect(html).toContain('You asked for this permit')
  expect(html).toMatch(/no part in it: (<!-- -->)?Olga Officer/)
  const pressed = await open(both, `/permits/${number}`, {
    act: 'approve',
    revision: '1',
    password: PASSWORD,
  })
  expect(pressed.status).toBe(403)
  const story = await open(officer, `/permits/${number}/history`)
  expect(story.html).toContain('Bo Both tried to approve and was not let.')
})

test('a change after approval stands beside what was approved', async () => {
  const { number } = await permitIn('approved')
  await testDb().update(permit).set({ approvedVersion: 1, approvedBy: officer.personId, approvedAt: MORNING })
  await testDb().update(permit).set({ state: 'draft' })
  await savePermit(testDb(), engineer, MORNING, number, {
    revision: 1,
    content: { ...content(), maxCelsius: 160 },
    reason: 'hotter',
  })
  await testDb().update(permit).set({ state: 'requested' })
  const { html } = await open(officer, `/permits/${number}`)
  expect(html).toContain('Approved version and newest version side by side')
  expect(html).toMatch(/150 °C[\s\S]*160 °C/)
})

test('the register finds by state, segment, holder, year and words, and shows what waits', async () => {
  const { number } = await permitIn('requested')
  const found = async (query: string, user: TestUser = officer) =>
    (await open(user, `/permits?${query}`)).html.includes(`href="/permits/${number}"`)
  expect(await found('')).toBe(true)
  expect((await open(officer, '/permits')).html).toContain('asks for your decision')
  expect((await open(holder, '/permits')).html).not.toContain('asks for your decision')
  // What waits is on top whatever the filter; the holder, for whom nothing waits, sees what the filter leaves.
  expect(await found('group=live', holder)).toBe(false)
  expect(await found('group=waiting', holder)).toBe(true)
  expect(await found('group=ended', holder)).toBe(false)
  expect(await found('segment=SG-T1', holder)).toBe(true)
  expect(await found(`holder=${holder.personId}`, holder)).toBe(true)
  expect(await found(`year=${number.slice(4, 8)}`, holder)).toBe(true)
  expect(await found('words=150', holder)).toBe(true)
  expect(await found('words=no+such', holder)).toBe(false)
  expect(await found('words=%25%5F', holder)).toBe(false)
})

test('a permit whose validity has passed is shown as run out before anybody has written it down', async () => {
  const { number } = await permitIn('issued')
  await testDb().update(permit).set({ currentUntil: MORNING })
  const { html } = await open(holder, `/permits/${number}`)
  expect(html).toContain('It can never be live again')
  expect(html).not.toContain('Stop the work')
  expect((await findPermit(testDb(), number))?.state).toBe('issued')
})

test('a permit that is not there is not found on any of its pages', async () => {
  const roles: Role[] = ['manager']
  const manager = await createUser(testDb(), { roles })
  for (const page of ['', '/history']) {
    expect((await open(manager, `/permits/HSP-2020-001${page}`)).status).toBe(404)
  }
})
