/** The site's clock as the loggers print it. The offset changes on the hour at most, so it is looked up once an hour. */
import { TZDate } from '@date-fns/tz'
import { DEMO_ZONE } from '../demo-time.ts'

const HOUR_MS = 3_600_000
const MINUTE_MS = 60_000
const OFFSETS = new Map<number, number>()

function offsetMinutes(atMs: number): number {
  const hour = Math.floor(atMs / HOUR_MS)
  const known = OFFSETS.get(hour)
  if (known !== undefined) return known
  const offset = -new TZDate(hour * HOUR_MS, DEMO_ZONE).getTimezoneOffset()
  OFFSETS.set(hour, offset)
  return offset
}

/** "2026-11-06T14:00:00" by the site's clock. */
function wallText(atMs: number): string {
  return new Date(atMs + offsetMinutes(atMs) * MINUTE_MS).toISOString().slice(0, 19)
}

/** "06.11.2026 14:00:00". */
export function siteTime(atMs: number): string {
  const [date, time] = wallText(atMs).split('T') as [string, string]
  return `${date.slice(8)}.${date.slice(5, 7)}.${date.slice(0, 4)} ${time}`
}

/** "2026-11-06". */
export function siteDay(atMs: number): string {
  return wallText(atMs).slice(0, 10)
}

/** "2026-11-06T14:00:00+01:00". */
export function isoWithOffset(atMs: number): string {
  const offset = offsetMinutes(atMs)
  return `${wallText(atMs)}+${String(Math.floor(offset / 60)).padStart(2, '0')}:${String(offset % 60).padStart(2, '0')}`
}

/** Hour of the day, 0 to 23. */
export function siteHour(atMs: number): number {
  return Number(wallText(atMs).slice(11, 13))
}

/** Day of the week, 0 for Sunday. */
export function siteWeekday(atMs: number): number {
  return new Date(atMs + offsetMinutes(atMs) * MINUTE_MS).getUTCDay()
}
