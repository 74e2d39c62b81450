/** The log intake over HTTP: upload in both forms, refusals with their status, taking in, downloads. */
import { count } from 'drizzle-orm'
import { beforeEach, describe, expect, test } from 'vitest'
import { importFile, reading } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let cookie = ''

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const source = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: source.id, name })
  cookie = await signIn((await createUser(db, { roles: ['technician'] })).personId)
})

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))

function put(text: string, name = 'NL-W_2026-11-08.csv') {
  return request(`/intake/upload?source=NL-W&name=${encodeURIComponent(name)}`, {
    method: 'PUT',
    cookie,
    body: text,
    headers: { 'Content-Type': 'application/octet-stream' },
  })
}

function post(text: string | null, name = 'NL-W_2026-11-08.csv') {
  const form = new FormData()
  form.set('source', 'NL-W')
  if (text !== null) form.set('file', new File([text], name))
  return request('/intake', { method: 'POST', cookie, body: form })
}

async function rows(): Promise<{ imports: number; readings: number }> {
  const [imports] = await db.select({ n: count() }).from(importFile)
  const [readings] = await db.select({ n: count() }).from(reading)
  return { imports: imports?.n ?? -1, readings: readings?.n ?? -1 }
}

describe('sending a file', () => {
  test('the plain form leads to the report, where it can be taken in', async () => {
    const sent = await post(night())
    expect(sent.status).toBe(302)
    const address = sent.headers.get('Location') ?? ''
    expect(address).toMatch(/^\/intake\/\d+$/)
    const page = await (await request(address, { cookie })).text()
    expect(page).toContain('Check before taking in')
    expect(page).toContain('data-testid="lines-total">147<')
    const taken = await request(address, { cookie, form: { intent: 'accept' } })
    expect(taken.status).toBe(302)
    expect(await rows()).toEqual({ imports: 1, readings: 435 })
  })

  test('bare bytes answer 201 with the address, and 409 with the earlier import once taken in', async () => {
    const sent = await put(night())
    expect(sent.status).toBe(201)
    const { importId, href } = (await sent.json()) as { importId: number; href: string }
    expect(href).toBe(`/intake/${importId}`)
    await request(href, { cookie, form: { intent: 'accept' } })
    const again = await put(night(), 'again.csv')
    expect(again.status).toBe(409)
    expect(await again.json()).toMatchObject({
      ok: false,
      importId,
      message: expect.stringContaining(`import ${importId}`),
    })
    expect(await rows()).toEqual({ imports: 1, readings: 435 })
  })

  test.each([
    ['no unit', () => night().replace('   Einheit: mbar', ''), 422, 'In line 3, field 2'],
    ['empty', () => '', 422, 'a file of 0 bytes'],
    ['a web page', () => '<html><form></form></html>', 415, 'a web page'],
    ['a zip archive', () => 'PK\u0003\u0004 and so on', 415, 'a zip archive'],
    ['channels of somewhere else', () => night().replaceAll('-01', '-77'), 422, 'HC-77A'],
  ])('refuses %s with what was found and stores no reading', async (_, make, status, found) => {
    for (const answer of [await put(make()), await post(make())]) {
      expect(answer.status).toBe(status)
      const text = await answer.text()
      expect(text).toContain(found)
      expect(text).toContain('expected')
    }
    expect((await rows()).readings).toBe(0)
  })

  test('a form without a file is told so', async () => {
    const answer = await post(null)
    expect(answer.status).toBe(400)
    expect(await answer.text()).toContain('Choose the file that the logger wrote')
    expect((await rows()).imports).toBe(0)
  })

  test('an unknown source is named', async () => {
    const answer = await request('/intake/upload?source=NL-Q&name=x.csv', {
      method: 'PUT',
      cookie,
      body: night(),
    })
    expect(answer.status).toBe(400)
    expect(await answer.json()).toMatchObject({ fields: { source: [expect.stringContaining('NL-Q')] } })
  })
})

describe('what can be fetched', () => {
  test('the original comes back byte for byte, as a download', async () => {
    const sent = await put(night(), 'Nacht "1" é.csv')
    const { href } = (await sent.json()) as { href: string }
    const original = await request(`${href}/original`, { cookie })
    expect(original.headers.get('Content-Disposition')).toBe(
      `attachment; filename="Nacht__1___.csv"; filename*=UTF-8''Nacht%20%221%22%20%C3%A9.csv`,
    )
    expect(Buffer.from(await original.arrayBuffer()).equals(Buffer.from(night()))).toBe(true)
  })

  test('rejected lines come as CSV in which nothing is a formula', async () => {
    const sent = await put(night().replace('08.11.2026 06:10:00;', '=HYPERLINK("x");'))
    const { href } = (await sent.json()) as { href: string }
    const csv = await (await request(`${href}/rejected.csv`, { cookie })).text()
    expect(csv.split('\r\n')[0]).toBe('line,field,reason,found,expected,mend,text')
    expect(csv).toContain('4,1,unreadable-time')
    expect(csv).not.toMatch(/(^|,)"?=/m)
  })
})
