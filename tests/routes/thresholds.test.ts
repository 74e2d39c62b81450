/** The page of thresholds, as a browser without script uses it. */
import { beforeEach, expect, test } from 'vitest'
import { machineNow } from '#app/machine-time.server.ts'
import { adoptedValue } from '#app/services/thresholds.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import { createClock, createSite, createUser, PASSWORD } from '#tests/support/factories.ts'

const HERE = '/permits/thresholds'
let officer = 0
let technician = 0

beforeEach(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  officer = (await createUser(db, { roles: ['safety-officer'] })).personId
  technician = (await createUser(db, { roles: ['technician'] })).personId
})

const ADOPTION = {
  act: 'adopt',
  key: 'shock-volts',
  seen: '0',
  value: '50',
  source: 'Site rule 4',
  edition: 'of 2025',
  reviewAt: '2028-01-10 08:00',
  reason: 'counts for direct current too',
  password: PASSWORD,
}

async function get(path: string, person = officer): Promise<string> {
  const response = await request(path, { cookie: await signIn(person) })
  expect(response.status).toBe(200)
  return response.text()
}

async function post(form: Record<string, string>, path = `${HERE}?key=shock-volts`, person = officer) {
  const response = await request(path, { cookie: await signIn(person), form })
  return { status: response.status, html: await response.text(), to: response.headers.get('Location') }
}

/** The start tag of the first field of that name behind a mark in the page. */
function tagAfter(html: string, mark: string, name: string): string {
  const behind = html.slice(html.indexOf(mark))
  return behind.match(/<(?:input|textarea)\b[^>]*>/g)?.find((tag) => tag.includes(` name="${name}"`)) ?? ''
}

const plain = (html: string): string => html.replaceAll(/<[^>]+>/g, '').replaceAll(/\s+/g, ' ')

test('an empty site has nothing set, and the published value is in no field', async () => {
  const html = await get(`${HERE}?key=shock-volts`)
  expect(plain(html)).toContain('15 of 15 not set by site')
  expect(plain(html)).toContain('checked against its text')
  expect(plain(html)).toContain('from memory, not verified')
  expect(tagAfter(html, 'value="adopt"', 'value')).not.toMatch(/ value="[^"]/)
})

test('adopts, shows it, and ends it again', async () => {
  const done = await post({ ...ADOPTION, value: '50,0' })
  expect(done).toMatchObject({ status: 302, to: `${HERE}?key=shock-volts` })
  expect(await adoptedValue(testDb(), 'shock-volts', MORNING)).toBe(50)
  const html = await get(`${HERE}?key=shock-volts`)
  expect(plain(html)).toContain('14 of 15 not set by site')
  expect(plain(html)).toContain('Site rule 4, of 2025')
  const seen = / value="(\d+)"/.exec(tagAfter(html, 'value="end"', 'seen'))?.[1] ?? ''
  const ended = await post({
    act: 'end',
    key: 'shock-volts',
    seen,
    reason: 'worked out anew this week',
    password: PASSWORD,
  })
  expect(ended.status).toBe(302)
  expect(await adoptedValue(testDb(), 'shock-volts', MORNING)).toBeNull()
})

test('a refusal names every field and keeps what was typed, but for the password', async () => {
  const { status, html } = await post({
    ...ADOPTION,
    value: '5000',
    source: '',
    reviewAt: 'next year',
    password: 'not my password',
  })
  expect(status).toBe(400)
  expect(plain(html)).toContain('5000 is outside what is taken here: from 1 to 120 V.')
  expect(tagAfter(html, 'value="adopt"', 'value')).toContain('value="5000"')
  expect(tagAfter(html, 'value="adopt"', 'reviewAt')).toContain('value="next year"')
  expect(html).toContain('>counts for direct current too</textarea>')
  expect(html).not.toContain('not my password')
  expect(await adoptedValue(testDb(), 'shock-volts', MORNING)).toBeNull()
})

test.each([
  ['a wrong password', { password: 'not my password' }, 422],
  ['a page that is old', { seen: '77' }, 409],
  ['a review date that has passed', { reviewAt: '2020-01-01 08:00' }, 400],
  ['a threshold that is none', { key: 'toString' }, 400],
] as const)('%s changes nothing', async (_what, change, status) => {
  const answer = await post({ ...ADOPTION, ...change })
  expect(answer.status).toBe(status)
  expect(await adoptedValue(testDb(), 'shock-volts', MORNING)).toBeNull()
})

test('a value less careful than the published one is taken, and said to be that', async () => {
  expect((await post({ ...ADOPTION, value: '60' })).status).toBe(302)
  expect(plain(await get(HERE))).toContain('60 Vless careful than published')
})

test('the size of a bay: set by an officer, refused where it cannot be', async () => {
  const form = { act: 'bay-volume', seen: '0', reason: 'measured between the curtains', password: PASSWORD }
  const refused = await post({ ...form, volumeM3: '3' }, HERE)
  expect(refused.status).toBe(400)
  expect(tagAfter(refused.html, 'value="bay-volume"', 'volumeM3')).toContain('value="3"')
  expect((await post({ ...form, volumeM3: '960' }, HERE)).status).toBe(302)
  expect(plain(await get(HERE))).toContain('960 m³ (size set by the site)')
})

test('others look and find no form', async () => {
  const html = await get(`${HERE}?key=shock-volts`, technician)
  expect(html).not.toContain('type="password"')
  expect((await post(ADOPTION, HERE, technician)).status).toBe(403)
})
