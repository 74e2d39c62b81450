/** The two pressure loggers' files. West writes wide rows in site time and millibars, east long ones in epoch and pascals. */
import { MARKS } from '../../app/domain/readings.ts'
import { at } from '../demo-time.ts'
import { pressureRows, spanOfNight } from './calendar.ts'
import { type FileReading, type LoggerFile, reading } from './files.ts'
import { channelsOf, print, said, segmentOfChannel } from './gauge-channels.ts'
import type { Said } from './pressures.ts'
import { siteTime } from './site-clock.ts'

/** Channels of each logger in the order in which they stand in its files. */
const WEST_CHANNELS = channelsOf(1, 8)
const EAST_CHANNELS = channelsOf(9, 17)

function pressureReading(
  channel: string,
  atMs: number,
  lineNo: number,
  value: Exclude<Said, 'gone'>,
  pa: number | null,
): FileReading {
  if (typeof value === 'number') return reading(channel, atMs, lineNo, pa)
  if (value === 'over') return reading(channel, atMs, lineNo, null, 'over-range', 1e-2)
  return reading(channel, atMs, lineNo, null, value)
}

/** After a restart the west logger came up with two columns exchanged, until it was set right in the morning. */
const RESTART_MS = at('2026-11-03 01:12').getTime()
/** The power dip made it start again as well, with its columns as they were. */
const DIP_RESTART_MS = at('2026-03-17 09:20').getTime()
const EXCHANGED_COLUMNS = WEST_CHANNELS.map(
  (name) => ({ 'HC-02A': 'HC-02B', 'HC-02B': 'HC-02A' })[name] ?? name,
)

const WEST_WORDS: Record<Exclude<Said, number | 'gone'>, string> = {
  off: 'OFF',
  starting: 'STARTING',
  over: '>1e-04',
}

/** A file of the west logger with rows at these instants. */
export function westFile(fileName: string, rows: readonly number[], endsMs: number): LoggerFile {
  const header = (columns: readonly string[]) => ['Zeit', ...columns].join(';')
  const lines = ['sep=;', '# Nachtlogger West   Einheit: mbar', header(WEST_CHANNELS)]
  const readings: FileReading[] = []
  let columns = WEST_CHANNELS
  let beforeMs = Number.POSITIVE_INFINITY
  for (const atMs of rows) {
    const restarted = (ms: number) => beforeMs <= ms && atMs > ms
    if (restarted(RESTART_MS)) columns = EXCHANGED_COLUMNS
    if (restarted(RESTART_MS) || restarted(DIP_RESTART_MS)) lines.push(header(columns))
    const lineNo = lines.length + 1
    const cells = columns.map((channel) => {
      const value = said(channel, atMs)
      if (value === 'gone') throw new Error(`${channel} is gone from a wide file`)
      const text = typeof value === 'number' ? print(value / 100) : WEST_WORDS[value]
      readings.push(
        pressureReading(channel, atMs, lineNo, value, typeof value === 'number' ? Number(text) * 100 : null),
      )
      return typeof value === 'number' || value === 'over' ? text.replace('.', ',').replace('e', 'E') : text
    })
    lines.push([siteTime(atMs), ...cells].join(';'))
    beforeMs = atMs
  }
  return finish('NL-W', fileName, endsMs, lines, readings, '\r\n')
}

/** One in so many lines is written twice by the east logger. */
const DOUBLED_EVERY = 977
/** At this instant it wrote an over-range beside the value, as it does when a gauge comes back from a glitch. */
const GLITCH = { channel: 'HC-16A', atMs: at('2026-11-07 03:10').getTime() }

function eastCells(channel: string, value: Exclude<Said, 'gone'>): { text: string; status: string } {
  if (typeof value === 'number') return { text: print(value), status: 'OK' }
  if (value === 'over') return { text: '>1E-2', status: 'OVER' }
  if (value === 'starting') return { text: '', status: 'STARTING' }
  return { text: '0', status: channel.startsWith('CC') ? 'HV OFF' : 'EMISSION OFF' }
}

/** A file of the east logger with rows at these instants, for the channels that `kept` lets through. */
export function eastFile(
  fileName: string,
  rows: readonly number[],
  endsMs: number,
  kept: (segment: string, atMs: number) => boolean = () => true,
): LoggerFile {
  const lines = ['epoch_ms,channel,value,unit,status']
  const readings: FileReading[] = []
  const write = (channel: string, atMs: number) => {
    const value = said(channel, atMs)
    if (value === 'gone') return
    const { text, status } = eastCells(channel, value)
    const row = `${atMs},${channel},${text},Pa,${status}`
    const plain = (lineNo: number) =>
      pressureReading(channel, atMs, lineNo, value, typeof value === 'number' ? Number(text) : null)
    if (channel === GLITCH.channel && atMs === GLITCH.atMs) {
      lines.push(`${atMs},${channel},>1E-2,Pa,OVER`)
      readings.push({ ...pressureReading(channel, atMs, lines.length, 'over', null), marks: MARKS.conflict })
      lines.push(row)
      readings.push({ ...plain(lines.length), seq: 1, marks: MARKS.conflict })
      return
    }
    lines.push(row)
    readings.push(plain(lines.length))
    if (lines.length % DOUBLED_EVERY === 0) lines.push(row)
  }
  for (const atMs of rows) {
    for (const channel of EAST_CHANNELS) if (kept(segmentOfChannel(channel), atMs)) write(channel, atMs)
  }
  return finish('NL-E', fileName, endsMs, lines, readings, '\n')
}

function finish(
  source: 'NL-W' | 'NL-E',
  fileName: string,
  endsMs: number,
  lines: readonly string[],
  readings: FileReading[],
  lineEnd: string,
): LoggerFile {
  const bytes = Buffer.from(lines.map((line) => line + lineEnd).join(''), 'latin1')
  return { source, fileName, endsMs, bytes, lineCount: lines.length, readings }
}

/** The file of a pressure logger for the night that began on a day, YYYY-MM-DD. */
export function nightFile(source: 'NL-W' | 'NL-E', night: string): LoggerFile {
  const make = source === 'NL-W' ? westFile : eastFile
  return make(`${source}_${night}.csv`, pressureRows(night), spanOfNight(night).toMs)
}
