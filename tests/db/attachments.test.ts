import { createHash, randomBytes } from 'node:crypto'
import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { attachment, attachmentChunk } from '#app/db/schema/index.ts'
import {
  listAttachments,
  type NewAttachment,
  openAttachment,
  removeIncompleteAttachments,
  saveAttachment,
} from '#app/services/attachments.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const MIB = 1_048_576

async function* inParts(bytes: Uint8Array, partSize: number): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += partSize) yield bytes.subarray(at, at + partSize)
}

function file(bytes: Uint8Array, options: Partial<NewAttachment> = {}): NewAttachment {
  return {
    actor: null,
    now: MORNING,
    fileName: 'file.bin',
    subjectKind: 'log-entry',
    subjectId: '7',
    maxBytes: 8 * MIB,
    accept: 'any',
    content: inParts(bytes, 65_536),
    ...options,
  }
}

async function readAll(id: number): Promise<Buffer> {
  const parts: Uint8Array[] = []
  for await (const part of (await openAttachment(db, id)).content) parts.push(part)
  return Buffer.concat(parts)
}

async function leftRows(): Promise<number> {
  return (await db.select().from(attachment)).length + (await db.select().from(attachmentChunk)).length
}

test.each([
  ['one byte', 1, 65_536],
  ['one byte less than a row', MIB - 1, 65_536],
  ['exactly a row', MIB, 65_536],
  ['one byte more than a row', MIB + 1, 65_536],
  ['three rows in parts larger than a row', 3 * MIB, 2 * MIB + 3],
  ['two rows and a bit in odd parts', 2 * MIB + 77, 10_007],
])('the same bytes come back: %s', async (_what, size, partSize) => {
  const bytes = randomBytes(size)
  const saved = await saveAttachment(db, file(bytes, { content: inParts(bytes, partSize) }))
  expect(saved.byteSize).toBe(size)
  expect(saved.sha256).toBe(createHash('sha256').update(bytes).digest('hex'))
  expect((await readAll(saved.id)).equals(bytes)).toBe(true)
  const chunks = await db.select({ data: attachmentChunk.data }).from(attachmentChunk)
  expect(chunks).toHaveLength(Math.ceil(size / MIB))
  expect(Math.max(...chunks.map(({ data }) => data.length))).toBeLessThanOrEqual(MIB)
})

test('a file is kept with who, when, what it belongs to and its type by content', async () => {
  const actor = await createUser(db)
  const png = Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex')
  const saved = await saveAttachment(
    db,
    file(png, { actor, fileName: 'C:\\tmp\\flange.txt', accept: ['image/png'] }),
  )
  expect(saved).toMatchObject({ fileName: 'flange.txt', contentType: 'image/png' })
  const [row] = await db.select().from(attachment)
  expect(row).toMatchObject({ createdBy: actor.personId, createdAt: MORNING, complete: true })
  expect(await listAttachments(db, 'log-entry', '7')).toEqual([saved])
  expect(await listAttachments(db, 'log-entry', '8')).toEqual([])
  expect(await openAttachment(db, saved.id)).toMatchObject({ subjectKind: 'log-entry', subjectId: '7' })
})

test('a file of another type is refused with what it is and what is taken, and leaves nothing', async () => {
  const script = Buffer.from('alert(1)\n')
  const attempt = saveAttachment(
    db,
    file(script, { fileName: 'picture.png', accept: ['image/png', 'image/jpeg'] }),
  )
  await expect(attempt).rejects.toMatchObject({
    code: 'wrong-type',
    status: 415,
    message:
      'picture.png is, by its content, a text file. Taken here: PNG picture, JPEG picture. Save it as one of these and send that.',
  })
  expect(await leftRows()).toBe(0)
})

test('a file over the limit is refused while it arrives, without reading the rest, and leaves nothing', async () => {
  let sent = 0
  async function* endless(): AsyncGenerator<Uint8Array> {
    for (;;) {
      sent += MIB
      yield new Uint8Array(MIB)
    }
  }
  await expect(
    saveAttachment(db, file(new Uint8Array(), { content: endless(), maxBytes: 3 * MIB })),
  ).rejects.toMatchObject({ code: 'too-large', status: 413, message: expect.stringContaining('3 MiB') })
  expect(sent).toBe(4 * MIB)
  expect(await leftRows()).toBe(0)
})

test('a file of exactly the limit is taken, an empty one is refused', async () => {
  const saved = await saveAttachment(db, file(new Uint8Array(MIB), { maxBytes: MIB }))
  expect(saved.byteSize).toBe(MIB)
  await expect(saveAttachment(db, file(new Uint8Array()))).rejects.toMatchObject({
    code: 'bad-input',
    message: 'file.bin is empty: 0 bytes arrived. Choose the file again.',
  })
})

test('when the sender breaks off, its own error comes through and nothing stays', async () => {
  async function* brokenOff(): AsyncGenerator<Uint8Array> {
    yield new Uint8Array(2 * MIB)
    throw new Error('the connection was closed')
  }
  await expect(saveAttachment(db, file(new Uint8Array(), { content: brokenOff() }))).rejects.toThrow(
    'the connection was closed',
  )
  expect(await leftRows()).toBe(0)
})

test('a file that is still arriving cannot be opened or listed', async () => {
  let id = 0
  async function* slow(): AsyncGenerator<Uint8Array> {
    yield new Uint8Array(MIB + 1)
    const [row] = await db.select().from(attachment)
    id = row?.id ?? 0
    await expect(openAttachment(db, id)).rejects.toMatchObject({ code: 'not-found' })
    expect(await listAttachments(db, 'log-entry', '7')).toEqual([])
    yield new Uint8Array(1)
  }
  const saved = await saveAttachment(db, file(new Uint8Array(), { content: slow() }))
  expect(saved.id).toBe(id)
  expect((await readAll(id)).length).toBe(MIB + 2)
})

test('bytes changed or lost in the database end the reading in an error', async () => {
  const saved = await saveAttachment(db, file(randomBytes(2 * MIB)))
  const whereFirst = eq(attachmentChunk.chunkNo, 0)
  await db
    .update(attachmentChunk)
    .set({ data: randomBytes(MIB) })
    .where(whereFirst)
  await expect(readAll(saved.id)).rejects.toThrow(/damaged: its bytes give SHA-256/)
  await db.delete(attachmentChunk).where(whereFirst)
  await expect(readAll(saved.id)).rejects.toThrow(/piece 0 is missing/)
})

test('uploads whose process died are removed when old enough, others are left alone', async () => {
  const kept = await saveAttachment(db, file(new Uint8Array(10)))
  const facts = {
    fileName: 'x',
    contentType: 'text/plain',
    byteSize: 0,
    sha256: '',
    subjectKind: 'x',
    subjectId: '1',
  }
  const [old] = await db.insert(attachment).values({ ...facts, createdAt: after(MORNING, -100) })
  await db.insert(attachmentChunk).values({ attachmentId: old.insertId, chunkNo: 0, data: new Uint8Array(5) })
  const [young] = await db.insert(attachment).values({ ...facts, createdAt: after(MORNING, 100) })
  expect(await removeIncompleteAttachments(db, MORNING)).toBe(1)
  const rows = await db.select({ id: attachment.id }).from(attachment)
  expect(rows.map(({ id }) => id).sort((a, b) => a - b)).toEqual([kept.id, young.insertId])
  const chunks = await db.select({ of: attachmentChunk.attachmentId }).from(attachmentChunk)
  expect(chunks).toEqual([{ of: kept.id }])
})

test('an upload given up as too old meanwhile does not come back half', async () => {
  async function* overtaken(): AsyncGenerator<Uint8Array> {
    yield new Uint8Array(MIB + 1)
    await removeIncompleteAttachments(db, after(MORNING, 1))
    yield new Uint8Array(1)
  }
  await expect(saveAttachment(db, file(new Uint8Array(), { content: overtaken() }))).rejects.toMatchObject({
    code: 'conflict',
  })
  expect(await leftRows()).toBe(0)
})
