/** Readings by true time where a source's clock is corrected, against the same worked out from the stored rows. */
import { asc, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { runStart } from '#app/db/queries/heating.server.ts'
import { binReadings, lastReadings, listChannelReadings } from '#app/db/queries/readings.server.ts'
import { insertDue } from '#app/db/queries/rollups.server.ts'
import { clockCorrection, reading, record, rollupDue } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { trueTime } from '#app/domain/clock-correction.ts'
import type { DomainError } from '#app/domain/errors.ts'
import { qualityCode } from '#app/domain/readings.ts'
import { clockCorrectionSchema } from '#app/domain/schemas/register-dated.ts'
import { correctClock } from '#app/services/clock-corrections.server.ts'
import { beginDerived, listOutOfDate } from '#app/services/revisions.server.ts'
import { makeRollups } from '#app/services/rollups.server.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const { signal } = new AbortController()
const ZONE = 'America/St_Johns'
const DAY = 86_400_000
const FROM = Date.UTC(2026, 9, 28)
let bram: Actor
let code: string
let slow: number
let right: number

beforeEach(async () => {
  await createSite(db, { timeZone: ZONE })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  const source = await createSource(db)
  code = source.code
  slow = (await createChannel(db, { sourceId: source.id })).id
  right = (await createChannel(db, { sourceId: (await createSource(db)).id })).id
  const rows: (typeof reading.$inferInsert)[] = []
  for (let at = FROM; at < FROM + 6 * DAY; at += 397_003) {
    const value = 1e-7 * (1 + ((at / 1000) % 89))
    for (const channelId of [slow, right])
      rows.push({ channelId, at: new Date(at), value, quality: qualityCode('good'), importId: 1, lineNo: 1 })
  }
  for (let i = 0; i < rows.length; i += 500) await db.insert(reading).values(rows.slice(i, i + 500))
  const span = { from: new Date(FROM), last: new Date(FROM + 6 * DAY) }
  await insertDue(db, [
    { channelId: slow, ...span },
    { channelId: right, ...span },
  ])
  await makeRollups(db, signal)
})

/** A correction as the page posts it; times are those of the site, three and a half hours behind UTC in winter. */
async function correct(changes: Record<string, string> = {}): Promise<void> {
  const rows = await db
    .select({ id: clockCorrection.id, gone: clockCorrection.replacedAt })
    .from(clockCorrection)
  const seen = Math.max(0, ...rows.filter(({ gone }) => gone === null).map(({ id }) => id))
  const form = clockCorrectionSchema(ZONE).parse({
    seen: String(seen),
    startsAt: '2026-10-28 20:00',
    endsAt: '2026-11-01 20:30',
    startOffset: '0',
    endOffset: '42:17',
    reason: 'Compared with the radio clock',
    ...changes,
  })
  await correctClock(db, bram, MORNING, code, form)
}

async function inForce() {
  const rows = await db.select().from(clockCorrection).orderBy(asc(clockCorrection.startsAt))
  return rows
    .filter(({ replacedAt }) => replacedAt === null)
    .map((row) => ({
      startsMs: row.startsAt.getTime(),
      endsMs: row.endsAt.getTime(),
      startOffsetMs: row.startMs,
      endOffsetMs: row.endMs,
    }))
}

/** Bins worked out here, from what is stored. */
async function expectBins(binSeconds: number): Promise<void> {
  const corrections = await inForce()
  const [from, to] = [FROM - DAY, FROM + 8 * DAY]
  const found = await binReadings(db, {
    channelIds: [slow, right],
    from: new Date(from),
    to: new Date(to),
    binSeconds,
    logarithmic: true,
  })
  const counts = new Map<string, { n: number; max: number }>()
  for (const row of await db.select().from(reading)) {
    const at = row.at.getTime()
    const truly = row.channelId === slow ? trueTime(at, corrections) : at
    const bin = from + Math.floor((truly - from) / 1000 / binSeconds) * binSeconds * 1000
    const key = `${row.channelId} ${bin}`
    const held = counts.get(key) ?? { n: 0, max: 0 }
    counts.set(key, { n: held.n + 1, max: Math.max(held.max, row.value as number) })
  }
  expect(
    new Map(found.map((bin) => [`${bin.channelId} ${bin.atMs}`, { n: bin.count, max: bin.max }])),
  ).toEqual(counts)
}

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

describe('a corrected clock', () => {
  it('gives the bins of true time from readings and from rollups, and the former ones when taken away', async () => {
    const stored = await db.select().from(reading)
    const changes: Record<string, string>[] = [
      {},
      { startsAt: '2026-10-30 01:17', endsAt: '2026-10-31 12:00', startOffset: '-3:00', endOffset: '-4:11' },
      { startOffset: '0', endOffset: '0' },
    ]
    for (const change of changes) {
      await correct(change)
      // While the rollups are due, by readings; then by rollups, of several lengths.
      await expectBins(600)
      await makeRollups(db, signal)
      expect(await db.select().from(rollupDue)).toEqual([])
      for (const seconds of [600, 777, 7200, 86_400]) await expectBins(seconds)
    }
    expect(await inForce()).toEqual([])
    expect(await db.select().from(reading)).toEqual(stored)
  })

  it('shifts lists, last readings and the beginning of a run by the same', async () => {
    await correct()
    const corrections = await inForce()
    const rows = await db.select().from(reading).where(eq(reading.channelId, slow)).orderBy(asc(reading.at))
    const truly = rows.map(({ at }) => trueTime(at.getTime(), corrections)).sort((a, b) => a - b)
    const [from, to] = [FROM + 1.5 * DAY, FROM + 5.2 * DAY]
    const expected = truly.filter((at) => at >= from && at < to)
    const listed = await listChannelReadings(db, {
      channelId: slow,
      from: new Date(from),
      to: new Date(to),
      limit: 5000,
    })
    expect(listed.map(({ at }) => at.getTime())).toEqual(expected)
    const few = await listChannelReadings(db, {
      channelId: slow,
      from: new Date(from),
      to: new Date(to),
      limit: 7,
    })
    expect(few.map(({ at }) => at.getTime())).toEqual(expected.slice(0, 7))
    const at = new Date(to - 1)
    const last = (await lastReadings(db, [slow, right], at)).get(slow)
    expect(last?.usable?.at.getTime()).toBe(expected.at(-1))
    expect(last?.any?.at.getTime()).toBe(expected.at(-1))
    // One reading says off; the run after it begins with the next one.
    const off = rows[Math.floor(rows.length / 2)]?.at as Date
    await db
      .update(reading)
      .set({ quality: qualityCode('off') })
      .where(eq(reading.at, off))
    const start = await runStart(db, slow, at, { on: true, from: 0 })
    const offAt = trueTime(off.getTime(), corrections)
    expect(start?.getTime()).toBe(truly.find((one) => one > offAt))
  })

  it('marks what rests on the time that is shifted, and nothing else', async () => {
    const thing = (subjectId: string, channelId: number, from: number, to: number) =>
      beginDerived(db, {
        kind: 'curve',
        subjectId,
        madeAt: MORNING,
        basis: [{ channelId, from: new Date(from), to: new Date(to) }],
      })
    const end = Date.UTC(2026, 10, 2)
    await thing('before', slow, FROM - DAY, FROM + 0.9 * DAY)
    await thing('within', slow, FROM + 2 * DAY, FROM + 3 * DAY)
    await thing('other', right, FROM + 2 * DAY, FROM + 3 * DAY)
    await thing('shifted', slow, end + 41 * 60_000, end + DAY)
    await thing('after', slow, end + 43 * 60_000, end + DAY)
    await correct()
    expect((await listOutOfDate(db)).map(({ subjectId }) => subjectId)).toEqual(['within', 'shifted'])
  })

  it('keeps what is replaced, with who and why, and the rest of it with its offsets', async () => {
    await correct()
    await correct({
      startsAt: '2026-10-30 20:15',
      endsAt: '2026-10-31 20:00',
      startOffset: '10',
      endOffset: '20',
      reason: 'Set by hand that day',
    })
    const now = await inForce()
    // 42 min 17 s over 97.5 h; the cuts lie 48.25 h and 72 h after its start (clocks go back on 1 November).
    expect(now.map(({ startOffsetMs, endOffsetMs }) => [startOffsetMs, endOffsetMs])).toEqual([
      [0, 1_255_490],
      [10_000, 20_000],
      [1_873_477, 2_537_000],
    ])
    const gone = (await db.select().from(clockCorrection)).filter(({ replacedAt }) => replacedAt !== null)
    expect(gone).toMatchObject([
      {
        endMs: 2_537_000,
        replacedAt: MORNING,
        replacedBy: bram.personId,
        replaceReason: 'Set by hand that day',
      },
    ])
    expect((await db.select().from(record)).map(({ act, subjectId }) => [act, subjectId])).toEqual([
      ['source clock corrected', code],
      ['source clock corrected', code],
    ])
  })

  it('refuses a jump, nothing to take away, a form made before the last change, and who may not', async () => {
    expect((await refusal(correct({ endsAt: '2026-10-28 21:00' }))).fields).toHaveProperty('endOffset')
    expect((await refusal(correct({ endOffset: '0' }))).fields).toHaveProperty('endOffset')
    await correct()
    expect((await refusal(correct({ seen: '0' }))).code).toBe('conflict')
    bram = await createUser(db, { roles: ['technician'] })
    expect((await refusal(correct())).code).toBe('forbidden')
    expect(await inForce()).toHaveLength(1)
  })
})
