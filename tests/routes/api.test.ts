/** The API and the pages around it through the built application: middleware, cookies, headers, forms without script. */
import { count } from 'drizzle-orm'
import { beforeAll, describe, expect, test } from 'vitest'
import { apiToken, reading } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { addToken } from '#app/services/api-tokens.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { cleanDatabase, testDb } from '#tests/support/db.ts'
import {
  createChannel,
  createClock,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const ADDRESS = '/api/v1/sources/NL-X/readings'
let token: string
let administrator: string
let technician: string

beforeAll(async () => {
  await cleanDatabase()
  const db = testDb()
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const admin = await createUser(db, { roles: ['administrator'] })
  administrator = await signIn(admin.personId)
  technician = await signIn((await createUser(db, { roles: ['technician'] })).personId)
  const source = await createSource(db, { code: 'NL-X' })
  await createChannel(db, { sourceId: source.id, name: 'HC-X1' })
  const segment = await createSegment(db, { tag: 'SG-X1' })
  await createPosition(db, { tag: 'HC-X1', segmentId: segment.id, lineId: segment.lineId })
  token = await addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Gateway',
    sources: ['NL-X'],
    until: secondsAfter(MORNING, 86_400),
    reason: 'live feed',
  })
})

function post(options: { bearer?: string; cookie?: string; origin?: string; key?: string } = {}) {
  return request(ADDRESS, {
    method: 'POST',
    ...(options.cookie === undefined ? {} : { cookie: options.cookie }),
    headers: {
      'Content-Type': 'application/json',
      'Idempotency-Key': options.key ?? 'one',
      ...(options.bearer === undefined ? {} : { Authorization: `Bearer ${options.bearer}` }),
      ...(options.origin === undefined ? {} : { Origin: options.origin }),
    },
    body: JSON.stringify({ readings: [{ channel: 'HC-X1', at: MORNING.toISOString(), value: 5.1e-8 }] }),
  })
}

describe('posting readings', () => {
  test('takes a bearer token and answers with JSON and the headers of every answer', async () => {
    const response = await post({ bearer: token })
    expect(response.status).toBe(200)
    expect(await response.json()).toMatchObject({ stored: 1 })
    expect(response.headers.get('X-Content-Type-Options')).toBe('nosniff')
    expect(response.headers.get('Cache-Control')).toBe('private, no-store')
  })

  test('does not care who is signed in: a cookie alone is refused, whoever it is', async () => {
    for (const cookie of [administrator, technician]) {
      const response = await post({ cookie, key: 'by cookie' })
      expect(response.status).toBe(401)
      expect(response.headers.get('Content-Type')).toBe('application/problem+json')
      expect(response.headers.get('WWW-Authenticate')).toMatch(/^Bearer/)
      await response.body?.cancel()
    }
  })

  test('cannot be done by another site with a visitor’s browser', async () => {
    const response = await post({ cookie: administrator, origin: 'http://elsewhere.test' })
    expect(response.status).toBeGreaterThanOrEqual(400)
    await response.body?.cancel()
    expect((await testDb().select({ n: count() }).from(reading))[0]?.n).toBe(1)
  })

  test('reading the address is refused with the method that it takes', async () => {
    const response = await request(ADDRESS)
    expect([response.status, response.headers.get('Allow')]).toEqual([405, 'POST'])
    await response.body?.cancel()
  })
})

describe('tokens', () => {
  test('the page shows the new one in the answer to its making, and never again', async () => {
    const form = {
      intent: 'add',
      name: 'Cellar',
      sources: 'NL-X',
      until: '2026-12-01',
      reason: 'second gateway',
    }
    const made = await request('/people/tokens', { cookie: administrator, form })
    const html = await made.text()
    expect(made.status).toBe(200)
    const shown = /ebb_[A-Za-z0-9_-]{43}/.exec(html)?.[0]
    expect((await post({ bearer: shown ?? '', key: 'two' })).status).toBe(200)
    const again = await (await request('/people/tokens', { cookie: administrator })).text()
    expect(again).toContain('Cellar')
    expect(again).not.toContain('ebb_')
    expect(await testDb().select().from(apiToken)).toHaveLength(2)
  })
})

describe('typing a reading without script', () => {
  const form = {
    position: 'HC-X1',
    value: '2,4e-5',
    unit: 'Pa',
    at: '2026-11-09 07:30',
    instrument: 'Q-1',
    note: '',
  }

  test('the form offers position and units, and the present time', async () => {
    const html = await (await request('/segments/SG-X1/typed-reading', { cookie: technician })).text()
    expect(html).toContain('HC-X1: pressure')
    expect(html).toContain('mbar (pressure)')
    expect(html).toMatch(/value="2026-11-09 08:\d\d"/)
  })

  test('is stored and comes back to the form with one sentence', async () => {
    const sent = await request('/segments/SG-X1/typed-reading', { cookie: technician, form })
    expect([sent.status, sent.headers.get('Location')]).toEqual([302, '/segments/SG-X1/typed-reading'])
    const notice = sent.headers.get('Set-Cookie')?.split(';')[0] ?? ''
    const page = await request('/segments/SG-X1/typed-reading', { cookie: `${technician}; ${notice}` })
    expect(await page.text()).toContain('2.40 × 10⁻⁵ Pa, written down')
  })

  test('refused, it says what was found and expected and keeps what was typed, the time too', async () => {
    const sent = await request('/segments/SG-X1/typed-reading', {
      cookie: technician,
      form: { ...form, value: '0', at: '2026-11-09 07:10' },
    })
    const html = await sent.text()
    expect(sent.status).toBe(400)
    expect(html).toContain('Found 0 Pa')
    expect(html).toContain('value="2026-11-09 07:10"')
    expect(html).toContain('aria-invalid="true"')
  })
})
