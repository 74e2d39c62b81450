import { and, asc, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { type Bin, binReadings } from '#app/db/queries/readings.server.ts'
import { insertDue, lockDue } from '#app/db/queries/rollups.server.ts'
import { reading, rollup, rollupDue } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { MARKS, QUALITIES, qualityCode } from '#app/domain/readings.ts'
import { ROLLUP_LEVELS } from '#app/domain/rollups.ts'
import { makeRollups } from '#app/services/rollups.server.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createChannel, createSource } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const { signal } = new AbortController()

const DAY = Date.UTC(2026, 10, 7)
const HOUR_MS = 3_600_000
let channels: number[]

/** The same numbers at every run (Park and Miller's generator). */
function random(seed: number): () => number {
  let state = seed
  return () => {
    state = (state * 48_271) % 2_147_483_647
    return state / 2_147_483_647
  }
}

/** Readings of all sorts: of every quality, ambiguous in time, negative, at zero, in step and out of it. */
function someReadings(channelId: number, fromMs: number, toMs: number, seed: number) {
  const next = random(seed)
  const rows: (typeof reading.$inferInsert)[] = []
  for (let at = fromMs; at < toMs; at += 1 + Math.floor(next() * 700_000)) {
    const sort = next()
    const quality = sort < 0.7 ? 'good' : (QUALITIES[Math.floor(next() * 10)] ?? 'good')
    const value = next() < 0.05 ? null : next() < 0.05 ? -next() : next() < 0.03 ? 0 : 10 ** (-9 + 4 * next())
    const marks = next() < 0.05 ? MARKS['time-ambiguous'] : 0
    rows.push({
      channelId,
      at: new Date(at),
      value,
      quality: qualityCode(quality),
      marks,
      importId: 1,
      lineNo: 1,
    })
  }
  return rows
}

async function put(rows: (typeof reading.$inferInsert)[]): Promise<void> {
  for (let from = 0; from < rows.length; from += 500)
    await db.insert(reading).values(rows.slice(from, from + 500))
}

async function due(channelId: number, fromMs: number, toMs: number): Promise<void> {
  await insertDue(db, [{ channelId, from: new Date(fromMs), last: new Date(toMs - 1) }])
}

/** Bins worked out here, reading by reading. */
async function plainBins(input: Parameters<typeof binReadings>[1]): Promise<Bin[]> {
  const bins = new Map<string, { channelId: number; atMs: number; values: number[] }>()
  const rows = await db.select().from(reading).orderBy(asc(reading.channelId), asc(reading.at))
  const from = input.from.getTime()
  for (const { channelId, at, value, quality, marks } of rows) {
    const isGood = quality === qualityCode('good') || quality === qualityCode('manual')
    if (!input.channelIds.includes(channelId) || at < input.from || at >= input.to) continue
    if (!isGood || marks !== 0 || value === null || (input.logarithmic && value <= 0)) continue
    const bin = Math.floor((at.getTime() - from) / 1000 / input.binSeconds)
    const key = `${channelId} ${bin}`
    const found = bins.get(key) ?? { channelId, atMs: from + bin * input.binSeconds * 1000, values: [] }
    found.values.push(value)
    bins.set(key, found)
  }
  return [...bins.values()].map(({ channelId, atMs, values }) => {
    const sum = values.reduce((total, value) => total + (input.logarithmic ? Math.log(value) : value), 0)
    const mean = sum / values.length
    return {
      channelId,
      atMs,
      min: Math.min(...values),
      max: Math.max(...values),
      mean: input.logarithmic ? Math.exp(mean) : mean,
      count: values.length,
    }
  })
}

async function expectSame(input: Parameters<typeof binReadings>[1]): Promise<number> {
  const found = await binReadings(db, input)
  const expected = await plainBins(input)
  expect(found.map(({ mean, ...rest }) => rest)).toEqual(expected.map(({ mean, ...rest }) => rest))
  for (const [index, { mean }] of expected.entries()) {
    // Sums in another order differ by rounding only, of the largest value among them.
    const scale = Math.max(Math.abs(expected[index]?.max ?? 0), Math.abs(expected[index]?.min ?? 0))
    expect(Math.abs((found[index]?.mean ?? Number.NaN) - mean)).toBeLessThanOrEqual(1e-11 * scale)
  }
  return found.length
}

/** Bins of several lengths over two and a half days, some of them made of rollups and some not. */
async function expectSameEverywhere(): Promise<void> {
  for (const logarithmic of [true, false]) {
    for (const binSeconds of [600, 1_800, 7_200, 43_200, 86_400, 500]) {
      const asked = { channelIds: channels, binSeconds, logarithmic }
      await expectSame({ ...asked, from: new Date(DAY), to: new Date(DAY + 60 * HOUR_MS + 123_456) })
      await expectSame({
        ...asked,
        from: new Date(DAY + 7 * HOUR_MS + 600_000),
        to: new Date(DAY + 40 * HOUR_MS),
      })
    }
  }
}

beforeEach(async () => {
  const source = await createSource(db)
  channels = [
    (await createChannel(db, { sourceId: source.id })).id,
    (await createChannel(db, { sourceId: source.id })).id,
  ]
  for (const [index, channelId] of channels.entries()) {
    await put(someReadings(channelId, DAY - 5 * HOUR_MS, DAY + 72 * HOUR_MS, 11 + index))
    await due(channelId, DAY - 5 * HOUR_MS, DAY + 72 * HOUR_MS)
  }
})

describe('bins of readings', () => {
  it('are the same before rollups are made, afterwards, and while some are due', async () => {
    await expectSameEverywhere()
    expect(await makeRollups(db, signal)).toBe(2)
    expect(await db.select().from(rollupDue)).toEqual([])
    await expectSameEverywhere()
    const first = channels[0] ?? 0
    await db
      .delete(reading)
      .where(
        and(eq(reading.channelId, first), eq(reading.quality, qualityCode('good')), eq(reading.marks, 0)),
      )
    await put(someReadings(first, DAY + HOUR_MS + 1, DAY + 30 * HOUR_MS, 99))
    await due(first, DAY - 5 * HOUR_MS, DAY + 72 * HOUR_MS)
    await expectSameEverywhere()
    await makeRollups(db, signal)
    await expectSameEverywhere()
  })

  it('come from the rollups once these are made', async () => {
    await makeRollups(db, signal)
    // Without readings only rollups can answer.
    const input = {
      channelIds: channels,
      from: new Date(DAY),
      to: new Date(DAY + 48 * HOUR_MS),
      binSeconds: 86_400,
      logarithmic: true,
    }
    const before = await binReadings(db, input)
    expect(before).toHaveLength(4)
    await db.delete(reading)
    expect(await binReadings(db, input)).toEqual(before)
    expect(await binReadings(db, { ...input, binSeconds: 86_401 })).toEqual([])
    for (const channelId of channels) await due(channelId, DAY, DAY + 72 * HOUR_MS)
    expect(await binReadings(db, input)).toEqual([])
  })

  it('lose the rollups of readings that have gone', async () => {
    await makeRollups(db, signal)
    await db.delete(reading)
    for (const channelId of channels) await due(channelId, DAY - 5 * HOUR_MS, DAY + 72 * HOUR_MS)
    await makeRollups(db, signal)
    expect(await db.select().from(rollup)).toEqual([])
  })
})

describe('rollups', () => {
  it('count every reading once by its quality, at every level', async () => {
    await makeRollups(db, signal)
    const all = await db.select().from(reading)
    for (const level of ROLLUP_LEVELS) {
      const rows = await db.select().from(rollup).where(eq(rollup.levelSeconds, level))
      const sum = (pick: (row: (typeof rows)[number]) => number) => rows.reduce((n, row) => n + pick(row), 0)
      const count = (word: (typeof QUALITIES)[number]) =>
        all.filter(({ quality }) => quality === qualityCode(word)).length
      expect(sum(({ good }) => good)).toBe(count('good'))
      expect(sum(({ overRange }) => overRange)).toBe(count('over-range'))
      expect(sum(({ noSignal }) => noSignal)).toBe(count('no-signal'))
      expect(sum(({ manual }) => manual)).toBe(count('manual'))
      const { good, overRange, underRange, off, starting, degas, fault, noSignal, suspect, manual } = {
        good: sum((row) => row.good),
        overRange: sum((row) => row.overRange),
        underRange: sum((row) => row.underRange),
        off: sum((row) => row.off),
        starting: sum((row) => row.starting),
        degas: sum((row) => row.degas),
        fault: sum((row) => row.fault),
        noSignal: sum((row) => row.noSignal),
        suspect: sum((row) => row.suspect),
        manual: sum((row) => row.manual),
      }
      expect(
        good + overRange + underRange + off + starting + degas + fault + noSignal + suspect + manual,
      ).toBe(all.length)
    }
  })

  it('of a stretch of months are made in several turns', async () => {
    const channelId = channels[0] ?? 0
    await makeRollups(db, signal)
    await due(channelId, DAY - 100 * 24 * HOUR_MS, DAY + 72 * HOUR_MS)
    expect(await makeRollups(db, signal)).toBe(4)
    await expectSameEverywhere()
  })

  it('stay due when the worker is stopped before them', async () => {
    expect(await makeRollups(db, AbortSignal.abort())).toBe(0)
    expect(await db.select().from(rollupDue)).toHaveLength(2)
  })

  it('made by two workers at once are as if made one after the other', async () => {
    const channelId = channels[0] ?? 0
    await makeRollups(db, signal)
    for (let turn = 0; turn < 5; turn += 1) {
      const fromMs = DAY + turn * 10 * HOUR_MS
      // The first worker is held between its claim and its readings, while more of them come.
      let go = () => {}
      const held = new Promise<void>((resolve) => {
        go = resolve
      })
      await due(channelId, fromMs, fromMs + HOUR_MS)
      const blocker = tx(other, async (inside) => {
        await lockDue(inside, channelId, 1)
        await held
      })
      const both = [makeRollups(db, signal), makeRollups(other, signal)]
      await put(
        someReadings(channelId, fromMs + 1, fromMs + HOUR_MS, 1_000 + turn).map((row) => ({
          ...row,
          seq: 1,
        })),
      )
      await due(channelId, fromMs, fromMs + HOUR_MS)
      go()
      await Promise.all([blocker, ...both])
      await makeRollups(db, signal)
      await expectSame({
        channelIds: [channelId],
        from: new Date(DAY),
        to: new Date(DAY + 72 * HOUR_MS),
        binSeconds: 7_200,
        logarithmic: true,
      })
    }
  })
})
