/** A database server that is killed while a file is received, read and taken in, and started again on the same files. */
import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { closeDb, connect, type Db } from '#app/db/client.server.ts'
import { migrateDatabase } from '#app/db/migrate.server.ts'
import { importFile, job } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptNowOrLater } from '#app/services/intake-decisions.server.ts'
import { claimJob, runJob } from '#app/services/jobs.server.ts'
import { JOB_HANDLERS } from '#app/worker/jobs/handlers.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { MORNING } from '#tests/support/clock.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'
import {
  expectWhole,
  FAULT_SEEDS,
  longDigest,
  longFile,
  pause,
  shareOf,
  storedDigest,
  takeOver,
} from '#tests/support/intake-faults.ts'
import { type OwnMariadb, startOwnMariadb } from '#tests/support/own-mariadb.ts'

const ROWS = 6_000
const LARGE = 1_024
const WITHIN_MS = 180_000

let server: OwnMariadb
let open: ReturnType<typeof connect>
let technician: Actor
/** What the way from sending to readings takes here when nothing dies, and a bit more: deaths are spread over it. */
let spanMs: number
/** The same for sending alone, which is short: every fifth death falls into it. */
let sendingMs: number
/** How far the file of each seed had come when the server died. */
const stages = new Set<string>()

beforeAll(async () => {
  process.env.LOG_LEVEL ??= 'silent'
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  server = await startOwnMariadb(['--innodb-buffer-pool-size=64M', '--innodb-log-file-size=16M'])
  process.env.DATABASE_URL = server.url('ebbline')
  await migrateDatabase(server.url('ebbline'))
  open = connect(server.url('ebbline'))
  const { db } = open
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseMachineAt: machineNow() })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: east.id, name: 'HC-16A' })
  // The second of two, when the code is warm.
  for (const seed of [-2, -1]) {
    const begun = performance.now()
    await wholeWay(db, seed, () => {
      sendingMs = performance.now() - begun
    })
    spanMs = (performance.now() - begun) * 1.1
    await db.delete(job)
  }
}, WITHIN_MS)

afterAll(async () => {
  await open?.pool.promise().end()
  await closeDb()
  await server?.end()
})

function startOf(seed: number): number {
  // Each seed has its own hours, so that what earlier seeds have stored must stay as it is.
  return 1_794_204_000_000 + seed * 20_000_000
}

async function receive(db: Db, seed: number): Promise<number> {
  const bytes = longFile(ROWS, startOf(seed))
  async function* stream() {
    for (let at = 0; at < bytes.length; at += 65_536) yield bytes.subarray(at, at + 65_536)
  }
  const { importId } = await stageUpload(db, technician, MORNING, {
    sourceCode: 'NL-E',
    fileName: `seed-${seed}.csv`,
    stream: stream(),
    statedBytes: bytes.length,
    limitBytes: 2 ** 26,
    largeBytes: LARGE,
  })
  return importId
}

/** One job, as the worker does it. */
async function doOneJob(db: Db): Promise<void> {
  const held = await claimJob(db)
  if (held !== null) await runJob(db, held, JOB_HANDLERS, { signal: new AbortController().signal })
}

/** A person and a worker from the sending of a file to its readings; whatever the dead server leaves undone throws. */
async function wholeWay(db: Db, seed: number, sent = () => {}): Promise<void> {
  const importId = await receive(db, seed)
  sent()
  await doOneJob(db)
  await acceptNowOrLater(db, technician, MORNING, importId, LARGE)
  await doOneJob(db)
}

it.each(FAULT_SEEDS)(
  'a database that dies on the way from sending to rollups loses nothing it has confirmed (seed %i)',
  async (seed) => {
    const before = await open.db
      .select({ id: importFile.id, state: importFile.state })
      .from(importFile)
      .orderBy(importFile.id)
    const digests = new Map<number, string>()
    // Of all imports the counts are looked at below, of the latest every reading.
    for (const { id, state } of before.slice(-3))
      if (state === 'accepted') digests.set(id, await storedDigest(open.db, id))
    await open.db.delete(job)

    const way = wholeWay(open.db, seed).then(
      () => 'done',
      (error: unknown) => error,
    )
    await pause(shareOf(seed, 3) * (seed % 5 === 0 ? sendingMs : spanMs))
    await server.kill()
    const end = await way
    if (end !== 'done') expect(end).toBeInstanceOf(Error)
    await open.pool
      .promise()
      .end()
      .catch((error: unknown) => expect(error).toBeInstanceOf(Error))

    await server.restart()
    open = connect(server.url('ebbline'))
    const { db } = open
    await expectWhole(db)
    for (const [id, digest] of digests) expect(await storedDigest(db, id)).toBe(digest)

    const then = (await db.select().from(importFile)).find(({ fileName }) => fileName === `seed-${seed}.csv`)
    stages.add(then?.state ?? 'not there')

    // The person sends the file again, or goes on where the page shows it, and gets there either way.
    await takeOver(db)
    const own = (await db.select().from(importFile)).find(({ fileName }) => fileName === `seed-${seed}.csv`)
    if (end === 'done') expect(own).toMatchObject({ state: 'accepted' })
    const importId = own?.id ?? (await receive(db, seed))
    await takeOver(db)
    const waiting = await db.select().from(importFile).where(eq(importFile.id, importId))
    if (waiting[0]?.state === 'read') {
      await acceptNowOrLater(db, technician, MORNING, importId, LARGE)
      await takeOver(db)
    }
    expect((await db.select().from(importFile).where(eq(importFile.id, importId)))[0]).toMatchObject({
      state: 'accepted',
      readingCount: ROWS,
      heldCount: 0,
    })
    await expectWhole(db)
    expect(await storedDigest(db, importId)).toBe(longDigest(ROWS, startOf(seed)))
  },
  WITHIN_MS,
)

it.runIf(FAULT_SEEDS.length >= 20)('so many deaths have met a file at every stage of its way', () => {
  expect([...stages].sort()).toEqual(['accepted', 'not there', 'read', 'reading'])
})
