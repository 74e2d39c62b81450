import { beforeEach, describe, expect, it } from 'vitest'
import { reading, rollupDue } from '#app/db/schema/index.ts'
import { qualityCode } from '#app/domain/readings.ts'
import { readIonCurrents } from '#app/services/ion-currents.server.ts'
import { segmentReadingsCsv } from '#app/services/segment-csv.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSegment,
  createSite,
  createSource,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const DAY = 86_400
let segmentId: number

beforeEach(async () => {
  await createSite(db)
  segmentId = (await createSegment(db, { tag: 'SG-X1' })).id
  const source = await createSource(db, { code: 'NL-X' })
  const place = async (tag: string, quantity: 'ion-current' | 'pressure') => {
    const kind = quantity === 'pressure' ? 'hot-cathode' : 'partial-pressure'
    const { id } = await createPosition(db, { tag, kind, quantity, segmentId })
    return (await createChannel(db, { sourceId: source.id, name: tag, positionId: id })).id
  }
  const argon = await place('RG-X-40', 'ion-current')
  const gauge = await place('HC-X1A', 'pressure')
  await db.insert(reading).values(
    [
      { channelId: argon, daysBack: 15, value: 2e-15 },
      { channelId: argon, daysBack: 1, value: 4e-15 },
      // Later the same day: the mean of the day is the geometric one, 8e-15 A.
      { channelId: argon, daysBack: 0.99, value: 16e-15 },
      { channelId: gauge, daysBack: 1, value: 5e-8 },
    ].map(({ channelId, daysBack, value }, index) => ({
      channelId,
      at: after(MORNING, -daysBack * DAY),
      seq: 0,
      value,
      quality: qualityCode('good'),
      marks: 0,
      importId: 7,
      lineNo: index + 1,
    })),
  )
  // No rollup stands for these readings yet.
  await db
    .insert(rollupDue)
    .values(
      [argon, gauge].map((channelId) => ({ channelId, fromAt: after(MORNING, -20 * DAY), toAt: MORNING })),
    )
})

describe('ion currents of a segment', () => {
  it('are its analyser channels alone, with the last reading, daily means and the change over two weeks', async () => {
    const currents = await readIonCurrents(db, segmentId, MORNING)
    expect(currents.map(({ tag }) => tag)).toEqual(['RG-X-40'])
    const [argon] = currents
    expect(argon?.last).toMatchObject({ amps: 16e-15, importId: 7, lineNo: 3 })
    expect(argon?.days).toHaveLength(28)
    expect(argon?.days.filter((mean) => mean !== null)).toHaveLength(2)
    expect(argon?.days[26]).toBeCloseTo(8e-15, 25)
    expect(argon?.twoWeeks).toBeCloseTo(4, 9)
  })

  it('do not count when their time hangs on an answer', async () => {
    await db.update(reading).set({ marks: 2 })
    const [argon] = await readIonCurrents(db, segmentId, MORNING)
    expect(argon?.last).toBeNull()
    expect(argon?.twoWeeks).toBeNull()
  })

  it('come as CSV in amperes, apart from the pressures', async () => {
    const csv = async (query: string) =>
      new Response(await segmentReadingsCsv(db, 'SG-X1', MORNING, new URLSearchParams(query))).text()
    const lines = (await csv('quantity=ion-current')).trim().split('\r\n')
    expect(lines[0]).toBe('position,utc,value_a,quality,marks,bound_a,import,line')
    expect(
      lines.slice(1).map((line) =>
        line
          .split(',')
          .slice(0, 1)
          .concat(line.split(',')[2] ?? ''),
      ),
    ).toEqual([
      ['RG-X-40', '4e-15'],
      ['RG-X-40', '1.6e-14'],
    ])
    expect(await csv('')).toMatch(/value_pa_nitrogen_equivalent[^\n]*\n?[\s\S]*HC-X1A/)
    expect(await csv('')).not.toContain('RG-X-40')
    await expect(csv('quantity=colour')).rejects.toThrow('“colour”; expected pressure or ion-current')
  })
})
