/** A worker that is killed while it reads a large file and while it takes it in. */
import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { count, eq } from 'drizzle-orm'
import { beforeEach, expect, it, onTestFinished } from 'vitest'
import { importFile, job, reading } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptNowOrLater } from '#app/services/intake-decisions.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
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
  takeOver,
} from '#tests/support/intake-faults.ts'

const db = freshDatabase()
const LARGE = 1024
const ROWS = 12_000
/** About what reading, and taking in, of so many rows take here: moments of death are spread over it and a bit more. */
const SPAN_MS = 350
// Each starts two processes, which a busy machine takes its time over.
const WITHIN_MS = 120_000

let technician: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseMachineAt: machineNow() })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: east.id, name: 'HC-16A' })
})

/** Starts the process of a worker that does one job. */
async function startWorker(): Promise<ChildProcess> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'tests/support/read-file-process.ts'], {
    env: { ...process.env, DATABASE_URL: currentTestDatabaseUrl() },
    stdio: ['ignore', 'pipe', 'inherit'],
  })
  onTestFinished(() => {
    child.kill('SIGKILL')
  })
  let seen = ''
  for await (const piece of child.stdout ?? []) {
    seen += String(piece)
    if (seen.includes('begun')) break
  }
  return child
}

async function killAfter(child: ChildProcess, ms: number): Promise<void> {
  await pause(ms)
  const gone = child.exitCode !== null ? Promise.resolve() : once(child, 'exit')
  child.kill('SIGKILL')
  await gone
}

const rowOf = async (importId: number) =>
  (await db.select().from(importFile).where(eq(importFile.id, importId)))[0]
const readings = async () => (await db.select({ n: count() }).from(reading))[0]?.n

it.each(FAULT_SEEDS)(
  'a worker that dies while it reads and takes in leaves nothing half done (seed %i)',
  async (seed) => {
    const bytes = longFile(ROWS)
    async function* stream() {
      yield bytes
    }
    const { importId } = await stageUpload(db, technician, MORNING, {
      sourceCode: 'NL-E',
      fileName: 'large.csv',
      stream: stream(),
      statedBytes: bytes.length,
      limitBytes: 2 ** 26,
      largeBytes: LARGE,
    })
    await killAfter(await startWorker(), shareOf(seed, 1) * SPAN_MS)
    const between = await rowOf(importId)
    expect(['reading', 'read']).toContain(between?.state)
    if (between?.state === 'reading') expect(between).toMatchObject({ readOut: null })
    await takeOver(db)
    expect(await rowOf(importId)).toMatchObject({ state: 'read', lineCount: ROWS + 1, readingCount: ROWS })
    await expectWhole(db)

    await db.delete(job)
    await acceptNowOrLater(db, technician, MORNING, importId, LARGE)
    await killAfter(await startWorker(), shareOf(seed, 2) * SPAN_MS)
    // The database may still be undoing or finishing what the dead one had begun, and shows neither half done.
    expect([0, ROWS]).toContain(await readings())
    await takeOver(db)
    expect(await rowOf(importId)).toMatchObject({ state: 'accepted', readingCount: ROWS, heldCount: 0 })
    await expectWhole(db)
    expect(await storedDigest(db, importId)).toBe(longDigest(ROWS))
    await takeOver(db)
    expect(await storedDigest(db, importId)).toBe(longDigest(ROWS))
  },
  WITHIN_MS,
)
