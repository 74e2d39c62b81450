/** A file of a logger, as bytes and as the readings that stand in it. */
import type { Quality } from '../../app/domain/readings.ts'
import type { SourceCode } from '../register/positions.ts'

/** Loggers that owe a file every night. */
export type LoggerCode = Exclude<SourceCode, 'HAND' | 'REC'>
/** All that write files: the loggers, and the recorder that is set up for a test. */
export type FileSource = Exclude<SourceCode, 'HAND'>

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
  source: FileSource
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
