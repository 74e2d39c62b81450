import { createHash } from 'node:crypto'
import { and, asc, count, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { readOriginal } from '#app/db/queries/imports.server.ts'
import {
  attachment,
  attachmentChunk,
  importFile,
  importRange,
  reading,
  record,
  source,
} from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { ReadOut } from '#app/domain/night-files/types.ts'
import { MARKS, qualityCode } from '#app/domain/readings.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport, answerQuestions, discardImport } from '#app/services/intake-decisions.server.ts'
import { NL_E, NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const LIMIT = 64 * 1024 * 1024

let technician: Actor
let channels: Record<string, number>

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  const west = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  const east = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  channels = {}
  for (const name of ['HC-01A', 'HC-01B', 'CC-01'])
    channels[name] = (await createChannel(db, { sourceId: west.id, name })).id
  channels['HC-16A'] = (await createChannel(db, { sourceId: east.id, name: 'HC-16A' })).id
})

function upload(
  bytes: Uint8Array | string,
  options: {
    fileName?: string
    sourceCode?: string
    limitBytes?: number
    pieceBytes?: number
    now?: Date
  } = {},
) {
  const data = typeof bytes === 'string' ? new TextEncoder().encode(bytes) : bytes
  const size = options.pieceBytes ?? 65536
  async function* stream() {
    for (let at = 0; at < data.length; at += size) yield data.subarray(at, at + size)
  }
  return stageUpload(db, technician, options.now ?? MORNING, {
    sourceCode: options.sourceCode ?? 'NL-W',
    fileName: options.fileName ?? 'NL-W_2026-11-08.csv',
    stream: stream(),
    statedBytes: data.length,
    limitBytes: options.limitBytes ?? LIMIT,
  })
}

const rowCount = async (
  table: typeof reading | typeof importFile | typeof attachment | typeof attachmentChunk,
) => (await db.select({ n: count() }).from(table))[0]?.n

function stored(name: string) {
  return db
    .select()
    .from(reading)
    .where(eq(reading.channelId, channels[name] ?? 0))
    .orderBy(asc(reading.at), asc(reading.seq))
}

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))

describe('receiving a file', () => {
  it('keeps the bytes as they came, with their hash, and stores no reading', async () => {
    const bytes = fixture('nl-w-night.csv')
    const staged = await upload(bytes, { pieceBytes: 100 })
    expect(staged).toMatchObject({ state: 'read', refusal: null, again: false })
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({ state: 'read', lineCount: 147, readingCount: 435, byteSize: bytes.length })
    expect(row?.sha256).toBe(createHash('sha256').update(bytes).digest('hex'))
    const kept: Uint8Array[] = []
    for await (const piece of readOriginal(db, row?.attachmentId ?? 0)) kept.push(piece)
    expect(Buffer.concat(kept).equals(Buffer.from(bytes))).toBe(true)
    expect(await rowCount(reading)).toBe(0)
  })

  it('cuts large files into rows of 1 MiB', async () => {
    const rows = Array.from(
      { length: 60_000 },
      (_, i) => `${1_794_204_000_000 + i * 1000},HC-16A,3.${i % 10}e-07,Pa,OK`,
    )
    const text = `epoch_ms,channel,value,unit,status\n${rows.join('\n')}\n`
    await upload(text, { sourceCode: 'NL-E', pieceBytes: 300_001 })
    const pieces = await db
      .select({ no: attachmentChunk.chunkNo, data: attachmentChunk.data })
      .from(attachmentChunk)
      .orderBy(attachmentChunk.chunkNo)
    expect(pieces.length).toBe(Math.ceil(text.length / 2 ** 20))
    expect(pieces[0]?.data.length).toBe(2 ** 20)
    expect(Buffer.concat(pieces.map(({ data }) => data)).toString()).toBe(text)
  })

  it('keeps a refused file with what is wrong and how to mend it, and no reading', async () => {
    const staged = await upload(night().replace('   Einheit: mbar', ''))
    expect(staged).toMatchObject({ state: 'refused', refusal: { code: 'no-unit', line: 3, column: 2 } })
    await expect(acceptImport(db, technician, MORNING, staged.importId)).rejects.toMatchObject({
      code: 'conflict',
    })
    expect(await rowCount(reading)).toBe(0)
  })

  it('shows the same refusal again for the same bytes, and a new one once something has changed', async () => {
    const text = night().replaceAll('-01', '-77')
    const first = await upload(text)
    const again = await upload(text, { fileName: 'again.csv' })
    expect(again).toEqual({ ...first, again: true })
    expect(await rowCount(importFile)).toBe(1)
    expect(await rowCount(attachment)).toBe(1)
    const nextDay = await upload(text, { now: secondsAfter(MORNING, 86_400) })
    expect(nextDay).toMatchObject({ state: 'refused', again: false })
    const [west] = await db.select().from(source).where(eq(source.code, 'NL-W'))
    for (const name of ['HC-77A', 'HC-77B', 'CC-77'])
      await createChannel(db, { sourceId: west?.id ?? 0, name })
    expect(await upload(text)).toMatchObject({ state: 'read', again: false })
  })

  it('stores what a gauge says after it was removed as suspect', async () => {
    const segment = await createSegment(db, { tag: 'SG-01' })
    const position = await createPosition(db, {
      tag: 'HC-01C',
      segmentId: segment.id,
      lineId: segment.lineId,
    })
    const [west] = await db.select().from(source).where(eq(source.code, 'NL-W'))
    const removed = new Date('2026-11-08T18:00:00Z')
    const { id } = await createChannel(db, {
      sourceId: west?.id ?? 0,
      name: 'HC-01C',
      positionId: position.id,
      mappedTo: removed,
    })
    const { importId } = await upload(night().replaceAll('HC-01A', 'HC-01C'))
    const [row] = await db.select().from(importFile)
    const readOut = row?.readOut as ReadOut | undefined
    expect(readOut?.remarks.map(({ kind }) => kind)).toContain('outside-dates')
    await acceptImport(db, technician, MORNING, importId)
    const rows = await db.select().from(reading).where(eq(reading.channelId, id))
    // The file has a few words and outliers of its own, before and after.
    const share = (quality: 'good' | 'suspect', side: (at: Date) => boolean) =>
      rows.filter((one) => side(one.at) && one.quality === qualityCode(quality)).length
    expect(share('good', (at) => at < removed)).toBeGreaterThan(20)
    expect(share('suspect', (at) => at < removed)).toBe(0)
    expect(share('good', (at) => at >= removed)).toBe(0)
    expect(share('suspect', (at) => at >= removed)).toBeGreaterThan(20)
  })

  it('refuses a file over the limit and keeps nothing of it', async () => {
    await expect(upload('x'.repeat(3_000_000), { limitBytes: 2 ** 20 })).rejects.toMatchObject({
      code: 'too-large',
      status: 413,
    })
    expect(await rowCount(attachment)).toBe(0)
    expect(await rowCount(attachmentChunk)).toBe(0)
    expect(await rowCount(importFile)).toBe(0)
  })

  it('keeps nothing of an upload that breaks off', async () => {
    async function* broken() {
      yield fixture('nl-w-night.csv').subarray(0, 2000)
      throw new Error('connection lost')
    }
    await expect(
      stageUpload(db, technician, MORNING, {
        sourceCode: 'NL-W',
        fileName: 'cut.csv',
        stream: broken(),
        statedBytes: null,
        limitBytes: LIMIT,
      }),
    ).rejects.toThrow('connection lost')
    expect(await rowCount(attachment)).toBe(0)
    expect(await rowCount(importFile)).toBe(0)
  })

  it('names the same waiting file instead of keeping it twice', async () => {
    const first = await upload(night())
    const second = await upload(night(), { fileName: 'copy.csv' })
    expect(second).toMatchObject({ importId: first.importId, again: true })
    expect(await rowCount(attachment)).toBe(1)
  })

  it('lets only technicians and engineers send files', async () => {
    technician = await createUser(db, { roles: ['manager'] })
    await expect(upload(night())).rejects.toMatchObject({ code: 'forbidden' })
  })
})

describe('taking a file in', () => {
  it('stores every reading with file and line, all at once', async () => {
    const { importId } = await upload(night())
    const accepted = await acceptImport(db, technician, secondsAfter(MORNING, 60), importId)
    expect(accepted).toEqual({ importId, stored: 435, held: 0, conflicting: 0 })
    const last = (await stored('HC-01B')).at(-1)
    // 5,1E-10 mbar; 1 mbar is 100 Pa by definition of the bar.
    expect(last?.value).toBeCloseTo(5.1e-8, 20)
    expect(last).toMatchObject({
      importId,
      lineNo: 147,
      quality: qualityCode('good'),
      at: new Date('2026-11-09T05:00:00.000Z'),
    })
    const bound = (await stored('HC-01A')).find(({ lineNo }) => lineNo === 6)
    expect(bound).toMatchObject({ value: null, quality: qualityCode('over-range') })
    expect(bound?.bound).toBeCloseTo(1, 12)
    const ranges = await db.select().from(importRange)
    expect(ranges.map(({ readingCount }) => readingCount)).toEqual([145, 145, 145])
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({
      state: 'accepted',
      readingCount: 435,
      heldCount: 0,
      decidedBy: technician.personId,
      acceptedSha256: row?.sha256,
    })
    const acts = await db
      .select({ act: record.act })
      .from(record)
      .where(and(eq(record.subjectKind, 'import'), eq(record.subjectId, String(importId))))
      .orderBy(record.id)
    expect(acts.map(({ act }) => act)).toEqual(['night file received', 'night file taken in'])
  })

  it('adds nothing for the same bytes again and names the import, the person and the time', async () => {
    const { importId } = await upload(night())
    await acceptImport(db, technician, secondsAfter(MORNING, 60), importId)
    await expect(upload(night(), { fileName: 'again.csv' })).rejects.toMatchObject({
      code: 'conflict',
      message: expect.stringMatching(
        new RegExp(`import ${importId} \\(NL-W_2026-11-08.csv\\), by Tilda Weir on 2026-11-09 08:01`),
      ),
      details: { importId },
    })
    expect(await rowCount(reading)).toBe(435)
    expect(await rowCount(importFile)).toBe(1)
    expect(await rowCount(attachment)).toBe(1)
  })

  it('leaves held readings alone and keeps different ones beside them, both marked', async () => {
    const first = await upload(night())
    await acceptImport(db, technician, MORNING, first.importId)
    const changed = night().replace(';5,1E-10;1,4E-9\r\n', ';6,6E-10;1,4E-9\r\n')
    expect(changed).not.toBe(night())
    const second = await upload(changed, { fileName: 'changed.csv' })
    const changes = changed.split('6,6E-10').length - 1
    const accepted = await acceptImport(db, technician, MORNING, second.importId)
    expect(accepted).toMatchObject({ stored: changes, held: 435 - changes, conflicting: changes })
    const both = (await stored('HC-01B')).filter(({ marks }) => (marks & MARKS.conflict) !== 0)
    expect(both.map(({ seq, importId }) => [seq, importId])).toEqual([
      [0, first.importId],
      [1, second.importId],
    ])
  })

  it('keeps two readings of one instant inside a file, both marked', async () => {
    const { importId } = await upload(fixture('nl-e-words.csv'), { sourceCode: 'NL-E', fileName: 'NL-E.csv' })
    const accepted = await acceptImport(db, technician, MORNING, importId)
    expect(accepted).toMatchObject({ stored: 4, held: 0, conflicting: 0 })
    const rows = await stored('HC-16A')
    expect(rows.map(({ seq, marks }) => [seq, marks])).toEqual([
      [0, 0],
      [0, MARKS.conflict],
      [1, MARKS.conflict],
      [0, 0],
    ])
  })

  it('waits for open questions and reads again with the answers', async () => {
    const { importId } = await upload(night().replace('mbar', 'Torr'))
    await expect(acceptImport(db, technician, MORNING, importId)).rejects.toMatchObject({
      code: 'not-acceptable-now',
    })
    await expect(
      answerQuestions(db, technician, MORNING, importId, [{ id: 'unit', choice: 'furlong' }]),
    ).rejects.toMatchObject({ code: 'bad-input' })
    await answerQuestions(db, technician, MORNING, importId, [{ id: 'unit', choice: 'Torr' }])
    await acceptImport(db, technician, MORNING, importId)
    // 1 Torr is 101325/760 Pa by definition.
    expect((await stored('HC-01B')).at(-1)?.value).toBeCloseTo((5.1e-10 * 101325) / 760, 18)
  })

  it('goes by the file and not by its report where the profile has changed in between', async () => {
    const { importId } = await upload(night())
    await db
      .update(source)
      .set({ profile: { ...NL_W, time: { ...NL_W.time, zone: 'Asia/Tokyo' } }, profileVersion: 2 })
    expect(await acceptImport(db, technician, MORNING, importId)).toMatchObject({ stored: 435, held: 0 })
    // 06:00 in Tokyo is 21:00 UTC the day before.
    expect((await stored('HC-01B')).at(-1)?.at).toEqual(new Date('2026-11-08T21:00:00.000Z'))
    const ranges = await db.select().from(importRange)
    expect(ranges.map(({ lastAt }) => lastAt.toISOString())).toEqual(
      Array.from({ length: 3 }, () => '2026-11-08T21:00:00.000Z'),
    )
  })

  it('discards a file once, with a reason, and keeps its bytes', async () => {
    const { importId } = await upload(night())
    await discardImport(db, technician, MORNING, importId, 'wrong night')
    await expect(acceptImport(db, technician, MORNING, importId)).rejects.toMatchObject({ code: 'conflict' })
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({ state: 'discarded', reason: 'wrong night', acceptedSha256: null })
    expect(await rowCount(attachment)).toBe(1)
    expect(await rowCount(reading)).toBe(0)
  })
})

describe('two people at once', () => {
  it('lets one take the file in and tells the other', async () => {
    const engineer = await createUser(db, { roles: ['engineer'], name: 'Edda Holm' })
    const { importId } = await upload(night())
    const results = await Promise.allSettled([
      acceptImport(db, technician, MORNING, importId),
      acceptImport(other, engineer, MORNING, importId),
    ])
    expect(results.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
    const refused = results.find((result) => result.status === 'rejected')
    expect(refused?.reason).toMatchObject({ code: 'conflict' })
    expect(await rowCount(reading)).toBe(435)
  })

  it('takes overlapping files of one source in one after the other', async () => {
    const lines = night().split('\r\n')
    const head = await upload(`${lines.slice(0, 100).join('\r\n')}\r\n`, { fileName: 'head.csv' })
    const tail = await upload(`${[...lines.slice(0, 2), ...lines.slice(50)].join('\r\n')}`, {
      fileName: 'tail.csv',
    })
    const results = await Promise.all([
      acceptImport(db, technician, MORNING, head.importId),
      acceptImport(other, technician, MORNING, tail.importId),
    ])
    expect(results[0].stored + results[1].stored).toBe(435)
    expect(results[0].held + results[1].held).toBe(50 * 3)
    expect(results[0].conflicting + results[1].conflicting).toBe(0)
    expect(await rowCount(reading)).toBe(435)
  })
})
