/** Files of the temperature, power and residual-gas loggers. */
import { MARKS } from '../../app/domain/readings.ts'
import { at } from '../demo-time.ts'
import { POSITIONS } from '../register/positions.ts'
import { SEGMENTS } from '../register/segments.ts'
import { everyStep, spanOfNight } from './calendar.ts'
import { type FileReading, type LoggerCode, type LoggerFile, reading } from './files.ts'
import { print } from './gauge-channels.ts'
import { ionCurrentA, MASSES } from './residual-gas.ts'
import { isoWithOffset, siteDay, siteHour } from './site-clock.ts'
import { type Feeder, fanIsOn, ionPumpA, meterKwh, supplyOutput } from './supplies.ts'
import { OPEN_WIRE_C, THERMOCOUPLES, type Thermocouple, thermocoupleC } from './temperatures.ts'

const FIVE_MINUTES_MS = 300_000
const TEN_MINUTES_MS = 600_000

/** UTF-16, little end first, with the mark that says so. */
function utf16(text: string): Buffer {
  return Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from(text, 'utf16le')])
}

/** A file of the temperature logger for these thermocouples. */
export function temperatureFile(
  fileName: string,
  rows: readonly number[],
  endsMs: number,
  places: readonly Thermocouple[] = THERMOCOUPLES,
): LoggerFile {
  const lines = ['# Temperature logger   Unit: °C', ['time', ...places.map(({ tag }) => tag)].join('\t')]
  const readings: FileReading[] = []
  for (const atMs of rows) {
    const lineNo = lines.length + 1
    const cells = places.map((place) => {
      const celsius = thermocoupleC(place, atMs)
      const broken = celsius === OPEN_WIRE_C
      readings.push(reading(place.tag, atMs, lineNo, broken ? null : celsius, broken ? 'fault' : 'good'))
      return celsius.toFixed(1)
    })
    lines.push([isoWithOffset(atMs), ...cells].join('\t'))
  }
  const bytes = utf16(lines.map((line) => `${line}\r\n`).join(''))
  return { source: 'NL-T', fileName, endsMs, bytes, lineCount: lines.length, readings }
}

interface PowerColumn {
  tag: string
  unit: string
  /** Text in the file; null for a supply or pump that is off. */
  text: (atMs: number) => string | null
}

const POWER_COLUMNS: readonly PowerColumn[] = [
  ...['HX-1', 'HX-2', 'HX-3'].flatMap((tag): PowerColumn[] => [
    { tag: `${tag}-U`, unit: ' (V)', text: (atMs) => supplyOutput(tag, atMs)?.volts.toFixed(1) ?? null },
    { tag: `${tag}-I`, unit: ' (A)', text: (atMs) => supplyOutput(tag, atMs)?.amps.toFixed(0) ?? null },
  ]),
  ...(['W', 'E'] as const).map((side: Feeder) => ({
    tag: `EM-${side}`,
    unit: ' (kWh)',
    text: (atMs: number) => String(meterKwh(side, atMs)).padStart(6, '0'),
  })),
  ...SEGMENTS.map(({ tag, short }) => ({
    tag: `IP-${short}`,
    unit: ' (A)',
    text: (atMs: number) => {
      const amps = ionPumpA(tag, atMs)
      return amps === null ? null : print(amps)
    },
  })),
  ...POSITIONS.filter(({ kind }) => kind === 'bay-fan').map(({ tag, chainageM }) => ({
    tag,
    unit: '',
    text: (atMs: number) => (fanIsOn(chainageM ?? 0, siteHour(atMs), atMs) ? 'on' : 'off'),
  })),
]

/** A file of the power logger. */
export function powerFile(fileName: string, rows: readonly number[], endsMs: number): LoggerFile {
  const lines = [['time', ...POWER_COLUMNS.map(({ tag, unit }) => `${tag}${unit}`)].join(',')]
  const readings: FileReading[] = []
  for (const atMs of rows) {
    const lineNo = lines.length + 1
    const cells = POWER_COLUMNS.map(({ tag, text }) => {
      const said = text(atMs)
      const value = said === 'on' ? 1 : said === 'off' ? 0 : Number(said)
      readings.push(
        said === null ? reading(tag, atMs, lineNo, null, 'off') : reading(tag, atMs, lineNo, value),
      )
      return said ?? 'OFF'
    })
    lines.push([isoWithOffset(atMs), ...cells].join(','))
  }
  const bytes = Buffer.from(lines.map((line) => `${line}\n`).join(''), 'latin1')
  return { source: 'NL-P', fileName, endsMs, bytes, lineCount: lines.length, readings }
}

/** The residual-gas logger lost its clock in this night and began at the turn of the century. */
const LOST_CLOCK_NIGHT = '2026-11-02'
/** What was answered when the file without a clock came in: its first second, on the clock of the site. */
export const LOST_CLOCK_ANSWER = { night: LOST_CLOCK_NIGHT, start: `${LOST_CLOCK_NIGHT} 06:00` } as const

/** A file of the residual-gas logger: seconds since a start that stands in a note. */
function residualGasFile(night: string): LoggerFile {
  const { fromMs, toMs } = spanOfNight(night)
  const begins = `${siteDay(fromMs)} 06:00:00`
  const lost = night === LOST_CLOCK_NIGHT
  const start = lost ? '2000-01-01 00:00:00' : begins
  // Times that hang on somebody's answer are marked as such.
  const marks = lost ? MARKS['time-reconstructed'] : 0
  const lines = [
    '# RG-A at the cross of SG-06   Unit: A',
    `# Start: ${start}`,
    ['elapsed_s', ...MASSES].join(','),
  ]
  const readings: FileReading[] = []
  for (const atMs of everyStep(fromMs, toMs, TEN_MINUTES_MS)) {
    const lineNo = lines.length + 1
    const cells = MASSES.map((mass) => {
      const text = print(ionCurrentA(mass, atMs))
      const channel = `RG-A-${String(mass).padStart(2, '0')}`
      readings.push({ ...reading(channel, atMs, lineNo, Number(text)), marks })
      return text
    })
    lines.push([(atMs - fromMs) / 1000, ...cells].join(','))
  }
  const bytes = Buffer.from(lines.map((line) => `${line}\r\n`).join(''), 'latin1')
  return {
    source: 'NL-R',
    fileName: `NL-R_${night}.csv`,
    endsMs: toMs,
    bytes,
    lineCount: lines.length,
    readings,
  }
}

/** RG-A has stood at SG-06 since this night. */
export const RESIDUAL_GAS_SINCE = '2026-10-12'
/** In this night the residual-gas logger delivered nothing. */
export const RESIDUAL_GAS_MISSING = '2026-11-08'

/** The file of one of these loggers for the night that began on a day; null where it delivered none. */
export function otherNightFile(
  source: Exclude<LoggerCode, 'NL-W' | 'NL-E'>,
  night: string,
): LoggerFile | null {
  const { fromMs, toMs } = spanOfNight(night)
  const fileName = `${source}_${night}.csv`
  if (source === 'NL-T') return temperatureFile(fileName, everyStep(fromMs, toMs, FIVE_MINUTES_MS), toMs)
  if (source === 'NL-P') return powerFile(fileName, everyStep(fromMs, toMs, FIVE_MINUTES_MS), toMs)
  const delivered =
    night >= RESIDUAL_GAS_SINCE && night !== RESIDUAL_GAS_MISSING && fromMs < at('2026-11-09').getTime()
  return delivered ? residualGasFile(night) : null
}
