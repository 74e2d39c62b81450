/** The API's address for whole night files, from request to response. */
import { createHash } from 'node:crypto'
import { RouterContextProvider } from 'react-router'
import { beforeEach, describe, expect, it } from 'vitest'
import { nowContext } from '#app/context.ts'
import { readOriginal } from '#app/db/queries/imports.server.ts'
import { attachment, importFile, reading, record } from '#app/db/schema/index.ts'
import { action, loader } from '#app/routes/api/files.tsx'
import { POSTS_PER_MINUTE } from '#app/routes/api/rate-limit.server.ts'
import { addToken } from '#app/services/api-tokens.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let token: string

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const source = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  await createSource(db, { code: 'NL-E' })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: source.id, name })
  const admin = await createUser(db, { roles: ['administrator'] })
  token = await addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Night courier',
    sources: ['NL-W'],
    until: after(MORNING, 86_400),
    reason: 'night files',
  })
})

interface Sent {
  code?: string
  name?: string
  headers?: Record<string, string | undefined>
  body?: BodyInit | null
  method?: string
}

async function send(sent: Sent = {}) {
  const headers = new Headers()
  const wanted = { Authorization: `Bearer ${token}`, ...sent.headers }
  for (const [name, value] of Object.entries(wanted)) if (value !== undefined) headers.set(name, value)
  const name = sent.name ?? 'NL-W_2026-11-08.csv'
  const address = new URL(`http://ebbline.test/api/v1/sources/NL-W/files/${encodeURIComponent(name)}`)
  const body = sent.body === undefined ? fixture('nl-w-night.csv') : sent.body
  const init: RequestInit & { duplex: 'half' } = {
    method: sent.method ?? 'PUT',
    headers,
    body: body as BodyInit | null,
    duplex: 'half',
  }
  const context = new RouterContextProvider()
  context.set(nowContext, MORNING)
  const args = {
    context,
    request: new Request(address, init),
    url: address,
    pattern: '/api/v1/sources/:code/files/:name',
    params: { code: sent.code ?? 'NL-W', name },
  }
  const response = await action(args as Parameters<typeof action>[0])
  return {
    status: response.status,
    headers: response.headers,
    body: (await response.json()) as Record<string, unknown>,
  }
}

/** A body that comes in pieces, and may break off. */
function inPieces(bytes: Uint8Array, size: number, breaksOff = false): ReadableStream<Uint8Array> {
  let at = 0
  return new ReadableStream({
    pull(controller) {
      if (at < bytes.length) {
        controller.enqueue(bytes.slice(at, at + size))
        at += size
      } else if (breaksOff) controller.error(new Error('connection lost'))
      else controller.close()
    },
  })
}

describe('a file that is sent', () => {
  it('is kept byte for byte, read, and waits for a person', async () => {
    const bytes = fixture('nl-w-night.csv')
    const answer = await send({ body: inPieces(bytes, 333) })
    expect(answer).toMatchObject({ status: 201, body: { state: 'read', again: false } })
    expect(answer.headers.get('Location')).toBe(`/intake/${answer.body.importId}`)
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({
      id: answer.body.importId,
      state: 'read',
      arrival: 'file',
      fileName: 'NL-W_2026-11-08.csv',
      sha256: createHash('sha256').update(bytes).digest('hex'),
      uploadedBy: null,
      readingCount: 435,
    })
    const kept: Uint8Array[] = []
    for await (const piece of readOriginal(db, row?.attachmentId ?? 0)) kept.push(piece)
    expect(Buffer.concat(kept).equals(Buffer.from(bytes))).toBe(true)
    expect(await db.select().from(reading)).toEqual([])
    const acts = await db.select().from(record)
    expect(acts.at(-1)).toMatchObject({ act: 'night file received', after: { token: 'Night courier' } })
  })

  it('again, under another name, changes nothing while it waits and after it was taken in', async () => {
    const first = await send()
    const waiting = await send({ name: 'copy.csv' })
    expect(waiting).toMatchObject({
      status: 200,
      body: { importId: first.body.importId, state: 'read', again: true },
    })
    const technician = await createUser(db, { roles: ['technician'] })
    await acceptImport(db, technician, MORNING, Number(first.body.importId))
    expect(await send()).toMatchObject({
      status: 200,
      body: { importId: first.body.importId, state: 'accepted', again: true },
    })
    expect(await db.select().from(importFile)).toHaveLength(1)
    expect(await db.select().from(attachment)).toHaveLength(1)
    expect(await db.select().from(reading)).toHaveLength(435)
  })

  it('leaves nothing behind when the connection breaks', async () => {
    await expect(send({ body: inPieces(fixture('nl-w-night.csv'), 500, true) })).rejects.toThrow(
      'connection lost',
    )
    expect(await db.select().from(attachment)).toEqual([])
    expect(await db.select().from(importFile)).toEqual([])
  })

  it('may have any name, which is shown as text', async () => {
    await send({ name: '../../<b>x</b>\u0007.csv' })
    const [row] = await db.select().from(importFile)
    expect(row?.fileName).toBe('b>.csv')
  })
})

describe('a file that is not taken is answered with a problem document', () => {
  it.each<[string, number, Sent]>([
    ['without a token', 401, { headers: { Authorization: undefined } }],
    [
      'with a cookie and no token',
      401,
      { headers: { Authorization: undefined, Cookie: 'ebbline_session=x' } },
    ],
    ['for a source that the token is not for', 403, { code: 'NL-E' }],
    ['compressed', 415, { headers: { 'Content-Encoding': 'gzip' } }],
    ['without a body', 400, { body: null }],
    ['stated to be too large', 413, { headers: { 'Content-Length': String(2 ** 40) } }],
    ['by another method', 405, { method: 'POST' }],
  ])('%s', async (_, status, sent) => {
    const answer = await send(sent)
    expect(answer.status).toBe(status)
    expect(answer.headers.get('Content-Type')).toBe('application/problem+json')
    expect(answer.body).toMatchObject({ type: 'about:blank', status, detail: expect.stringMatching(/\w/) })
    expect(await db.select().from(importFile)).toEqual([])
    expect(await db.select().from(attachment)).toEqual([])
  })

  it('a saved login page is kept as refused, with what was found and how to mend it', async () => {
    const answer = await send({ body: '<!doctype html><html><body>Please sign in</body></html>' })
    expect(answer.status).toBe(415)
    expect(answer.body).toMatchObject({
      importId: expect.any(Number),
      errors: [{ code: 'not-a-log', found: expect.any(String), mend: expect.any(String) }],
    })
    expect((await db.select().from(importFile))[0]).toMatchObject({ state: 'refused', readingCount: 0 })
  })

  it('too many within a minute', async () => {
    for (let turn = 0; turn < POSTS_PER_MINUTE; turn += 1)
      await send({ headers: { 'Content-Encoding': 'gzip' } })
    const answer = await send()
    expect(answer.status).toBe(429)
    expect(Number(answer.headers.get('Retry-After'))).toBeGreaterThan(0)
  })

  it('reading the address', () => {
    const args = { request: new Request('http://ebbline.test/api/v1/sources/NL-W/files/x') }
    expect(loader(args as Parameters<typeof loader>[0]).status).toBe(405)
  })
})
