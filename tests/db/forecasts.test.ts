import { beforeEach, expect, test } from 'vitest'
import { insertDue } from '#app/db/queries/rollups.server.ts'
import { forecastRecord, logEntry, reading } from '#app/db/schema/index.ts'
import { qualityCode } from '#app/domain/readings.ts'
import { judgeForecasts, readForecastRecords, recordForecast } from '#app/services/forecasts.server.ts'
import { forecastSegment, readForecastSubject } from '#app/services/forecasts-segment.server.ts'
import { setSegmentState } from '#app/services/segment-states.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSegment,
  createSource,
  createState,
  createUser,
  type TestUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const HOUR = 3600
const START = after(MORNING, -66 * HOUR)
const NOTHING = { targetPa: null, from: null, to: null }

let bram: TestUser
let tag: string
let segmentId: number
let channelId: number
beforeEach(async () => {
  bram = await createUser(db, { roles: ['engineer', 'technician'] })
  const segment = await createSegment(db, { innerDiameterM: 0.5, endM: 150 })
  tag = segment.tag
  segmentId = segment.id
  await createState(db, { segmentId, setBy: bram.personId, state: 'pumping', since: START })
  const position = await createPosition(db, { segmentId, tag: 'HC-77B' })
  channelId = (await createChannel(db, { sourceId: (await createSource(db)).id, positionId: position.id })).id
  await fall(0, 66)
})

/** A pump-down as 1/t, 2.4e-5 Pa after 66 h, with a scatter of 2 %, every ten minutes. */
async function fall(from: number, to: number): Promise<void> {
  await db.insert(reading).values(
    Array.from({ length: (to - from) * 6 }, (_, index) => {
      const hours = from + (index + 1) / 6
      return {
        channelId,
        at: after(START, hours * HOUR),
        value: ((2.4e-5 * 66) / hours) * (1 + 0.02 * Math.sin(hours * 777)),
        quality: qualityCode('good'),
        marks: 0,
        importId: 1,
        lineNo: index,
      }
    }),
  )
  await insertDue(db, [{ channelId, from: after(START, from * HOUR), last: after(START, to * HOUR) }])
}

async function forecast(ask: object = {}, at = MORNING) {
  return forecastSegment(db, await readForecastSubject(db, tag, at), at, { ...NOTHING, ...ask })
}

test('66 h on the 1/t line at 2.4e-5 Pa: 1e-5 Pa is near 158 h, with a range around it', async () => {
  const found = await forecast({ targetPa: 1e-5 })
  if (found?.result.kind !== 'forecast') throw new Error('expected a forecast')
  // 66 h times 2.4.
  expect(found.result.hours / 158.4).toBeGreaterThan(0.95)
  expect(found.result.hours / 158.4).toBeLessThan(1.05)
  expect(found.result.low).toBeLessThan(158.4)
  expect(found.result.high).toBeGreaterThan(158.4)
  expect(found.parts?.fallingPa).toBeGreaterThan(2.2e-5)
})

test('a pressure in service far below is said to need a bake', async () => {
  expect((await forecast({ targetPa: 2e-7 }))?.binding).toMatchObject({ binds: 'water' })
})

test('five hours are too few: no date, and when it may be tried', async () => {
  const found = await forecast({}, after(START, 5 * HOUR))
  expect(found?.result).toMatchObject({ kind: 'refused', reason: 'too-few-hours', tryAgainHours: 13 })
})

test('a pump that was changed two hours ago, as an entry on the chart says, lets no date be given', async () => {
  const eventAt = after(MORNING, -2 * HOUR)
  const entry = { segmentId, eventAt, writtenAt: eventAt, authorId: bram.personId, text: 'MC-Z exchanged' }
  await db.insert(logEntry).values({ ...entry, kind: 'pump', onChart: true })
  const found = await forecast()
  expect(found?.changes).toMatchObject([{ at: eventAt, what: 'MC-Z exchanged' }])
  expect(found?.result).toMatchObject({ kind: 'refused', reason: 'pump-change', tryAgainHours: 64 + 12 })
  // A window that ends before the change can be fitted; one across it cannot.
  const before = { from: after(START, 10 * HOUR), to: after(START, 60 * HOUR) }
  expect((await forecast(before))?.result.kind).toBe('forecast')
  expect((await forecast({ ...before, to: MORNING }))?.result).toMatchObject({ reason: 'pump-change' })
  expect(
    (await forecast({ from: after(START, 50 * HOUR), to: after(START, 55 * HOUR) }))?.result,
  ).toMatchObject({
    reason: 'too-few-hours',
  })
})

test('a forecast of record stays open until the readings decide, and is then counted', async () => {
  const id = await recordForecast(db, bram, MORNING, tag, { ...NOTHING, targetPa: 2e-5, note: '' })
  expect(await judgeForecasts(db, MORNING)).toBe(0)
  await fall(66, 100)
  const later = after(START, 100 * HOUR)
  expect(await judgeForecasts(db, later)).toBe(1)
  expect(await judgeForecasts(db, later)).toBe(0)
  const { records, hits } = await readForecastRecords(db, segmentId)
  expect(records).toMatchObject([{ id, outcome: 'inside', judgedAt: later, model: { gauge: 'HC-77B' } }])
  expect(hits).toMatchObject({ of: 1, inside: 1 })
})

test('a vent before its time spoils it', async () => {
  await recordForecast(db, bram, MORNING, tag, { ...NOTHING, targetPa: 1e-5, note: '' })
  const ventedAt = after(MORNING, HOUR)
  await setSegmentState(db, bram, ventedAt, {
    tag,
    from: 'pumping',
    state: 'vented',
    since: ventedAt,
    reason: 'for a gauge',
    unusual: false,
  })
  await judgeForecasts(db, after(ventedAt, HOUR))
  expect((await readForecastRecords(db)).records).toMatchObject([
    { outcome: 'spoiled', outcomeReason: 'Handled before it could come true: state set to "Vented"' },
  ])
})

test('what is refused, or asked by a technician alone, is not kept', async () => {
  const pim = await createUser(db, { roles: ['technician'] })
  const ask = { ...NOTHING, targetPa: 1e-5, note: '' }
  await expect(recordForecast(db, pim, MORNING, tag, ask)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(recordForecast(db, bram, after(START, 5 * HOUR), tag, ask)).rejects.toMatchObject({
    code: 'not-acceptable-now',
  })
  await expect(recordForecast(db, bram, MORNING, tag, { ...ask, targetPa: 1e-3 })).rejects.toMatchObject({
    message: expect.stringContaining('reached already'),
  })
  expect(await db.select().from(forecastRecord)).toEqual([])
})
