import { asc, count, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { findTokenByHash, type TokenRow } from '#app/db/queries/api.server.ts'
import { readOriginal } from '#app/db/queries/imports.server.ts'
import {
  apiPost,
  apiToken,
  attachment,
  channel,
  channelMap,
  importFile,
  importRange,
  reading,
} from '#app/db/schema/index.ts'
import { MARKS, qualityCode } from '#app/domain/readings.ts'
import { addToken, tokenFor } from '#app/services/api-tokens.server.ts'
import { takeInPost } from '#app/services/live-readings.server.ts'
import { beginDerived, readDerived } from '#app/services/revisions.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
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
const AT = '2026-11-09T07:55:00+01:00'

let token: TokenRow
let wallId: number

beforeEach(async () => {
  await createSite(db)
  const admin = await createUser(db, { roles: ['administrator'] })
  const source = await createSource(db, { code: 'NL-T' })
  wallId = (await createChannel(db, { sourceId: source.id, name: 'TH-05-09' })).id
  await db.update(channel).set({ quantity: 'temperature' }).where(eq(channel.id, wallId))
  const text = await addToken(db, admin, MORNING, {
    intent: 'add',
    name: 'Gateway',
    sources: ['NL-T'],
    until: after(MORNING, 86_400),
    reason: 'live feed',
  })
  token = await tokenFor(db, `Bearer ${text}`, 'NL-T', MORNING)
})

interface Item {
  channel: string
  at: string
  value: number | string | null
}

const wall = (value: Item['value'], at = AT): Item => ({ channel: 'TH-05-09', at, value })

function take(readings: unknown, requestKey = 'one', on = db) {
  const bytes = new TextEncoder().encode(
    typeof readings === 'string' ? readings : JSON.stringify({ readings }),
  )
  return takeInPost(on, token, MORNING, { sourceCode: 'NL-T', requestKey, bytes })
}

const stored = () =>
  db.select().from(reading).where(eq(reading.channelId, wallId)).orderBy(asc(reading.at), asc(reading.seq))

async function rows(table: typeof importFile | typeof attachment | typeof apiPost | typeof reading) {
  const [row] = await db.select({ n: count() }).from(table)
  return row?.n
}

describe('a post', () => {
  it('becomes an import with its bytes, and readings that lead back to their place in it', async () => {
    const items = [
      wall(151.2, '2026-11-09T07:50:00+01:00'),
      wall('OFF', '2026-11-09T07:52:00+01:00'),
      wall(1372),
    ]
    const { answer, again } = await take(items)
    expect(again).toBe(false)
    expect(answer).toEqual({
      importId: answer.importId,
      stored: 3,
      held: 0,
      conflicting: 0,
      flagged: 1,
      skipped: 0,
    })
    expect(await stored()).toMatchObject([
      { value: 151.2, quality: qualityCode('good'), importId: answer.importId, lineNo: 1 },
      { value: null, quality: qualityCode('off'), lineNo: 2 },
      { value: 1372, quality: qualityCode('fault'), lineNo: 3, at: new Date(AT) },
    ])
    const [row] = await db.select().from(importFile)
    expect(row).toMatchObject({
      state: 'accepted',
      arrival: 'post',
      lineCount: 3,
      readingCount: 3,
      uploadedBy: null,
      lastAt: new Date(AT),
      acceptedSha256: null,
    })
    const pieces: Uint8Array[] = []
    for await (const piece of readOriginal(db, row?.attachmentId ?? 0)) pieces.push(piece)
    expect(Buffer.concat(pieces).toString()).toBe(JSON.stringify({ readings: items }))
    const [range] = await db.select().from(importRange)
    expect(range).toMatchObject({ channelId: wallId, readingCount: 3, lastAt: new Date(AT) })
  })

  it('marks what was computed without a reading that was held back', async () => {
    const thing = (subjectId: string, from: string, to: string) =>
      beginDerived(db, {
        kind: 'curve',
        subjectId,
        madeAt: MORNING,
        basis: [{ channelId: wallId, from: new Date(from), to: new Date(to) }],
      })
    await thing('this morning', '2026-11-09T06:00:00Z', '2026-11-09T07:00:00Z')
    await thing('the day before', '2026-11-08T06:00:00Z', '2026-11-08T07:00:00Z')
    const { answer } = await take([wall(151.2)])
    expect(await readDerived(db, 'curve', 'this morning')).toMatchObject({
      staleSince: MORNING,
      staleReason: expect.stringContaining(`Import ${answer.importId} (posted by Gateway)`),
    })
    expect((await readDerived(db, 'curve', 'the day before'))?.staleSince).toBeNull()
  })

  it('stores what comes after the sensor was removed as suspect', async () => {
    const segment = await createSegment(db, { tag: 'SG-05' })
    const position = await createPosition(db, {
      tag: 'TH-05-09',
      segmentId: segment.id,
      lineId: segment.lineId,
    })
    await db.insert(channelMap).values({
      channelId: wallId,
      positionId: position.id,
      startsAt: new Date('2026-01-01T00:00:00Z'),
      endsAt: new Date('2026-11-09T06:54:00Z'),
      reason: 'removed',
      recordedAt: MORNING,
    })
    const { answer } = await take([wall(151, '2026-11-09T07:53:00+01:00'), wall(152)])
    expect(answer).toMatchObject({ stored: 2, flagged: 1 })
    expect((await stored()).map(({ quality }) => quality)).toEqual([
      qualityCode('good'),
      qualityCode('suspect'),
    ])
  })

  it('leaves out what is held and keeps what differs beside it, both marked', async () => {
    await take([wall(150)])
    const { answer } = await take([wall(150), wall(149, '2026-11-09T08:00:00+01:00')], 'two')
    expect(answer).toMatchObject({ stored: 1, held: 1, conflicting: 0 })
    const third = await take([wall(152)], 'three')
    expect(third.answer).toMatchObject({ stored: 1, held: 0, conflicting: 1 })
    expect((await stored()).map(({ value, seq, marks }) => [value, seq, marks])).toEqual([
      [150, 0, MARKS.conflict],
      [152, 1, MARKS.conflict],
      [149, 0, 0],
    ])
  })

  it('notes when the token was last used', async () => {
    await take([wall(150)])
    const [row] = await db.select().from(apiToken)
    expect(row?.lastUsedAt).toEqual(MORNING)
    expect((await findTokenByHash(db, row?.tokenHash ?? ''))?.lastUsedAt).toEqual(MORNING)
  })

  it('is stored whole or not at all', async () => {
    await expect(take([wall(150), { ...wall(150), channel: 'TH-99-01' }])).rejects.toMatchObject({
      status: 422,
      total: 1,
      faults: [{ index: 1, field: 'channel', found: '"TH-99-01"' }],
    })
    await expect(take('{"readings": [')).rejects.toMatchObject({ status: 400 })
    const broken = Uint8Array.of(...Buffer.from('{"readings": "'), 0xff, ...Buffer.from('"}'))
    await expect(
      takeInPost(db, token, MORNING, { sourceCode: 'NL-T', requestKey: 'one', bytes: broken }),
    ).rejects.toMatchObject({ status: 400, message: expect.stringContaining('UTF-8') })
    for (const table of [importFile, attachment, apiPost, reading]) expect(await rows(table)).toBe(0)
    // The key was not used up by what was refused.
    expect((await take([wall(150)])).answer.stored).toBe(1)
  })

  it('in pieces of 1 MiB when it is larger', async () => {
    const many = Array.from({ length: 9_000 }, (_, i) =>
      wall(150 + (i % 10), new Date(Date.parse(AT) - i * 1000).toISOString()),
    )
    const text = JSON.stringify({ readings: many }, null, 40)
    expect(text.length).toBeGreaterThan(2 ** 20)
    const { answer } = await take(text)
    expect(answer.stored).toBe(9_000)
    const [row] = await db.select().from(importFile)
    const pieces: Uint8Array[] = []
    for await (const piece of readOriginal(db, row?.attachmentId ?? 0)) pieces.push(piece)
    expect(pieces.length).toBe(Math.ceil(text.length / 2 ** 20))
    expect(Buffer.concat(pieces).toString()).toBe(text)
  })
})

describe('a key', () => {
  it('gives the same answer to the same post and adds nothing', async () => {
    const first = await take([wall(150)])
    const second = await take([wall(150)])
    expect(second).toEqual({ answer: first.answer, again: true })
    expect([await rows(importFile), await rows(reading), await rows(attachment)]).toEqual([1, 1, 1])
  })

  it('is refused for another post', async () => {
    await take([wall(150)])
    await expect(take([wall(151)])).rejects.toMatchObject({
      status: 422,
      message: expect.stringContaining('another'),
    })
    expect(await rows(reading)).toBe(1)
  })

  it('used twice at once takes one post in and gives both the same answer', async () => {
    const both = await Promise.all([take([wall(150)], 'same'), take([wall(150)], 'same', other)])
    expect(both.map(({ again }) => again).sort()).toEqual([false, true])
    expect(both[0].answer).toEqual(both[1].answer)
    expect([await rows(importFile), await rows(reading), await rows(apiPost)]).toEqual([1, 1, 1])
  })

  it('used twice at once for different posts takes one in and refuses the other', async () => {
    const both = await Promise.allSettled([take([wall(150)], 'same'), take([wall(151)], 'same', other)])
    expect(both.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
    expect(both.find((one) => one.status === 'rejected')?.reason).toMatchObject({ status: 422 })
    expect(await rows(reading)).toBe(1)
  })

  it('different ones at once, with the same readings, store them once', async () => {
    const both = await Promise.all([take([wall(150)], 'a'), take([wall(150)], 'b', other)])
    expect(both[0].answer.stored + both[1].answer.stored).toBe(1)
    expect(both[0].answer.held + both[1].answer.held).toBe(1)
    expect(await rows(importFile)).toBe(2)
  })
})
