/** Files in pieces over HTTP: the protocol as a browser speaks it, and what it answers to what must not be. */
import { createHash } from 'node:crypto'
import { beforeEach, describe, expect, test } from 'vitest'
import { importFile, upload } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'
import { longFile } from '#tests/support/intake-faults.ts'

const db = freshDatabase()
const MIB = 1_048_576
const TUS = { 'Tus-Resumable': '1.0.0' }

let cookie = ''
let colleague = ''

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const source = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: source.id, name: 'HC-16A' })
  cookie = await signIn((await createUser(db, { roles: ['technician'] })).personId)
  colleague = await signIn((await createUser(db, { roles: ['engineer'] })).personId)
})

const night = Buffer.concat([longFile(1_000), Buffer.from(`# ${'remark '.repeat(60)}\n`.repeat(10_000))])

function begin(size: number | string, source = 'NL-E'): Promise<Response> {
  const text = (value: string) => Buffer.from(value).toString('base64')
  return request('/intake/uploads', {
    method: 'POST',
    cookie,
    headers: {
      ...TUS,
      'Upload-Length': String(size),
      'Upload-Metadata': `filename ${text('NL-E_long.csv')},source ${text(source)}`,
    },
  })
}

function patch(address: string, offset: number, body: BodyInit, who = cookie): Promise<Response> {
  return request(address, {
    method: 'PATCH',
    cookie: who,
    body,
    headers: { ...TUS, 'Upload-Offset': String(offset), 'Content-Type': 'application/offset+octet-stream' },
  })
}

const head = (address: string, who = cookie) =>
  request(address, { method: 'HEAD', cookie: who, headers: TUS })
const finish = (address: string, who = cookie) => request(address, { method: 'POST', cookie: who })

/** A body that breaks off after its bytes, as a lost connection looks to the server. */
function brokenOff(bytes: Uint8Array): ReadableStream<Uint8Array> {
  let at = 0
  return new ReadableStream({
    pull(controller) {
      if (at >= bytes.length) return controller.error(new Error('the connection was closed'))
      controller.enqueue(bytes.subarray(at, at + 65_536))
      at += 65_536
    },
  })
}

test('a file whose connection breaks after the third piece goes on behind it and is an import once', async () => {
  const begun = await begin(night.length)
  expect(begun.status).toBe(201)
  expect(begun.headers.get('Access-Control-Allow-Origin')).toBeNull()
  const address = begun.headers.get('Location') ?? ''
  expect(address).toMatch(/^\/intake\/uploads\/[\w-]{32}$/)

  const broken = await patch(address, 0, brokenOff(night.subarray(0, 3 * MIB + 300_000)))
  expect(broken.status).toBeGreaterThanOrEqual(400)
  const where = await head(address)
  expect(where.status).toBe(200)
  expect(where.headers.get('Upload-Offset')).toBe(String(3 * MIB))
  expect(where.headers.get('Upload-Length')).toBe(String(night.length))
  const page = await (await request('/intake', { cookie })).text()
  expect(page).toContain('NL-E_long.csv')
  expect(page).toContain('Choose the same file again')
  expect(await (await request('/intake', { cookie: colleague })).text()).not.toContain('NL-E_long.csv')

  const rest = await patch(address, 3 * MIB, new Uint8Array(night.subarray(3 * MIB)))
  expect(rest.status).toBe(204)
  expect(rest.headers.get('Upload-Offset')).toBe(String(night.length))
  const made = await finish(address)
  expect(made.status).toBe(201)
  const { importId, href } = (await made.json()) as { importId: number; href: string }
  expect(href).toBe(`/intake/${importId}`)
  const again = await finish(address)
  expect([again.status, await again.json()]).toEqual([200, { importId, href }])
  const rows = await db.select({ sha256: importFile.sha256, lines: importFile.readingCount }).from(importFile)
  expect(rows).toEqual([{ sha256: createHash('sha256').update(night).digest('hex'), lines: 1_000 }])
})

describe('what must not be', () => {
  test('another offset is 409 and changes nothing', async () => {
    const address = (await begin(night.length)).headers.get('Location') ?? ''
    await patch(address, 0, new Uint8Array(night.subarray(0, MIB)))
    for (const offset of [0, 5, 2 * MIB])
      expect((await patch(address, offset, new Uint8Array(10))).status).toBe(409)
    expect((await head(address)).headers.get('Upload-Offset')).toBe(String(MIB))
    expect((await finish(address)).status).toBe(409)
  })

  test('another person is told that there is nothing, whatever they ask', async () => {
    const address = (await begin(night.length)).headers.get('Location') ?? ''
    expect((await head(address, colleague)).status).toBe(404)
    expect((await patch(address, 0, new Uint8Array(10), colleague)).status).toBe(404)
    expect((await finish(address, colleague)).status).toBe(404)
    expect((await head(address)).headers.get('Upload-Offset')).toBe('0')
  })

  test('a file over the limit and an unknown source are refused before the first byte', async () => {
    const large = await begin(5 * 1024 * MIB)
    expect(large.status).toBe(413)
    expect(await large.json()).toMatchObject({ message: expect.stringContaining('4096 MiB') })
    const unknown = await begin(night.length, 'NL-Q')
    expect(unknown.status).toBe(400)
    expect(await unknown.json()).toMatchObject({ fields: { source: [expect.stringContaining('NL-Q')] } })
    expect((await begin('-5')).status).toBe(400)
    expect(await db.$count(upload)).toBe(0)
  })

  test('what another site has the browser send is refused', async () => {
    const address = (await begin(night.length)).headers.get('Location') ?? ''
    const foreign = await request(address, {
      method: 'PATCH',
      cookie,
      body: new Uint8Array(10),
      headers: {
        ...TUS,
        Origin: 'http://elsewhere.test',
        'Upload-Offset': '0',
        'Content-Type': 'application/offset+octet-stream',
      },
    })
    expect(foreign.status).toBe(403)
    expect((await head(address)).headers.get('Upload-Offset')).toBe('0')
  })
})
