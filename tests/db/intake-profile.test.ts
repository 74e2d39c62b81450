import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { channel, importFile, reading, record, source } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { ReadOut } from '#app/domain/night-files/types.ts'
import { channelKey } from '#app/domain/register.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport, answerQuestions } from '#app/services/intake-decisions.server.ts'
import { NL_R, NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let technician: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const west = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  for (const name of ['HC-01A', 'HC-01B', 'CC-01']) await createChannel(db, { sourceId: west.id, name })
  const gas = await createSource(db, { code: 'NL-R', profile: NL_R, profileVersion: 1 })
  const name = 'RG-A-02'
  await db
    .insert(channel)
    .values({ sourceId: gas.id, name, nameKey: channelKey(name), quantity: 'ion-current' })
})

async function upload(text: string, sourceCode: string, now = MORNING): Promise<number> {
  const bytes = new TextEncoder().encode(text)
  async function* stream() {
    yield bytes
  }
  const { importId } = await stageUpload(db, technician, now, {
    sourceCode,
    fileName: `${sourceCode}.csv`,
    stream: stream(),
    statedBytes: bytes.length,
    limitBytes: 1 << 20,
  })
  return importId
}

async function report(importId: number): Promise<ReadOut> {
  const [row] = await db.select().from(importFile).where(eq(importFile.id, importId))
  return row?.readOut as ReadOut
}

const night = (unit: string) => new TextDecoder().decode(fixture('nl-w-night.csv')).replace('mbar', unit)

describe('answers', () => {
  it('are kept with who and when, and become the next version of the profile once the file is taken in', async () => {
    const importId = await upload(night('Torr'), 'NL-W')
    expect((await report(importId)).questions.map(({ id }) => id)).toEqual(['unit'])
    const answeredAt = secondsAfter(MORNING, 60)
    await answerQuestions(db, technician, answeredAt, importId, [{ id: 'unit', choice: 'Torr' }])
    expect((await report(importId)).answers).toEqual([
      {
        id: 'unit',
        choice: 'Torr',
        label: expect.stringContaining('Torr'),
        text: expect.stringContaining('Torr'),
        found: 'the unit “Torr”',
        by: 'Tilda Weir',
        at: answeredAt.toISOString(),
      },
    ])
    const before = await db.select().from(source).where(eq(source.code, 'NL-W'))
    expect(before[0]?.profileVersion).toBe(1)
    await acceptImport(db, technician, secondsAfter(MORNING, 120), importId)
    const [after] = await db.select().from(source).where(eq(source.code, 'NL-W'))
    expect(after).toMatchObject({ profileVersion: 2, profile: { version: 2, unit: 'Torr' } })
    const acts = await db.select().from(record).where(eq(record.subjectKind, 'source'))
    expect(acts.map(({ subjectId, act }) => [subjectId, act])).toEqual([
      ['NL-W', 'profile of a source learnt from answers'],
    ])
    // Written as before now, a file departs from the profile and is asked about again.
    const next = await upload(night('mbar'), 'NL-W')
    const asked = (await report(next)).questions[0]
    expect(asked?.id).toBe('unit')
    expect(asked?.choices[0]?.candidates[0]?.meaning).toContain('HC-01A was last')
  })

  it('about columns of lowest, mean and highest values hold from then on, and only the means are stored', async () => {
    const header = 'time,HC-01A min (mbar),HC-01A mean (mbar),HC-01A max (mbar)'
    const rows = (day: string) => `${header}\n${day}T04:00:00Z,4.9E-10,5.1E-10,5.4E-10\n`
    const meant = await createSource(db, { code: 'NL-M', profile: null, profileVersion: 0 })
    await createChannel(db, { sourceId: meant.id, name: 'HC-01A' })
    const importId = await upload(rows('2026-11-08'), 'NL-M')
    const asked = async () => (await report(importId)).questions.map(({ id }) => id)
    expect(await asked()).toEqual(['reading-of'])
    await answerQuestions(db, technician, MORNING, importId, [{ id: 'reading-of', choice: 'mean' }])
    expect(await asked()).toEqual(['basis', 'averaging'])
    await answerQuestions(db, technician, MORNING, importId, [
      { id: 'averaging', choice: 'log-mean' },
      { id: 'basis', choice: 'nitrogen-equivalent' },
    ])
    await acceptImport(db, technician, secondsAfter(MORNING, 60), importId)
    const stored = await db.select({ value: reading.value }).from(reading)
    expect(stored).toHaveLength(1)
    expect(stored[0]?.value).toBeCloseTo(5.1e-8, 12)
    const next = await report(await upload(rows('2026-11-07'), 'NL-M'))
    expect(next).toMatchObject({ state: 'readable', questions: [], averaging: 'log-mean' })
  })

  it('leave the profile alone where nobody answered anything', async () => {
    const importId = await upload(night('mbar'), 'NL-W')
    await acceptImport(db, technician, MORNING, importId)
    const [row] = await db.select().from(source).where(eq(source.code, 'NL-W'))
    expect(row?.profileVersion).toBe(1)
  })

  it('may be a typed time where the question allows one, and nothing else', async () => {
    const text = '# Unit: A\n# Start: 2000-01-01 00:00:00\nelapsed_s,2\n600,6e-14\n'
    const importId = await upload(text, 'NL-R')
    expect((await report(importId)).questions.map(({ id }) => id)).toEqual(['start'])
    const answer = (choice: string) =>
      answerQuestions(db, technician, MORNING, importId, [{ id: 'start', choice }])
    await expect(answer('yesterday at six')).rejects.toMatchObject({ code: 'bad-input' })
    await expect(answer('2026-13-02 06:00')).rejects.toMatchObject({ code: 'bad-input' })
    await answer('2026-11-02 06:00')
    expect(await report(importId)).toMatchObject({
      state: 'readable',
      firstMs: Date.UTC(2026, 10, 2, 5, 10),
      readings: { total: 1, marked: 1 },
    })
  })
})
