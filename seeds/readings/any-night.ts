/** The file of any logger for any night of the demo. */
import type { LoggerCode, LoggerFile } from './files.ts'
import { otherNightFile } from './logger-files.ts'
import { nightFile } from './night-file.ts'

export const LOGGER_CODES: readonly LoggerCode[] = ['NL-W', 'NL-E', 'NL-T', 'NL-P', 'NL-R']

/** First and last night that can be asked for, YYYY-MM-DD. */
export const FIRST_NIGHT = '2025-09-09'
export const LAST_NIGHT = '2026-11-08'

/** The file of a logger for the night that began on a day; null where the logger delivered none. */
export function anyNightFile(source: LoggerCode, night: string): LoggerFile | null {
  return source === 'NL-W' || source === 'NL-E' ? nightFile(source, night) : otherNightFile(source, night)
}
