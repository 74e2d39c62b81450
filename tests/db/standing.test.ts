import { beforeEach, expect, test } from 'vitest'
import { channelMap, importFile, limitValue, reading } from '#app/db/schema/index.ts'
import { MARKS, type Quality, qualityCode } from '#app/domain/readings.ts'
import { limitFor, readStandings } from '#app/services/standing.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createFitting,
  createInstrument,
  createPosition,
  createSegment,
  createSource,
  createState,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()

/** The night's file ended two hours before the morning, one reading a minute. */
const FILE_END = after(MORNING, -7200)

let segment: { id: number; tag: string }
let sourceId: number
beforeEach(async () => {
  const setBy = (await createUser(db)).personId
  segment = await createSegment(db)
  await createState(db, { segmentId: segment.id, setBy, state: 'in-service' })
  sourceId = (await createSource(db, { periodSeconds: 60 })).id
  await acceptFile(FILE_END)
  await db.insert(limitValue).values({
    kind: 'target',
    value: 1e-7,
    unit: 'Pa',
    startsAt: after(MORNING, -1e6),
    reason: 'for a test',
    recordedAt: MORNING,
  })
})

async function acceptFile(lastAt: Date): Promise<void> {
  await db.insert(importFile).values({
    state: 'accepted',
    sourceId,
    fileName: 'night.csv',
    byteSize: 1,
    sha256: `${lastAt.getTime()}`.padStart(64, '0'),
    uploadedAt: MORNING,
    lastAt,
  })
}

/** A hot-cathode gauge of the segment with a channel of its own. */
async function gauge(suffix: 'A' | 'B') {
  const position = await createPosition(db, { segmentId: segment.id, tag: `HC-77${suffix}` })
  const channel = await createChannel(db, { sourceId, positionId: position.id })
  return { position, channel }
}

async function read(
  channelId: number,
  at: Date,
  value: number | null,
  options: { quality?: Quality; marks?: number } = {},
): Promise<void> {
  await db.insert(reading).values({
    channelId,
    at,
    value,
    quality: qualityCode(options.quality ?? 'good'),
    marks: options.marks ?? 0,
    importId: 1,
    lineNo: 1,
  })
}

async function standing(now = MORNING) {
  const [found] = await readStandings(db, now, segment.tag)
  if (found === undefined) throw new Error('expected the segment')
  return found
}

test('at target when both gauges are fresh and below it', async () => {
  const [a, b] = [await gauge('A'), await gauge('B')]
  await read(a.channel.id, FILE_END, 6e-8)
  await read(b.channel.id, FILE_END, 5.1e-8)
  const { standing: result, target } = await standing()
  expect(target?.value).toBe(1e-7)
  expect(result).toMatchObject({
    verdict: 'at-target',
    freshGauges: { fresh: 2, of: 2 },
    headline: { tag: 'HC-77B', value: 5.1e-8, at: FILE_END, fresh: true },
  })
})

test('unknown when one gauge stopped four minutes before the file ended, though its value is only hours old', async () => {
  const [a, b] = [await gauge('A'), await gauge('B')]
  await read(a.channel.id, after(FILE_END, -240), 6e-8)
  await read(b.channel.id, FILE_END, 5e-8)
  expect((await standing()).standing).toMatchObject({ verdict: 'unknown', freshGauges: { fresh: 1, of: 2 } })
})

test('unknown when the newest file is 26 hours old, and known again with the next one', async () => {
  const b = await gauge('B')
  await read(b.channel.id, FILE_END, 5e-8)
  expect((await standing(after(FILE_END, 26 * 3600 - 1))).standing.verdict).toBe('at-target')
  expect((await standing(after(FILE_END, 26 * 3600))).standing.verdict).toBe('unknown')
  await acceptFile(after(FILE_END, 86_400))
  await read(b.channel.id, after(FILE_END, 86_400), 5e-8)
  expect((await standing(after(FILE_END, 26 * 3600))).standing.verdict).toBe('at-target')
})

test('a withdrawn file does not count as the newest', async () => {
  const b = await gauge('B')
  await read(b.channel.id, FILE_END, 5e-8)
  await db.update(importFile).set({ state: 'withdrawn' })
  const { gauges } = await standing()
  // Without a file around it the reading counts as typed, for one shift.
  expect(gauges[0]).toMatchObject({ value: 5e-8, fresh: true })
  expect((await standing(after(FILE_END, 12 * 3600))).gauges[0]?.fresh).toBe(false)
})

test.each<[Quality, number]>([
  ['suspect', 0],
  ['degas', 0],
  ['withdrawn', 0],
  ['good', MARKS['time-ambiguous']],
  ['good', MARKS['time-reconstructed']],
])('a newer reading of quality %s with marks %i is named but not used', async (quality, marks) => {
  const b = await gauge('B')
  await read(b.channel.id, after(FILE_END, -60), 5e-8)
  await read(b.channel.id, FILE_END, 9e-6, { quality, marks })
  expect((await standing()).gauges[0]).toMatchObject({
    value: 5e-8,
    at: after(FILE_END, -60),
    newestQuality: quality,
    newestAt: FILE_END,
  })
})

test('the factor in force at the reading multiplies it, and none other', async () => {
  const b = await gauge('B')
  const [old, young] = [await createInstrument(db), await createInstrument(db)]
  const positionId = b.position.id
  await createFitting(db, { positionId, instrumentId: old, factor: 7, endsAt: after(FILE_END, -60) })
  await createFitting(db, { positionId, instrumentId: young, factor: 1.2, startsAt: after(FILE_END, -60) })
  await read(b.channel.id, FILE_END, 5e-8)
  expect((await standing()).gauges[0]?.value).toBeCloseTo(6e-8, 15)
})

test('a corrected map moves the readings to the right position and rewrites none', async () => {
  const [a, b] = [await gauge('A'), await gauge('B')]
  await read(a.channel.id, FILE_END, 1e-8)
  await read(b.channel.id, FILE_END, 9e-8)
  const before = await db.select().from(reading)
  await db.update(channelMap).set({ replacedAt: MORNING })
  const map = { startsAt: after(MORNING, -1e6), reason: 'the two were crossed', recordedAt: MORNING }
  await db.insert(channelMap).values([
    { ...map, channelId: a.channel.id, positionId: b.position.id },
    { ...map, channelId: b.channel.id, positionId: a.position.id },
  ])
  const values = (await standing()).gauges.map(({ position, value }) => [position.tag, value])
  expect(values.sort()).toEqual([
    ['HC-77A', 9e-8],
    ['HC-77B', 1e-8],
  ])
  expect(await db.select().from(reading)).toEqual(before)
})

test("a reading from before its channel's map began belonged to another position", async () => {
  const position = await createPosition(db, { segmentId: segment.id, tag: 'HC-77B' })
  const channel = await createChannel(db, {
    sourceId,
    positionId: position.id,
    mappedFrom: after(FILE_END, 60),
  })
  await read(channel.id, FILE_END, 5e-8)
  const { gauges, standing: result } = await standing()
  expect(gauges[0]).toMatchObject({ value: null, newestAt: null, fresh: false })
  expect(result).toMatchObject({ verdict: 'unknown', headline: null })
})

test('looking back shows what was known then, and nothing later', async () => {
  const b = await gauge('B')
  await read(b.channel.id, after(FILE_END, -86_400), 5e-8)
  await acceptFile(after(FILE_END, -86_400))
  await read(b.channel.id, FILE_END, 3e-7)
  expect((await standing(after(FILE_END, -3600))).standing).toMatchObject({
    verdict: 'at-target',
    headline: { value: 5e-8 },
  })
  expect((await standing(MORNING)).standing).toMatchObject({ verdict: 'above-target' })
})

test("a segment's own limit goes before the site's", async () => {
  const other = await createSegment(db)
  const limits = [
    { segmentId: null, value: 1 },
    { segmentId: segment.id, value: 2 },
  ].map((own) => ({ kind: 'target', ...own })) as unknown as Parameters<typeof limitFor>[0]
  expect(limitFor(limits, 'target', segment.id)?.value).toBe(2)
  expect(limitFor(limits, 'target', other.id)?.value).toBe(1)
  expect(limitFor(limits, 'target', null)?.value).toBe(1)
  expect(limitFor(limits, 'operating-limit', segment.id)).toBeNull()
})
