/** The demo's feeder against the API's own code, over a real socket. */
import { createServer, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { asc, count, eq, max, min } from 'drizzle-orm'
import { RouterContextProvider } from 'react-router'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { nowContext } from '#app/context.ts'
import { apiPost, apiToken, channel, importFile, reading } from '#app/db/schema/index.ts'
import { qualityCode } from '#app/domain/readings.ts'
import { action } from '#app/routes/api/readings.tsx'
import { readTokens, revokeToken } from '#app/services/api-tokens.server.ts'
import { feed, feederTasks } from '#app/worker/jobs/feeder.server.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const TOKEN = 'f'.repeat(64)
const HOUR_S = 3600
const { signal } = new AbortController()

let server: Server
let apiUrl: string
let now: Date
/** Status that the server answers with, before the API sees anything. */
let answerWith: number | null

beforeEach(async () => {
  now = MORNING
  answerWith = null
  await createSite(db, { timeZone: 'Europe/Vienna' })
  const [walls, power] = [await createSource(db, { code: 'NL-T' }), await createSource(db, { code: 'NL-P' })]
  const two = (one: number) => String(one).padStart(2, '0')
  for (const segment of ['05', '08']) {
    for (let place = 1; place <= 12; place += 1)
      await createChannel(db, { sourceId: walls.id, name: `TH-${segment}-${two(place)}` })
  }
  await db.update(channel).set({ quantity: 'temperature' })
  for (const set of ['HX-1', 'HX-2']) {
    const volts = await createChannel(db, { sourceId: power.id, name: `${set}-U` })
    await db.update(channel).set({ quantity: 'voltage' }).where(eq(channel.id, volts.id))
    const amps = await createChannel(db, { sourceId: power.id, name: `${set}-I` })
    await db.update(channel).set({ quantity: 'current' }).where(eq(channel.id, amps.id))
  }
  server = createServer(async (incoming, outgoing) => {
    const pieces: Buffer[] = []
    for await (const piece of incoming) pieces.push(piece as Buffer)
    const code = /^\/api\/v1\/sources\/([A-Z-]+)\/readings$/.exec(incoming.url ?? '')?.[1]
    if (answerWith !== null || code === undefined) {
      outgoing.writeHead(answerWith ?? 404).end('{}')
      return
    }
    const request = new Request(`http://ebbline.test${incoming.url}`, {
      method: incoming.method ?? 'GET',
      headers: Object.entries(incoming.headers).map(([name, value]): [string, string] => [
        name,
        String(value),
      ]),
      body: Buffer.concat(pieces),
    })
    const context = new RouterContextProvider()
    context.set(nowContext, now)
    const pattern = '/api/v1/sources/:code/readings'
    const args = { context, request, url: new URL(request.url), pattern, params: { code } }
    const response = await action(args as Parameters<typeof action>[0])
    outgoing.writeHead(response.status).end(await response.text())
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  apiUrl = `http://127.0.0.1:${(server.address() as AddressInfo).port}`
})

afterEach(async () => {
  server.closeAllConnections()
  await new Promise((resolve) => server.close(resolve))
})

const run = () => feed(db, now, { apiUrl, token: TOKEN }, signal)

async function span(name: string) {
  const [row] = await db
    .select({
      n: count(),
      // An aggregate comes back as text unless it is told what column it is of.
      first: min(reading.at).mapWith(reading.at),
      last: max(reading.at).mapWith(reading.at),
    })
    .from(reading)
    .innerJoin(channel, eq(channel.id, reading.channelId))
    .where(eq(channel.name, name))
  return row
}

describe('the feeder', () => {
  it('sends what the loggers had to say since the night, then nothing until there is a new row', async () => {
    expect(await run()).toBe(2)
    expect(await span('TH-05-09')).toEqual({
      n: 24,
      first: new Date('2026-11-09T05:05:00Z'),
      last: MORNING,
    })
    expect(await run()).toBe(0)
    now = secondsAfter(MORNING, 301)
    expect(await run()).toBe(2)
    expect(await span('TH-05-09')).toMatchObject({ n: 25, last: secondsAfter(MORNING, 300) })
    const imports = await db.select().from(importFile)
    expect(imports).toHaveLength(4)
    expect(imports.every(({ arrival, state }) => arrival === 'post' && state === 'accepted')).toBe(true)
  })

  it('stores a supply that is off as off, and one that heats with its amperes', async () => {
    await run()
    const last = async (name: string) => {
      const rows = await db
        .select({ value: reading.value, quality: reading.quality })
        .from(reading)
        .innerJoin(channel, eq(channel.id, reading.channelId))
        .where(eq(channel.name, name))
        .orderBy(asc(reading.at))
      return rows.at(-1)
    }
    expect(await last('HX-2-I')).toEqual({ value: null, quality: qualityCode('off') })
    expect((await last('HX-1-I'))?.value).toBeGreaterThan(1_000)
    expect((await last('HX-1-I'))?.quality).toBe(qualityCode('good'))
  })

  it('sends what lies between when the clock is moved forward, in posts of six hours, without a gap', async () => {
    await run()
    now = secondsAfter(MORNING, 30 * HOUR_S)
    expect(await run()).toBe(10)
    expect(await span('TH-05-01')).toMatchObject({ n: 24 + 30 * 12, last: now })
    now = secondsAfter(MORNING, 400 * 24 * HOUR_S)
    await run()
    // The permit of SG-05 ends on 13 November at 18:00, that of SG-08 on the 10th.
    expect((await span('TH-05-01'))?.last).toEqual(new Date('2026-11-13T17:00:00Z'))
    expect((await span('TH-08-01'))?.last).toEqual(new Date('2026-11-10T17:00:00Z'))
    expect(await run()).toBe(0)
  }, 60_000)

  it('takes a post whose answer was lost up again without storing it twice', async () => {
    await Promise.all([run(), run()])
    expect(await span('TH-05-01')).toMatchObject({ n: 24 })
    expect((await db.select().from(apiPost)).length).toBe(2)
  })

  it('makes its token known once, and stops quietly when an administrator revokes it', async () => {
    await run()
    const admin = await createUser(db, { roles: ['administrator'] })
    const [token, ...more] = (await readTokens(db, admin, now)).tokens
    expect(more).toEqual([])
    expect(token).toMatchObject({ sources: ['NL-P', 'NL-T'], createdBy: null, lastUsedAt: MORNING })
    await revokeToken(db, admin, now, { tokenId: token?.id ?? 0, reason: 'to see it stop' })
    now = secondsAfter(MORNING, HOUR_S)
    expect(await run()).toBe(0)
    expect(await span('TH-05-01')).toMatchObject({ n: 24 })
    expect(await db.select().from(apiToken)).toHaveLength(1)
  })

  it('waits when it is told to, and fails on what trying again may mend', async () => {
    answerWith = 429
    expect(await run()).toBe(0)
    answerWith = 500
    await expect(run()).rejects.toThrow('500')
    answerWith = null
    expect(await run()).toBe(2)
  })

  it('is off where no address and no token are set', () => {
    expect(feederTasks()).toEqual([])
  })
})
