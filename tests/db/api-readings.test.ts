/** The API's one address for live readings, from request to response. */
import { RouterContextProvider } from 'react-router'
import { beforeEach, describe, expect, it } from 'vitest'
import { nowContext } from '#app/context.ts'
import { importFile, reading } from '#app/db/schema/index.ts'
import { POST_LIMITS } from '#app/domain/schemas/live-readings.ts'
import { POSTS_PER_MINUTE } from '#app/routes/api/rate-limit.server.ts'
import { action, loader } from '#app/routes/api/readings.tsx'
import { addToken } from '#app/services/api-tokens.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const ADDRESS = 'http://ebbline.test/api/v1/sources/NL-W/readings'
const GOOD = {
  readings: [{ channel: 'HC-01B', at: '2026-11-09T07:55:00+01:00', value: 5.1e-10, unit: 'mbar' }],
}
let token: string

beforeEach(async () => {
  await createSite(db)
  const source = await createSource(db, { code: 'NL-W' })
  await createSource(db, { code: 'NL-E' })
  await createChannel(db, { sourceId: source.id, name: 'HC-01B' })
  const admin = await createUser(db, { roles: ['administrator'] })
  token = await addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Gateway',
    sources: ['NL-W'],
    until: after(MORNING, 86_400),
    reason: 'live feed',
  })
})

interface Sent {
  code?: string
  headers?: Record<string, string | undefined>
  body?: BodyInit
  method?: string
  now?: Date
}

/** What a well-behaved logger sends, with what a test wants otherwise. A header that is undefined is left out. */
async function send(
  sent: Sent = {},
): Promise<{ status: number; headers: Headers; body: Record<string, unknown> }> {
  const headers = new Headers()
  const wanted = {
    Authorization: `Bearer ${token}`,
    'Idempotency-Key': 'first',
    'Content-Type': 'application/json',
    ...sent.headers,
  }
  for (const [name, value] of Object.entries(wanted)) if (value !== undefined) headers.set(name, value)
  const method = sent.method ?? 'POST'
  const init: RequestInit & { duplex: 'half' } = {
    method,
    headers,
    body: sent.body ?? JSON.stringify(GOOD),
    duplex: 'half',
  }
  const context = new RouterContextProvider()
  context.set(nowContext, sent.now ?? MORNING)
  const args = {
    context,
    request: new Request(ADDRESS, init),
    url: new URL(ADDRESS),
    pattern: '/api/v1/sources/:code/readings',
    params: { code: sent.code ?? 'NL-W' },
  }
  const response = await action(args as Parameters<typeof action>[0])
  return { status: response.status, headers: response.headers, body: await response.json() }
}

describe('a post that is taken', () => {
  it('is answered with its import and counts, and again the same when repeated', async () => {
    const first = await send()
    expect(first).toMatchObject({
      status: 200,
      body: { stored: 1, held: 0, conflicting: 0, flagged: 0, skipped: 0 },
    })
    expect(await send()).toMatchObject({ status: 200, body: first.body })
    const [row] = await db.select().from(reading)
    // 1 mbar is 100 Pa by definition of the bar.
    expect(row?.value).toBeCloseTo(5.1e-8, 20)
    expect(row?.importId).toBe(first.body.importId)
  })

  it('may come in pieces without a stated length', async () => {
    const text = new TextEncoder().encode(JSON.stringify(GOOD))
    const body = new ReadableStream<Uint8Array>({
      start(controller) {
        for (let at = 0; at < text.length; at += 7) controller.enqueue(text.slice(at, at + 7))
        controller.close()
      },
    })
    expect(await send({ body })).toMatchObject({ status: 200, body: { stored: 1 } })
  })
})

describe('a post that is refused is a problem document', () => {
  it.each<[string, number, Sent]>([
    ['without a token', 401, { headers: { Authorization: undefined } }],
    [
      'with a cookie and no token',
      401,
      { headers: { Authorization: undefined, Cookie: 'ebbline_session=x' } },
    ],
    ['with an unknown token', 401, { headers: { Authorization: 'Bearer ebb_nobody' } }],
    ['after the last day of its token', 401, { now: after(MORNING, 86_400) }],
    ['for a source that its token is not for', 403, { code: 'NL-E' }],
    ['for a source that there is not', 403, { code: 'NL-Q' }],
    ['without a key', 400, { headers: { 'Idempotency-Key': undefined } }],
    ['with a key too long', 400, { headers: { 'Idempotency-Key': 'k'.repeat(121) } }],
    ['of another type', 415, { headers: { 'Content-Type': 'text/csv' } }],
    ['compressed', 415, { headers: { 'Content-Encoding': 'gzip' } }],
    ['that is no JSON', 400, { body: 'readings' }],
    ['that is empty', 400, { body: '' }],
    ['with nothing in it', 422, { body: '{"readings": []}' }],
    ['too large', 413, { body: ' '.repeat(POST_LIMITS.bodyBytes + 1) }],
    ['by another method', 405, { method: 'PUT' }],
  ])('%s: %i', async (_what, status, sent) => {
    const answer = await send(sent)
    expect(answer.status).toBe(status)
    expect(answer.headers.get('Content-Type')).toBe('application/problem+json')
    expect(answer.body).toMatchObject({
      type: 'about:blank',
      status,
      title: expect.stringMatching(/^[A-Z]/),
      detail: expect.stringMatching(/\.$/),
    })
    expect(answer.headers.has('WWW-Authenticate')).toBe(status === 401)
    expect(await db.select().from(importFile)).toEqual([])
  })

  it('names index, field, what was found and what was expected', async () => {
    const bad = { ...GOOD.readings[0], value: '5,1E-10' }
    const answer = await send({ body: JSON.stringify({ readings: [GOOD.readings[0], bad] }) })
    expect(answer).toMatchObject({
      status: 422,
      body: {
        errorTotal: 1,
        errors: [
          {
            index: 1,
            field: 'value',
            found: '"5,1E-10"',
            expected: expect.stringContaining('decimal point'),
          },
        ],
      },
    })
    expect(await db.select().from(reading)).toEqual([])
  })

  it('when its key was used for another', async () => {
    await send()
    const other = JSON.stringify({ readings: [{ ...GOOD.readings[0], value: 1e-9 }] })
    expect(await send({ body: other })).toMatchObject({ status: 422, body: { code: 'not-acceptable-now' } })
  })

  it('when its body is said to be too large, without reading it', async () => {
    const body = new ReadableStream<Uint8Array>(
      { pull: () => Promise.reject(new Error('was read')) },
      { highWaterMark: 0 },
    )
    const headers = { 'Content-Length': String(POST_LIMITS.bodyBytes + 1) }
    expect(await send({ body, headers })).toMatchObject({ status: 413 })
  })

  it('when its token posts too often, with the time to wait', async () => {
    const empty = { headers: { 'Idempotency-Key': undefined } }
    for (let count = 0; count < POSTS_PER_MINUTE; count += 1) expect((await send(empty)).status).toBe(400)
    const answer = await send()
    expect(answer).toMatchObject({ status: 429, body: { code: 'rate-limited' } })
    expect(Number(answer.headers.get('Retry-After'))).toBeGreaterThan(0)
    expect(Number(answer.headers.get('Retry-After'))).toBeLessThanOrEqual(60)
  })
})

it('reading it is refused with the method that it takes', () => {
  const response = loader({ request: new Request(ADDRESS) } as Parameters<typeof loader>[0])
  expect([response.status, response.headers.get('Allow')]).toEqual([405, 'POST'])
})
