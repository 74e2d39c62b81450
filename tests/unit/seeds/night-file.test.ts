import { readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { readNightFile } from '#app/domain/night-files/reader.ts'
import { qualityWord } from '#app/domain/readings.ts'
import { demoNights, type NightFile, nightFile } from '#seeds/readings/night-file.ts'
import { CHANNELS, SOURCES } from '#seeds/register/sources.ts'

const SOURCE_CODES = ['NL-W', 'NL-E'] as const
const LAST_NIGHTS = demoNights().slice(-3)

async function readBack(file: NightFile) {
  const rows: NightFile['readings'] = []
  const nullable = (value: number) => (Number.isNaN(value) ? null : value)
  const readOut = await readNightFile(
    [file.bytes],
    SOURCES.find(({ code }) => code === file.source)?.profile ?? null,
    {
      nowMs: Date.UTC(2026, 10, 9, 7),
      siteZone: 'Europe/Vienna',
      channels: CHANNELS.filter(({ source }) => source === file.source).map(({ name, position }) => ({
        name,
        quantity: position.quantity,
      })),
    },
    (batch, channels) => {
      for (let index = 0; index < batch.count; index += 1) {
        rows.push({
          channel: channels[batch.channel[index] ?? -1]?.name ?? '',
          atMs: batch.atMs[index] ?? Number.NaN,
          seq: batch.seq[index] ?? Number.NaN,
          value: nullable(batch.value[index] ?? Number.NaN),
          bound: nullable(batch.bound[index] ?? Number.NaN),
          quality: qualityWord(batch.quality[index] ?? -1),
          marks: batch.marks[index] ?? Number.NaN,
          lineNo: batch.line[index] ?? Number.NaN,
        })
      }
    },
  )
  return { readOut, rows }
}

describe('night files of the demo', () => {
  it.each(SOURCE_CODES.flatMap((source) => LAST_NIGHTS.map((night) => [source, night] as const)))(
    '%s of %s stands in the repository as it is made',
    (source, night) => {
      const made = nightFile(source, night)
      const path = fileURLToPath(new URL(`../../../seeds/night-files/${made.fileName}`, import.meta.url))
      expect(readFileSync(path).equals(made.bytes)).toBe(true)
    },
  )

  // The clock change, the restart with exchanged columns, a conflict, and an ordinary night.
  it.each([
    ['NL-W', '2026-10-24'],
    ['NL-W', '2026-11-02'],
    ['NL-E', '2026-11-06'],
    ['NL-W', '2026-11-08'],
    ['NL-E', '2026-11-08'],
  ] as const)('%s of %s says what was written into it', async (source, night) => {
    const file = nightFile(source, night)
    const { readOut, rows } = await readBack(file)
    expect(readOut.state).toBe('readable')
    expect(readOut.lines.total).toBe(file.lineCount)
    expect(rows).toEqual(file.readings)
  })

  it('begins each file after the last instant of the one before', () => {
    for (const source of SOURCE_CODES) {
      let previousEnd = Number.NEGATIVE_INFINITY
      for (const night of demoNights().slice(-6)) {
        const { readings } = nightFile(source, night)
        expect(readings[0]?.atMs).toBeGreaterThan(previousEnd)
        previousEnd = readings.at(-1)?.atMs ?? Number.NaN
      }
    }
  })

  it('closes the last west file with 5,1E-10 mbar at the cross of SG-01', () => {
    const file = nightFile('NL-W', '2026-11-08')
    const last = file.bytes.toString('latin1').trimEnd().split('\r\n').at(-1)?.split(';')
    expect(last?.[0]).toBe('09.11.2026 06:00:00')
    expect(last?.[2]).toBe('5,1E-10')
    const reading = file.readings.findLast(({ channel }) => channel === 'HC-01B')
    expect(reading?.value).toBeCloseTo(5.1e-8, 20)
  })

  it('has twenty-five hours in the night the clocks go back', () => {
    const count = (night: string) =>
      nightFile('NL-W', night).readings.filter(({ channel }) => channel === 'HC-01A').length
    expect(count('2026-10-24')).toBe(150)
    expect(count('2026-10-23')).toBe(144)
  })

  it('leaves SG-15 out after 22:10 and SG-14 off after it was vented', () => {
    const { readings } = nightFile('NL-E', '2026-11-08')
    expect(readings.findLast(({ channel }) => channel === 'HC-15B')?.atMs).toBe(Date.UTC(2026, 10, 8, 21, 10))
    const vented = readings.filter(({ channel }) => channel === 'HC-14B')
    expect(vented.length).toBe(144)
    expect(vented.every(({ quality, value }) => quality === 'off' && value === null)).toBe(true)
  })
})

describe('curves of the demo', () => {
  const goodOf = (channel: string, nights: readonly string[]) =>
    nights
      .flatMap((night) => nightFile('NL-E', night).readings)
      .filter((reading) => reading.channel === channel && reading.value !== null)

  it('lets SG-11 fall as one over time from the start of high vacuum', () => {
    const start = Date.UTC(2026, 10, 6, 13)
    const falling = goodOf('HC-11B', LAST_NIGHTS).filter(({ atMs }) => atMs > start)
    expect(falling.length).toBeGreaterThan(3800)
    for (const { atMs, value } of falling) {
      const hours = (atMs - start) / 3_600_000
      // 2.4e-5 Pa at 66 h; noise of 2 %, twelve uniform numbers reach six deviations at most.
      expect(Math.abs(((value ?? 0) * hours) / (2.4e-5 * 66) - 1)).toBeLessThan(0.13)
    }
  })

  it('lets SG-13 rise by 6.0e-6 Pa an hour', () => {
    const shut = Date.UTC(2026, 10, 8, 19)
    const rising = goodOf('HC-13B', ['2026-11-08']).filter(({ atMs }) => atMs > shut)
    expect(rising.length).toBe(600)
    // Least squares of value against hours.
    const xs = rising.map(({ atMs }) => (atMs - shut) / 3_600_000)
    const ys = rising.map(({ value }) => value ?? 0)
    const mean = (list: number[]) => list.reduce((sum, one) => sum + one, 0) / list.length
    const [mx, my] = [mean(xs), mean(ys)]
    const slope =
      xs.reduce((sum, x, index) => sum + (x - mx) * ((ys[index] ?? 0) - my), 0) /
      xs.reduce((sum, x) => sum + (x - mx) ** 2, 0)
    expect(slope).toBeGreaterThan(5.9e-6)
    expect(slope).toBeLessThan(6.1e-6)
  })
})
