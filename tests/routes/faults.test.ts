/** A web server that is killed while a technician sends a night file and takes it in. */
import { once } from 'node:events'
import { afterAll, beforeAll, beforeEach, expect, it } from 'vitest'
import { importFile, reading } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { currentTestDatabaseUrl, freshDatabase } from '#tests/support/db.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'
import {
  expectWhole,
  FAULT_SEEDS,
  longDigest,
  longFile,
  pause,
  shareOf,
  storedDigest,
} from '#tests/support/intake-faults.ts'
import { type Program, processes, services } from '#tests/support/programs.ts'

const db = freshDatabase()
const ROWS = 6_000
const WITHIN_MS = 120_000

let program: Program
let url: string
let cookie: string
/** What sending and taking in take here when nothing dies, and a bit more: deaths are spread over it. */
let spanMs: number

async function startWeb(): Promise<void> {
  const { command, args } = (await services()).typescript('app/server/main.ts')
  program = (await processes()).start(command, args, {
    channel: true,
    env: {
      ...process.env,
      NODE_ENV: 'production',
      DATABASE_URL: currentTestDatabaseUrl(),
      HOST: '127.0.0.1',
      PORT: '0',
    },
  })
  const ended = program.ended.then(({ code }) => {
    throw new Error(`The web server ended with ${code} before it was ready.`)
  })
  const [facts] = (await Promise.race([once(program.child, 'message'), ended])) as [{ port: number }]
  ended.catch(() => undefined)
  url = `http://127.0.0.1:${facts.port}`
}

async function prepare(): Promise<void> {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const source = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: source.id, name: 'HC-16A' })
  cookie = await signIn((await createUser(db, { roles: ['technician'] })).personId)
}

function send(bytes: Uint8Array): Promise<Response> {
  return fetch(`${url}/intake/upload?source=NL-E&name=night.csv`, {
    method: 'PUT',
    headers: { Cookie: cookie, Origin: url, 'Content-Type': 'application/octet-stream' },
    body: bytes as Uint8Array<ArrayBuffer>,
  })
}

async function takeIn(importId: number): Promise<number> {
  const answer = await fetch(`${url}/intake/${importId}`, {
    method: 'POST',
    headers: { Cookie: cookie, Origin: url },
    body: new URLSearchParams({ intent: 'accept' }),
    redirect: 'manual',
  })
  await answer.text()
  return answer.status
}

/** What a technician does; throws what a dead server leaves of it. */
async function wholeWay(bytes: Uint8Array): Promise<'done'> {
  const sent = await send(bytes)
  expect(sent.status).toBe(201)
  const { importId } = (await sent.json()) as { importId: number }
  expect(await takeIn(importId)).toBe(302)
  return 'done'
}

beforeAll(async () => {
  await startWeb()
}, WITHIN_MS)
beforeEach(prepare)
afterAll(async () => {
  await (await processes()).stop(program, { graceMs: 5_000 })
})

it(
  'the way that the deaths below are spread over leads to the readings',
  async () => {
    for (const startMs of [1_794_100_000_000, 1_794_204_000_000]) {
      const begun = performance.now()
      await wholeWay(longFile(ROWS, startMs))
      spanMs = (performance.now() - begun) * 1.1
    }
    await expectWhole(db)
    expect(await db.$count(reading)).toBe(2 * ROWS)
  },
  WITHIN_MS,
)

it.each(FAULT_SEEDS)(
  'a web server that dies leaves nothing half done, and the technician goes on (seed %i)',
  async (seed) => {
    const bytes = longFile(ROWS)
    const way = wholeWay(bytes).catch((error: unknown) => error)
    await pause(shareOf(seed, 4) * spanMs)
    program.child.kill('SIGKILL')
    await program.ended
    const end = await way
    if (end !== 'done')
      expect(end).toMatchObject({ message: expect.stringMatching(/fetch failed|terminated/) })
    const stored = await db.$count(reading)
    // The database may still be undoing or finishing what the dead one had begun, and shows neither half done.
    expect(end === 'done' ? [ROWS] : [0, ROWS]).toContain(stored)

    await startWeb()
    const again = await send(bytes)
    const { importId } = (await again.json()) as { importId: number }
    // New, or waiting since before the death, or taken in then.
    expect([201, 200, 409]).toContain(again.status)
    if (again.status !== 409) expect(await takeIn(importId)).toBe(302)
    const imports = await db.select().from(importFile)
    expect(imports.filter(({ state }) => state === 'accepted')).toMatchObject([
      { id: importId, readingCount: ROWS, heldCount: 0 },
    ])
    await expectWhole(db)
    expect(await storedDigest(db, importId)).toBe(longDigest(ROWS))
  },
  WITHIN_MS,
)
