import { readdirSync, readFileSync, statSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { readNightFile } from '#app/domain/night-files/reader.ts'
import type { Answer } from '#app/domain/night-files/types.ts'
import { qualityWord } from '#app/domain/readings.ts'
import { anyNightFile, LOGGER_CODES } from '#seeds/readings/any-night.ts'
import { demoNights } from '#seeds/readings/calendar.ts'
import type { FileReading, LoggerCode, LoggerFile } from '#seeds/readings/files.ts'
import { handExport } from '#seeds/readings/hand-export.ts'
import { LOST_CLOCK_ANSWER } from '#seeds/readings/logger-files.ts'
import { nightFile } from '#seeds/readings/night-file.ts'
import { recorderFile } from '#seeds/readings/recorder-file.ts'
import { CHANNELS, SOURCES } from '#seeds/register/sources.ts'
import { RECORDINGS } from '#seeds/scenario/recordings.ts'

const LAST_NIGHTS = demoNights().slice(-3)
const FOLDER = fileURLToPath(new URL('../../../seeds/night-files/', import.meta.url))

function made(source: LoggerCode, night: string): LoggerFile {
  const file = anyNightFile(source, night)
  if (file === null) throw new Error(`${source} delivered nothing for ${night}`)
  return file
}

async function readBack(file: LoggerFile, answers: readonly Answer[] = []) {
  const rows: FileReading[] = []
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
      fileName: file.fileName,
      answers,
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

const key = (one: FileReading) =>
  `${one.lineNo} ${one.channel} ${one.atMs} ${one.seq} ${one.value} ${one.bound} ${one.quality} ${one.marks}`

/** Order within a line is the reader's own affair. */
function sameReadings(rows: readonly FileReading[], file: LoggerFile): boolean {
  if (rows.length !== file.readings.length) return false
  const written = new Set(file.readings.map(key))
  return rows.every((row) => written.has(key(row)))
}

const COMMITTED = [
  ...LAST_NIGHTS.flatMap((night) => LOGGER_CODES.map((source) => anyNightFile(source, night))),
  handExport(),
].filter((file) => file !== null)

describe('night files of the demo', () => {
  it('stand in the repository as they are made, and nothing else does', () => {
    for (const { fileName, bytes } of COMMITTED) {
      expect(readFileSync(`${FOLDER}${fileName}`).equals(bytes), fileName).toBe(true)
    }
    expect(readdirSync(FOLDER).sort()).toEqual(COMMITTED.map(({ fileName }) => fileName).sort())
  })

  it('stay under 15 MB together', () => {
    const sizes = readdirSync(FOLDER).map((name) => statSync(`${FOLDER}${name}`).size)
    expect(sizes.reduce((sum, size) => sum + size, 0)).toBeLessThan(15_000_000)
  })

  it('come out byte for byte the same at a second time', () => {
    for (const source of LOGGER_CODES) {
      const [first, second] = [made(source, '2026-11-01'), made(source, '2026-11-01')]
      expect(first.bytes.equals(second.bytes), source).toBe(true)
    }
  })

  // The clock change, the restart with exchanged columns, a conflict, and ordinary nights.
  it.each([
    ['NL-W', '2026-10-24'],
    ['NL-W', '2026-11-02'],
    ['NL-W', '2026-11-08'],
    ['NL-E', '2026-11-06'],
    ['NL-E', '2026-11-08'],
    ['NL-T', '2026-11-08'],
    ['NL-P', '2026-11-08'],
    ['NL-R', '2026-10-24'],
    ['NL-R', '2026-11-07'],
  ] as const)('%s of %s says what was written into it', async (source, night) => {
    const file = made(source, night)
    const { readOut, rows } = await readBack(file)
    expect(readOut.state).toBe('readable')
    expect(readOut.lines.total).toBe(file.lineCount)
    expect(sameReadings(rows, file)).toBe(true)
  })

  it.each(
    RECORDINGS.map((one) => [one.segment, one.stepSeconds, one.stepSeconds === 1 ? 1800 : 60, one] as const),
  )(
    'the recorder at %s says what was written into it, a row every %i s, %i of them',
    async (_segment, step, count, recording) => {
      const file = recorderFile(recording)
      const { readOut, rows } = await readBack(file)
      expect(readOut.state).toBe('readable')
      expect(readOut.gapTotal).toBe(0)
      expect(readOut.periodSeconds).toBe(step)
      expect(rows).toHaveLength(count * recording.channels.length)
      expect(sameReadings(rows, file)).toBe(true)
    },
  )

  it('begins each file after the last instant of the one before', () => {
    for (const source of ['NL-W', 'NL-E'] as const) {
      let previousEnd = Number.NEGATIVE_INFINITY
      for (const night of demoNights().slice(-4)) {
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
    expect(file.readings.findLast(({ channel }) => channel === 'HC-01B')?.value).toBeCloseTo(5.1e-8, 20)
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
    expect(vented.length).toBe(1440)
    expect(vented.every(({ quality, value }) => quality === 'off' && value === null)).toBe(true)
  })
})

describe('quirks of the loggers', () => {
  it('west starts again in the night of 2 November with two columns exchanged, taken by name', async () => {
    const { readOut } = await readBack(nightFile('NL-W', '2026-11-02'))
    expect(readOut.restarts).toEqual([{ line: expect.any(Number), reordered: true }])
  })

  it('west goes through the repeated hour of 25 October by the order of its rows', async () => {
    const { readOut } = await readBack(nightFile('NL-W', '2026-10-24'))
    expect(readOut.remarks.map(({ kind }) => kind)).toContain('repeated-hour')
    expect(readOut.readings.marked).toBe(0)
  })

  it('east writes lines twice, and once an over-range beside a value', async () => {
    const { readOut } = await readBack(nightFile('NL-E', '2026-11-06'))
    expect(readOut.readings.duplicates).toBeGreaterThan(10)
    expect(readOut.remarks.find(({ kind }) => kind === 'conflicts')?.count).toBe(1)
  })

  it('east says >1E-2 while SG-11 comes down from the roughing pressure', () => {
    const over = nightFile('NL-E', '2026-11-06').readings.filter(
      ({ channel, quality }) => channel === 'HC-11B' && quality === 'over-range',
    )
    expect(over.length).toBeGreaterThan(0)
    expect(over.every(({ bound }) => bound === 1e-2)).toBe(true)
  })

  it('temperatures come in UTF-16 with a mark, and a broken wire reads full scale', async () => {
    const file = made('NL-T', '2026-11-08')
    expect([...file.bytes.subarray(0, 2)]).toEqual([0xff, 0xfe])
    const { readOut, rows } = await readBack(file)
    expect(readOut.dialect.encoding).toBe('utf-16le')
    const broken = rows.filter(({ channel }) => channel === 'TH-12-07')
    expect(broken).toHaveLength(288)
    expect(broken.every(({ quality }) => quality === 'fault')).toBe(true)
  })

  it('power says OFF for a supply that is off, and its west meter begins again once', async () => {
    const { rows } = await readBack(made('NL-P', '2026-11-08'))
    expect(rows.filter(({ channel }) => channel === 'HX-3-I').every(({ quality }) => quality === 'off')).toBe(
      true,
    )
    const meterOn = (night: string) =>
      made('NL-P', night)
        .readings.filter(({ channel }) => channel === 'EM-W')
        .at(-1)?.value ?? Number.NaN
    expect(meterOn('2026-03-01')).toBeGreaterThan(990_000)
    expect(meterOn('2026-11-08')).toBeLessThan(60_000)
  })

  it('residual gas counts seconds from a note, once from the year 2000, and delivers nothing for the last night', () => {
    const text = (night: string) => made('NL-R', night).bytes.toString('latin1')
    expect(text('2026-11-07')).toContain('# Start: 2026-11-07 06:00:00')
    expect(text('2026-11-02')).toContain('# Start: 2000-01-01 00:00:00')
    expect(text('2026-11-07').split('\r\n')[3]).toMatch(/^600,/)
    expect(anyNightFile('NL-R', '2026-11-08')).toBeNull()
  })

  it('residual gas with a lost clock waits for its start, and takes its times from the answer, marked', async () => {
    const file = made('NL-R', LOST_CLOCK_ANSWER.night)
    const asked = await readBack(file)
    expect(asked.readOut.state).toBe('needs-answers')
    expect(asked.readOut.questions.map(({ id }) => id)).toEqual(['start'])
    expect(asked.rows).toHaveLength(0)
    const { readOut, rows } = await readBack(file, [{ id: 'start', choice: LOST_CLOCK_ANSWER.start }])
    expect(readOut.state).toBe('readable')
    expect(sameReadings(rows, file)).toBe(true)
    expect(readOut.readings.marked).toBe(rows.length)
  })

  it('a copy saved by hand is not taken as it stands', async () => {
    const { readOut } = await readBack(handExport())
    expect(readOut.state).not.toBe('readable')
  })
})
