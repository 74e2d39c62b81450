import { asc, count, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { importFile, reading, record } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptNowOrLater, answerQuestions, discardImport } from '#app/services/intake-decisions.server.ts'
import { readLargeFile } from '#app/services/intake-large.server.ts'
import { drainJobs } from '#app/services/jobs.server.ts'
import { JOB_HANDLERS } from '#app/worker/jobs/handlers.server.ts'
import { NL_E, NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const LARGE = 1024

let technician: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseMachineAt: machineNow() })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const west = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: west.id, name })
  await createChannel(db, { sourceId: east.id, name: 'HC-16A' })
})

async function send(text: string, sourceCode: string, statedBytes: number | null = null) {
  const bytes = new TextEncoder().encode(text)
  async function* stream() {
    for (let at = 0; at < bytes.length; at += 65_536) yield bytes.subarray(at, at + 65_536)
  }
  return stageUpload(db, technician, MORNING, {
    sourceCode,
    fileName: 'large.csv',
    stream: stream(),
    statedBytes,
    limitBytes: 2 ** 26,
    largeBytes: LARGE,
  })
}

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))
const rowOf = async (importId: number) =>
  (await db.select().from(importFile).where(eq(importFile.id, importId)))[0]
const readings = async () => (await db.select({ n: count() }).from(reading))[0]?.n

describe('a large file', () => {
  it.each([
    ['stated to be large', 100_000],
    ['found to be large on the way', null],
  ])('%s is kept at once, read by the worker and taken in by it', async (_, statedBytes) => {
    const staged = await send(night(), 'NL-W', statedBytes)
    expect(staged).toMatchObject({ state: 'reading', refusal: null, again: false })
    expect(await rowOf(staged.importId)).toMatchObject({ state: 'reading', readOut: null, lineCount: null })
    // The same bytes again lead to the same file.
    expect(await send(night(), 'NL-W')).toMatchObject({
      importId: staged.importId,
      again: true,
      state: 'reading',
    })
    await expect(acceptNowOrLater(db, technician, MORNING, staged.importId, LARGE)).rejects.toMatchObject({
      code: 'conflict',
    })
    await drainJobs(db, JOB_HANDLERS)
    const read = await rowOf(staged.importId)
    expect(read).toMatchObject({
      state: 'read',
      lineCount: 147,
      readingCount: 435,
      bytesDone: read?.byteSize,
    })
    expect(await readings()).toBe(0)
    expect(await acceptNowOrLater(db, technician, MORNING, staged.importId, LARGE)).toBeNull()
    await expect(acceptNowOrLater(db, technician, MORNING, staged.importId, LARGE)).rejects.toMatchObject({
      message: expect.stringContaining('being taken in already'),
    })
    await drainJobs(db, JOB_HANDLERS)
    expect(await rowOf(staged.importId)).toMatchObject({
      state: 'accepted',
      decidedBy: technician.personId,
      takingInBy: null,
      readingCount: 435,
    })
    expect(await readings()).toBe(435)
    const acts = await db
      .select()
      .from(record)
      .where(eq(record.subjectId, String(staged.importId)))
      .orderBy(record.id)
    expect(acts.map(({ act }) => act)).toEqual([
      'night file received',
      'night file read',
      'night file taken in',
    ])
  })

  it('that is no log is refused by the worker', async () => {
    const { importId } = await send(`<!doctype html><html>${'x'.repeat(3_000)}</html>`, 'NL-W')
    await drainJobs(db, JOB_HANDLERS)
    expect(await rowOf(importId)).toMatchObject({ state: 'refused', readingCount: 0 })
  })

  it('is read again by the worker with the answers to its questions', async () => {
    const { importId } = await send(night().replace('mbar', 'Torr'), 'NL-W')
    await drainJobs(db, JOB_HANDLERS)
    expect(await rowOf(importId)).toMatchObject({ state: 'read' })
    await expect(acceptNowOrLater(db, technician, MORNING, importId, LARGE)).rejects.toMatchObject({
      code: 'not-acceptable-now',
    })
    await answerQuestions(db, technician, MORNING, importId, [{ id: 'unit', choice: 'Torr' }], LARGE)
    expect(await rowOf(importId)).toMatchObject({ state: 'reading', bytesDone: 0 })
    await drainJobs(db, JOB_HANDLERS)
    await acceptNowOrLater(db, technician, MORNING, importId, LARGE)
    await drainJobs(db, JOB_HANDLERS)
    const last = (await db.select().from(reading).orderBy(asc(reading.at))).at(-1)
    // 1 Torr is 101325/760 Pa by definition; the last value of the file's last channel is 1,4E-9.
    expect(last?.value).not.toBeNull()
    expect(await rowOf(importId)).toMatchObject({ state: 'accepted' })
  })

  it('can be discarded while it is being read, and stays so', async () => {
    const { importId } = await send(night(), 'NL-W')
    await discardImport(db, technician, MORNING, importId, 'wrong night')
    expect(await drainJobs(db, JOB_HANDLERS)).toMatchObject({ failed: 0, again: 0 })
    expect(await rowOf(importId)).toMatchObject({ state: 'discarded' })
  })

  it('says on its page what kept the worker from taking it in', async () => {
    const { importId } = await send(night(), 'NL-W')
    await drainJobs(db, JOB_HANDLERS)
    await acceptNowOrLater(db, technician, MORNING, importId, LARGE)
    await discardImport(db, technician, MORNING, importId, 'changed my mind')
    expect(await drainJobs(db, JOB_HANDLERS)).toMatchObject({ failed: 0, again: 0 })
    const row = await rowOf(importId)
    expect(row).toMatchObject({ state: 'discarded', takingInBy: null })
    expect(row?.fault).toContain('Discarded')
    expect(await readings()).toBe(0)
  })

  it('is left for the next worker when this one is told to stop', async () => {
    const { importId } = await send(night(), 'NL-W')
    await expect(readLargeFile(db, { importId, answers: [] }, MORNING, AbortSignal.abort())).rejects.toThrow()
    expect(await rowOf(importId)).toMatchObject({ state: 'reading', fault: '' })
    await drainJobs(db, JOB_HANDLERS)
    expect(await rowOf(importId)).toMatchObject({ state: 'read' })
  })
})
