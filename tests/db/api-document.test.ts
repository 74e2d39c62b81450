/** The served description of the API against the routes and what they really answer. */
import { RouterContextProvider } from 'react-router'
import { beforeEach, describe, expect, it } from 'vitest'
import { z } from 'zod'
import { nowContext } from '#app/context.ts'
import { action as putFile } from '#app/routes/api/files.tsx'
import { loader as readDocument } from '#app/routes/api/openapi.tsx'
import { action as postReadings } from '#app/routes/api/readings.tsx'
import routes from '#app/routes.ts'
import { addToken } from '#app/services/api-tokens.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let bearer: string

interface Operation {
  responses: Record<string, { content?: Record<string, { schema?: { $ref: string } }> }>
}
interface ApiDocument {
  openapi: string
  paths: Record<string, Record<string, Operation>>
  components: { schemas: Record<string, Parameters<typeof z.fromJSONSchema>[0]> }
}

async function document(): Promise<ApiDocument> {
  return (await readDocument().json()) as ApiDocument
}

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const source = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  await createSource(db, { code: 'NL-E' })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: source.id, name })
  const admin = await createUser(db, { roles: ['administrator'] })
  bearer = await addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Gateway',
    sources: ['NL-W'],
    until: after(MORNING, 86_400),
    reason: 'for a test',
  })
})

type Action = (args: never) => Promise<Response> | Response

function call(
  action: Action,
  method: string,
  params: Record<string, string>,
  body: BodyInit,
  headers: Record<string, string> = {},
): Promise<Response> | Response {
  const context = new RouterContextProvider()
  context.set(nowContext, MORNING)
  const request = new Request('http://ebbline.test/api', {
    method,
    body,
    headers: { Authorization: `Bearer ${bearer}`, ...headers },
  })
  return action({ context, request, params } as never)
}

const put = (body: BodyInit, method = 'PUT', code = 'NL-W') =>
  call(putFile as Action, method, { code, name: 'night.csv' }, body)
const post = (body: unknown, headers: Record<string, string> = {}) =>
  call(postReadings as Action, 'POST', { code: 'NL-W' }, JSON.stringify(body), {
    'Content-Type': 'application/json',
    'Idempotency-Key': 'one',
    ...headers,
  })

/** Whether an answer has a described status, type and shape. */
async function expectDescribed(response: Response, path: string, method: string): Promise<void> {
  const { paths, components } = await document()
  const described = paths[path]?.[method]?.responses[response.status]
  expect(described, `status ${response.status} of ${method} ${path}`).toBeDefined()
  const type = (response.headers.get('Content-Type') ?? '').split(';')[0] ?? ''
  const name = described?.content?.[type]?.schema?.$ref.replace('#/components/schemas/', '') ?? ''
  const schema = components.schemas[name]
  if (schema === undefined) throw new Error(`${response.status} ${type} of ${method} ${path} has no schema`)
  const parsed = z.fromJSONSchema(schema).safeParse(await response.json())
  expect(parsed.error?.issues ?? []).toEqual([])
}

describe('the description of the API', () => {
  it('has every address below /api/v1 and no other', async () => {
    const { openapi, paths } = await document()
    expect(openapi).toMatch(/^3\.1\./)
    const own = routes
      .flatMap(({ path }) => (path?.startsWith('api/v1/') === true ? [`/${path}`] : []))
      .map((path) => path.replace(/:(\w+)/g, '{$1}'))
    expect(own.length).toBeGreaterThan(2)
    expect(Object.keys(paths).sort()).toEqual(own.sort())
  })

  it('points to nothing that it does not hold', async () => {
    const served = await document()
    const refs = Array.from(JSON.stringify(served).matchAll(/"\$ref":"#\/components\/schemas\/(\w+)"/g))
    expect(refs.length).toBeGreaterThan(5)
    for (const [, name] of refs) expect(Object.keys(served.components.schemas)).toContain(name)
  })

  it('allows posts that are taken, and forbids what is refused', async () => {
    const { components } = await document()
    const schema = components.schemas.Post
    if (schema === undefined) throw new Error('no schema Post')
    const allowed = (body: unknown) => z.fromJSONSchema(schema).safeParse(body).success
    const reading = { channel: 'HC-01B', at: '2026-11-09T07:55:00+01:00', value: 5.1e-10, unit: 'mbar' }
    const good = {
      readings: [reading, { ...reading, value: 'OFF', status: 'OFF' }, { ...reading, value: null }],
    }
    expect(allowed(good)).toBe(true)
    expect((await post(good)).status).toBe(200)
    const wrong = [
      { readings: [] },
      { readings: [{ ...reading, value: undefined }] },
      { readings: [{ ...reading, colour: 'red' }] },
      { readings: [reading], more: 1 },
      { readings: [{ ...reading, channel: '' }] },
    ]
    for (const [i, body] of wrong.entries()) {
      expect(allowed(body), `body ${i}`).toBe(false)
      expect((await post(body, { 'Idempotency-Key': `wrong-${i}` })).status).toBe(422)
    }
  })
})

describe('what is really answered is described', () => {
  const FILES = '/api/v1/sources/{code}/files/{name}'
  const READINGS = '/api/v1/sources/{code}/readings'
  const night = () => new Blob([Buffer.from(fixture('nl-w-night.csv'))])

  it('to files, new and again', async () => {
    for (const status of [201, 200]) {
      const response = await put(night())
      expect(response.status).toBe(status)
      await expectDescribed(response, FILES, 'put')
    }
  })

  it.each<[string, number, () => Promise<Response> | Response]>([
    ['no log', 415, () => put('<!doctype html><html><body>Sign in</body></html>')],
    ['an empty file', 422, () => put('')],
    ['another method', 405, () => put('x', 'POST')],
    ['another source', 403, () => put('x', 'PUT', 'NL-E')],
  ])('to %s, with status %i', async (_, status, make) => {
    const response = await make()
    expect(response.status).toBe(status)
    await expectDescribed(response, FILES, 'put')
  })

  const reading = { channel: 'HC-01B', at: '2026-11-09T07:55:00+01:00', value: 5.1e-10 }
  it.each<[string, number, unknown, Record<string, string>?]>([
    ['a post', 200, { readings: [reading] }],
    ['an unknown channel', 422, { readings: [{ ...reading, channel: 'HC-99Z' }] }],
    ['an empty post', 422, { readings: [] }],
    ['a post without a token', 401, { readings: [reading] }, { Authorization: '' }],
    ['a post without a key', 400, { readings: [reading] }, { 'Idempotency-Key': '' }],
    ['a post that is not said to be JSON', 415, { readings: [reading] }, { 'Content-Type': 'text/plain' }],
  ])('to %s, with status %i', async (_, status, body, headers) => {
    const response = await post(body, headers)
    expect(response.status).toBe(status)
    await expectDescribed(response, READINGS, 'post')
  })
})
