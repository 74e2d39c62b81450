/**
 * The two night loggers' files, as text and as the readings that stand in it. A night runs from 06:00 to 06:00 site
 * time; its first row is ten minutes after, so that no instant stands in two files.
 */

import { TZDate } from '@date-fns/tz'
import { addDays, format } from 'date-fns'
import { MARKS, type Quality } from '../../app/domain/readings.ts'
import { at, DEMO_ZONE } from '../demo-time.ts'
import { SEGMENTS } from '../register/segments.ts'
import { noiseFactor, PRESSURE_NOISE } from './noise.ts'
import { type Gauge, NIGHT_END, pressureAt, type Said, SG11_PUMPING, SG15_LAST } from './pressures.ts'

interface NightReading {
  channel: string
  atMs: number
  seq: number
  /** Pa. */
  value: number | null
  bound: number | null
  quality: Quality
  marks: number
  lineNo: number
}

export interface NightFile {
  source: 'NL-W' | 'NL-E'
  /** Day on which the night began, YYYY-MM-DD. */
  night: string
  fileName: string
  bytes: Buffer
  lineCount: number
  readings: NightReading[]
}

const ROW_MS = 10 * 60_000

/** Since a cabling job these two channels carry each other's gauge. */
const CROSSED_SINCE = at('2026-10-20 10:40').getTime()
const CROSSED: Record<string, string> = { 'HC-03B': 'HC-04A', 'HC-04A': 'HC-03B' }

interface Place {
  segment: string
  gauge: Gauge
}

const PLACES = new Map<string, Place>(
  SEGMENTS.flatMap(({ tag, short }) => [
    [`HC-${short}A`, { segment: tag, gauge: 'A' }] as const,
    [`HC-${short}B`, { segment: tag, gauge: 'B' }] as const,
    [`CC-${short}`, { segment: tag, gauge: 'C' }] as const,
  ]),
)

const channelsOf = (first: number, last: number): string[] =>
  SEGMENTS.filter(({ id }) => id >= first && id <= last).flatMap(({ short }) => [
    `HC-${short}A`,
    `HC-${short}B`,
    `CC-${short}`,
  ])
const WEST = channelsOf(1, 8)
const EAST = channelsOf(9, 17)

/** Last instants of the demo, at which gauges say exactly what the table of its morning says. */
const WITHOUT_NOISE = new Set([NIGHT_END.getTime(), SG15_LAST.getTime()])

/** HC-14A flickered before it was taken out. */
const FLICKER_FROM = at('2026-10-28 00:00').getTime()

function said(channel: string, atMs: number): Said {
  const wired = atMs >= CROSSED_SINCE ? (CROSSED[channel] ?? channel) : channel
  const place = PLACES.get(wired)
  if (place === undefined) throw new Error(`No gauge of the demo is wired to ${channel}`)
  const value = pressureAt(place.segment, place.gauge, new Date(atMs))
  if (typeof value !== 'number' || WITHOUT_NOISE.has(atMs)) return value
  const deviation = channel === 'HC-14A' && atMs >= FLICKER_FROM ? 6 * PRESSURE_NOISE : PRESSURE_NOISE
  return value * noiseFactor(channel, atMs, deviation)
}

/** Three digits without closing noughts, as the loggers print them: 5.1e-10, 5.13e-10. */
function print(value: number): string {
  const [digits, exponent] = value.toExponential(2).split('e') as [string, string]
  const power = Number(exponent)
  const sign = power < 0 ? '-' : '+'
  return `${digits.replace(/\.?0+$/, '')}e${sign}${String(Math.abs(power)).padStart(2, '0')}`
}

function localNight(night: string): { fromMs: number; toMs: number } {
  const began = new TZDate(at(`${night} 06:00`).getTime(), DEMO_ZONE)
  // By the calendar and not by 24 hours: the night of a clock change is longer.
  return { fromMs: began.getTime() + ROW_MS, toMs: addDays(began, 1).getTime() }
}

const siteTime = (atMs: number) => format(new TZDate(atMs, DEMO_ZONE), 'dd.MM.yyyy HH:mm:ss')

function reading(
  channel: string,
  atMs: number,
  lineNo: number,
  value: Said,
  si: number | null,
): NightReading {
  const shared = { channel, atMs, seq: 0, marks: 0, lineNo }
  if (typeof value === 'number') return { ...shared, value: si, bound: null, quality: 'good' }
  if (value === 'over') return { ...shared, value: null, bound: 1e-2, quality: 'over-range' }
  return { ...shared, value: null, bound: null, quality: 'off' }
}

/** After a restart the west logger came up with two columns exchanged, until it was set right in the morning. */
const RESTART_MS = at('2026-11-03 01:12').getTime()
const RESTART_COLUMNS = WEST.map((name) => ({ 'HC-02A': 'HC-02B', 'HC-02B': 'HC-02A' })[name] ?? name)

function westFile(night: string): NightFile {
  const { fromMs, toMs } = localNight(night)
  const header = (columns: readonly string[]) => ['Zeit', ...columns].join(';')
  const lines = ['sep=;', '# Nachtlogger West   Einheit: mbar', header(WEST)]
  const readings: NightReading[] = []
  let columns = WEST
  for (let atMs = fromMs; atMs <= toMs; atMs += ROW_MS) {
    if (columns === WEST && fromMs < RESTART_MS && atMs > RESTART_MS && toMs > RESTART_MS) {
      columns = RESTART_COLUMNS
      lines.push(header(columns))
    }
    const lineNo = lines.length + 1
    const cells = columns.map((channel) => {
      const value = said(channel, atMs)
      const text = typeof value === 'number' ? print(value / 100) : value === 'over' ? '>1e-04' : 'OFF'
      readings.push(
        reading(channel, atMs, lineNo, value, typeof value === 'number' ? Number(text) * 100 : null),
      )
      return text.replace('.', ',').replace('e', 'E')
    })
    lines.push([siteTime(atMs), ...cells].join(';'))
  }
  return finish('NL-W', night, lines, readings)
}

/** Segments that the east logger writes every minute, and since when: a pump-down and an isolated test. */
const EVERY_MINUTE: Record<string, number> = {
  'SG-11': SG11_PUMPING.getTime(),
  'SG-13': at('2026-11-08 20:00').getTime(),
}

/** One in so many lines is written twice by the east logger. */
const DOUBLED_EVERY = 977
/** At this instant it wrote an over-range beside the value, as it does when a gauge comes back from a glitch. */
const GLITCH = { channel: 'HC-16A', atMs: at('2026-11-07 03:10').getTime() }

function eastFile(night: string): NightFile {
  const { fromMs, toMs } = localNight(night)
  const lines = ['epoch_ms,channel,value,unit,status']
  const readings: NightReading[] = []
  const write = (channel: string, atMs: number) => {
    const value = said(channel, atMs)
    if (value === 'gone') return
    const lineNo = lines.length + 1
    if (channel === GLITCH.channel && atMs === GLITCH.atMs) {
      lines.push(`${atMs},${channel},>1E-2,Pa,OVER`)
      readings.push({ ...reading(channel, atMs, lineNo, 'over', null), marks: MARKS.conflict })
      const text = print(value as number)
      lines.push(`${atMs},${channel},${text},Pa,OK`)
      const second = reading(channel, atMs, lineNo + 1, value, Number(text))
      readings.push({ ...second, seq: 1, marks: MARKS.conflict })
      return
    }
    const text = typeof value === 'number' ? print(value) : value === 'over' ? '>1E-2' : '0'
    const offWord = channel.startsWith('CC') ? 'HV OFF' : 'EMISSION OFF'
    const status = typeof value === 'number' ? 'OK' : value === 'over' ? 'OVER' : offWord
    const row = `${atMs},${channel},${text},Pa,${status}`
    lines.push(row)
    readings.push(reading(channel, atMs, lineNo, value, typeof value === 'number' ? Number(text) : null))
    if (lines.length % DOUBLED_EVERY === 0) lines.push(row)
  }
  for (let atMs = fromMs - ROW_MS + 60_000; atMs <= toMs; atMs += 60_000) {
    const full = (atMs - fromMs) % ROW_MS === 0
    for (const channel of EAST) {
      const since = EVERY_MINUTE[PLACES.get(channel)?.segment ?? '']
      if (full || (since !== undefined && atMs >= since)) write(channel, atMs)
    }
  }
  return finish('NL-E', night, lines, readings)
}

function finish(
  source: NightFile['source'],
  night: string,
  lines: readonly string[],
  readings: NightReading[],
): NightFile {
  const lineEnd = source === 'NL-W' ? '\r\n' : '\n'
  return {
    source,
    night,
    fileName: `${source}_${night}.csv`,
    bytes: Buffer.from(lines.map((line) => line + lineEnd).join(''), 'latin1'),
    lineCount: lines.length,
    readings,
  }
}

/** The file of a logger for the night that began on a day, with its readings. */
export function nightFile(source: NightFile['source'], night: string): NightFile {
  return source === 'NL-W' ? westFile(night) : eastFile(night)
}

/** Nights of the demo, oldest first: thirty, the last of them ending on its morning. */
export function demoNights(): string[] {
  const first = new TZDate(at('2026-10-10 12:00').getTime(), DEMO_ZONE)
  return Array.from({ length: 30 }, (_, index) => format(addDays(first, index), 'yyyy-MM-dd'))
}
