/** Files that arrive in pieces: break off and go on, two tabs, another person, the limit, and the import made once. */
import { createHash } from 'node:crypto'
import { count, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { attachment, attachmentChunk, importFile, job, record, upload } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { LARGE_FILE_BYTES } from '#app/domain/imports.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { openAttachment, removeIncompleteAttachments } from '#app/services/attachments.server.ts'
import { discardImport } from '#app/services/intake-decisions.server.ts'
import {
  beginUpload,
  finishUpload,
  purgeUploads,
  readUnfinished,
  readUpload,
  receivePieces,
} from '#app/services/uploads.server.ts'
import { NL_E } from '#tests/fixtures/night-files/profiles.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createClock, createSite, createSource, createUser } from '#tests/support/factories.ts'
import { longFile } from '#tests/support/intake-faults.ts'

const db = freshDatabase()
const MIB = 1_048_576
const DAY_MS = 86_400_000

let technician: Actor
let colleague: Actor

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
  const source = await createSource(db, { code: 'NL-E', profile: NL_E, profileVersion: 1 })
  await createChannel(db, { sourceId: source.id, name: 'HC-16A' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  colleague = await createUser(db, { roles: ['technician'], name: 'Uwe Rast' })
})

const ROWS = 10_000

/** A log of a bit more than five pieces; most of it are remarks, which are quick to read. */
const night = Buffer.concat([longFile(ROWS), Buffer.from(`# ${'remark '.repeat(60)}\n`.repeat(12_000))])

async function* parts(bytes: Uint8Array, size = 65_536): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size)
}

async function* brokenOff(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  yield* parts(bytes)
  throw new Error('the connection was closed')
}

async function begin(bytes: Uint8Array, actor = technician, limitBytes = 64 * MIB): Promise<string> {
  const file = { sourceCode: 'NL-E', fileName: 'NL-E_long.csv', byteSize: bytes.length, limitBytes }
  return (await beginUpload(db, actor, MORNING, file)).token
}

async function sendAll(bytes: Uint8Array, actor = technician): Promise<string> {
  const token = await begin(bytes, actor)
  await receivePieces(db, actor, token, 0, parts(bytes))
  return token
}

async function rows() {
  const [uploads, imports, files, chunks] = await Promise.all(
    [upload, importFile, attachment, attachmentChunk].map((table) => db.$count(table)),
  )
  return { uploads, imports, files, chunks }
}

const sha256 = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex')

describe('a connection that breaks', () => {
  it('costs the piece that was on its way, and the file goes on behind the last whole one', async () => {
    expect(night.length).toBeGreaterThan(5 * MIB)
    const token = await begin(night)
    await expect(
      receivePieces(db, technician, token, 0, brokenOff(night.subarray(0, 3 * MIB + 400_000))),
    ).rejects.toThrow('the connection was closed')
    expect(await readUpload(db, technician, token)).toMatchObject({ receivedBytes: 3 * MIB })
    expect(await readUnfinished(db, technician)).toEqual([
      { token, fileName: 'NL-E_long.csv', byteSize: night.length, receivedBytes: 3 * MIB },
    ])
    expect(await rows()).toEqual({ uploads: 1, imports: 0, files: 1, chunks: 3 })
    await expect(finishUpload(db, technician, MORNING, token)).rejects.toMatchObject({
      code: 'conflict',
      message: expect.stringContaining(`${3 * MIB} of ${night.length} bytes`),
    })

    expect(await receivePieces(db, technician, token, 3 * MIB, parts(night.subarray(3 * MIB)))).toBe(
      night.length,
    )
    const staged = await finishUpload(db, technician, MORNING, token)
    expect(staged).toMatchObject({ state: 'read', refusal: null, again: false })
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({
      id: staged.importId,
      state: 'read',
      byteSize: night.length,
      sha256: sha256(night),
      readingCount: ROWS,
      uploadedBy: technician.personId,
      uploadedAt: MORNING,
    })
    // Opening checks every byte against the checksum.
    const kept = await openAttachment(db, row?.attachmentId ?? 0)
    let size = 0
    for await (const piece of kept.content) size += piece.length
    expect(size).toBe(night.length)
    expect(await readUnfinished(db, technician)).toEqual([])
    const acts = await db.select({ act: record.act }).from(record).where(eq(record.subjectKind, 'import'))
    expect(acts).toEqual([{ act: 'night file received' }])
  })

  it('may come after any number of bytes: parts of pieces join to the same bytes', async () => {
    const token = await begin(night)
    let at = 0
    for (const step of [1, MIB - 1, 700_001, 2 * MIB, 13, night.length]) {
      const next = Math.min(night.length, at + step)
      at = await receivePieces(db, technician, token, at, parts(night.subarray(at, next), 10_007))
      expect(at).toBe(next)
    }
    await finishUpload(db, technician, MORNING, token)
    const [row] = await db.select({ sha256: importFile.sha256 }).from(importFile)
    expect(row?.sha256).toBe(sha256(night))
    expect((await rows()).chunks).toBe(Math.ceil(night.length / MIB))
  })
})

describe('what is refused', () => {
  it.each([
    ['before', 0],
    ['beyond', 2 * MIB],
    ['inside', 12_345],
  ])('bytes from an offset %s the right one, and nothing changes', async (_, offset) => {
    const token = await begin(night)
    await receivePieces(db, technician, token, 0, parts(night.subarray(0, MIB)))
    await expect(
      receivePieces(db, technician, token, offset, parts(night.subarray(offset, offset + MIB))),
    ).rejects.toMatchObject({ code: 'conflict', message: expect.stringContaining(`${MIB} bytes`) })
    expect(await readUpload(db, technician, token)).toMatchObject({ receivedBytes: MIB })
  })

  it('another person, who is told no more than of a token that never was', async () => {
    const token = await begin(night)
    const tries = (actor: Actor, name: string) => [
      readUpload(db, actor, name),
      receivePieces(db, actor, name, 0, parts(night)),
      finishUpload(db, actor, MORNING, name),
    ]
    const [other, never] = await Promise.all(
      [tries(colleague, token), tries(technician, 'never')].map((all) => Promise.allSettled(all)),
    )
    expect(other).toEqual(never)
    for (const result of other ?? [])
      expect(result).toMatchObject({ status: 'rejected', reason: { code: 'not-found' } })
    expect(await readUnfinished(db, colleague)).toEqual([])
    expect((await rows()).chunks).toBe(0)
  })

  it('a person who may not take files in, from the first step on', async () => {
    const manager = await createUser(db, { roles: ['manager'] })
    await expect(begin(night, manager)).rejects.toMatchObject({ code: 'forbidden' })
    expect((await rows()).uploads).toBe(0)
  })

  it('a file over the limit and a source that is not there, before the first byte', async () => {
    await expect(begin(night, technician, 2 * MIB)).rejects.toMatchObject({
      code: 'too-large',
      message: expect.stringContaining('2 MiB'),
    })
    const file = { sourceCode: 'NL-Q', fileName: 'x.csv', byteSize: 5, limitBytes: MIB }
    await expect(beginUpload(db, technician, MORNING, file)).rejects.toMatchObject({
      code: 'bad-input',
      fields: { source: [expect.stringContaining('NL-Q')] },
    })
    expect(await rows()).toEqual({ uploads: 0, imports: 0, files: 0, chunks: 0 })
  })

  it('more bytes than were said', async () => {
    const token = await begin(night.subarray(0, MIB + 5))
    await expect(receivePieces(db, technician, token, 0, parts(night))).rejects.toMatchObject({
      code: 'too-large',
    })
    expect(await readUpload(db, technician, token)).toMatchObject({ receivedBytes: MIB })
  })
})

describe('two tabs', () => {
  it('that go on with the same upload at once keep every byte once; one goes on, the other is told', async () => {
    const token = await begin(night)
    await receivePieces(db, technician, token, 0, parts(night.subarray(0, MIB)))
    const both = await Promise.allSettled(
      [0, 1].map(() => receivePieces(db, technician, token, MIB, parts(night.subarray(MIB)))),
    )
    const refused = both.filter(({ status }) => status === 'rejected')
    for (const one of refused) expect(one).toMatchObject({ reason: { code: 'conflict' } })
    // They may take turns until each has lost one; what is there then is whole pieces, and either goes on.
    expect(refused.length).toBeGreaterThan(0)
    const { receivedBytes } = await readUpload(db, technician, token)
    await receivePieces(db, technician, token, receivedBytes, parts(night.subarray(receivedBytes)))
    await finishUpload(db, technician, MORNING, token)
    const [row] = await db.select({ sha256: importFile.sha256 }).from(importFile)
    expect(row?.sha256).toBe(sha256(night))
  })

  it('that finish it at once get one import', async () => {
    const token = await sendAll(night)
    const both = await Promise.all([0, 1].map(() => finishUpload(db, technician, MORNING, token)))
    expect(new Set(both.map(({ importId }) => importId)).size).toBe(1)
    expect(both.filter(({ again }) => !again)).toHaveLength(1)
    expect(await rows()).toMatchObject({ imports: 1, files: 1, chunks: Math.ceil(night.length / MIB) })
  })
})

describe('what becomes of a whole file', () => {
  it('is said again when it is asked for again', async () => {
    const token = await sendAll(night)
    const first = await finishUpload(db, technician, MORNING, token)
    expect(await finishUpload(db, technician, MORNING, token)).toEqual({ ...first, again: true })
    await discardImport(db, technician, MORNING, first.importId, 'not wanted')
    expect(await finishUpload(db, technician, MORNING, token)).toMatchObject({ importId: first.importId })
    expect((await rows()).imports).toBe(1)
  })

  it('with bytes that wait already is that import, and the second copy goes', async () => {
    const first = await finishUpload(db, technician, MORNING, await sendAll(night))
    const before = await rows()
    const token = await sendAll(night, colleague)
    for (let i = 0; i < 2; i += 1) {
      expect(await finishUpload(db, colleague, MORNING, token)).toMatchObject({
        importId: first.importId,
        state: 'read',
        again: true,
      })
    }
    expect(await rows()).toMatchObject({ imports: 1, chunks: before.chunks })
  })

  it('with bytes that have been taken in is a conflict that names the import, each time', async () => {
    const first = await finishUpload(db, technician, MORNING, await sendAll(night))
    await db.update(importFile).set({ state: 'accepted', decidedBy: technician.personId, decidedAt: MORNING })
    const token = await sendAll(night)
    for (let i = 0; i < 2; i += 1) {
      await expect(finishUpload(db, technician, MORNING, token)).rejects.toMatchObject({
        code: 'conflict',
        details: { importId: first.importId },
      })
    }
  })

  it('that is no log is refused with what was found, and kept as such', async () => {
    const page = new TextEncoder().encode('<html><form></form></html>')
    const token = await sendAll(page)
    const staged = await finishUpload(db, technician, MORNING, token)
    expect(staged).toMatchObject({
      state: 'refused',
      refusal: { found: expect.stringContaining('web page') },
    })
    expect(await finishUpload(db, technician, MORNING, token)).toEqual({ ...staged, again: true })
  })

  it('is left to the worker when it is large', async () => {
    const filler = new TextEncoder().encode('# filler\n'.repeat(LARGE_FILE_BYTES / 8))
    const large = new Uint8Array(night.length + filler.length)
    large.set(night)
    large.set(filler, night.length)
    const staged = await finishUpload(db, technician, MORNING, await sendAll(large))
    expect(staged).toMatchObject({ state: 'reading', refusal: null, again: false })
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({ state: 'reading', sha256: sha256(large), readOut: null })
    const [jobs] = await db.select({ n: count() }).from(job).where(eq(job.kind, 'read-night-file'))
    expect(jobs?.n).toBe(1)
  })
})

describe('what is left over', () => {
  it('goes when it has not moved for a day; what moves and what became an import stays', async () => {
    const idle = await begin(night)
    await receivePieces(db, technician, idle, 0, parts(night.subarray(0, 2 * MIB)))
    const done = await sendAll(night)
    const { importId } = await finishUpload(db, technician, MORNING, done)
    const moving = await begin(night)
    const old = new Date(machineNow().getTime() - DAY_MS - 1_000)
    for (const token of [idle, done])
      await db.update(upload).set({ createdAt: old, lastAt: old }).where(eq(upload.token, token))
    await db.update(upload).set({ createdAt: old }).where(eq(upload.token, moving))
    expect(await readUnfinished(db, technician)).toMatchObject([{ token: moving }])

    expect(await purgeUploads(db)).toBe(2)
    await expect(readUpload(db, technician, idle)).rejects.toMatchObject({ code: 'not-found' })
    expect(await readUpload(db, technician, moving)).toMatchObject({ receivedBytes: 0 })
    const [made] = await db.select().from(importFile).where(eq(importFile.id, importId))
    expect(await openAttachment(db, made?.attachmentId ?? 0)).toMatchObject({ byteSize: night.length })
    expect(await rows()).toEqual({
      uploads: 1,
      imports: 1,
      files: 2,
      chunks: Math.ceil(night.length / MIB),
    })
    // The rule for files sent in one go leaves those in pieces alone, however long ago they were begun.
    expect(await removeIncompleteAttachments(db, after(MORNING, DAY_MS))).toBe(0)
  })
})
