/** A file of a logger, as bytes and as the readings that stand in it. */
import { TZDate } from '@date-fns/tz'
import { format } from 'date-fns'
import type { Quality } from '../../app/domain/readings.ts'
import { DEMO_ZONE } from '../demo-time.ts'
import type { SourceCode } from '../register/positions.ts'

export type LoggerCode = Exclude<SourceCode, 'HAND'>

export interface FileReading {
  channel: string
  atMs: number
  seq: number
  /** In the unit of its quantity (Pa, °C, A …). */
  value: number | null
  bound: number | null
  quality: Quality
  marks: number
  lineNo: number
}

export interface LoggerFile {
  source: LoggerCode
  fileName: string
  /** End of what it covers. */
  endsMs: number
  bytes: Buffer
  lineCount: number
  readings: FileReading[]
}

/** A reading without a mark. */
export function reading(
  channel: string,
  atMs: number,
  lineNo: number,
  value: number | null,
  quality: Quality = 'good',
  bound: number | null = null,
): FileReading {
  return { channel, atMs, seq: 0, value, bound, quality, marks: 0, lineNo }
}

/** "2026-11-06T14:00:00+01:00". */
export function isoWithOffset(atMs: number): string {
  return format(new TZDate(atMs, DEMO_ZONE), "yyyy-MM-dd'T'HH:mm:ssxxx")
}
