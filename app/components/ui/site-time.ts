/**
 * Instants in words, in the site's own zone. Months are words, because 3/4 means two dates. Written out by hand rather
 * than by the browser's locale, so that server and browser cannot differ by a comma.
 */
import { TZDate, tzOffset } from '@date-fns/tz'
import { offsetText } from '#app/domain/schemas/instant.ts'

const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec']
const DAYS = ['Sun', 'Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat']
const MINUTE_MS = 60_000
const HOUR_MS = 3_600_000
const DAY_MS = 86_400_000

function two(value: number): string {
  return String(value).padStart(2, '0')
}

/** Date alone, such as `9 Nov 2026`. */
export function dayText(at: Date, zone: string): string {
  const local = new TZDate(at.getTime(), zone)
  return `${local.getDate()} ${MONTHS[local.getMonth()]} ${local.getFullYear()}`
}

/** Day and month alone, such as `9 Nov`, where the year is plain from what stands around it. */
export function shortDayText(at: Date, zone: string): string {
  const local = new TZDate(at.getTime(), zone)
  return `${local.getDate()} ${MONTHS[local.getMonth()]}`
}

/** Time of day alone, such as `08:00`; with seconds where the instant has any and they are asked for. */
export function timeText(at: Date, zone: string, seconds = false): string {
  const local = new TZDate(at.getTime(), zone)
  const minutes = `${two(local.getHours())}:${two(local.getMinutes())}`
  return seconds ? `${minutes}:${two(local.getSeconds())}` : minutes
}

/** Date and time, such as `9 Nov 2026, 08:00`. */
export function siteTimeText(at: Date, zone: string, seconds = false): string {
  return `${dayText(at, zone)}, ${timeText(at, zone, seconds)}`
}

/** Day of the week, date and time, such as `Mon 9 Nov 2026, 08:00`. */
export function longTimeText(at: Date, zone: string): string {
  return `${DAYS[new TZDate(at.getTime(), zone).getDay()]} ${siteTimeText(at, zone)}`
}

/** The zone's offset at an instant, such as `UTC+01:00`. */
export function offsetLabel(at: Date, zone: string): string {
  return `UTC${offsetText(tzOffset(zone, at))}`
}

/** An instant as a date-time field takes it, in site time to the minute: `2026-11-09T08:00`. */
export function fieldTime(at: Date, zone: string): string {
  const local = new TZDate(at.getTime(), zone)
  return `${local.getFullYear()}-${two(local.getMonth() + 1)}-${two(local.getDate())}T${timeText(at, zone)}`
}

/** An instant as a person types it, year first so that no month is taken for a day: `2026-11-09 08:00`. */
export function typedTime(at: Date, zone: string): string {
  return fieldTime(at, zone).replace('T', ' ')
}

/** A length of time to the size that matters: `4 min`, `9 h 50 min`, `66 h`, `12 d`. Negative lengths count as their size. */
export function spanText(ms: number): string {
  const size = Math.abs(ms)
  const minutes = Math.floor(size / MINUTE_MS)
  if (minutes < 1) return 'under a minute'
  if (size < HOUR_MS) return `${minutes} min`
  if (size < 12 * HOUR_MS && minutes % 60 !== 0) return `${Math.floor(minutes / 60)} h ${minutes % 60} min`
  if (size < 4 * DAY_MS) return `${Math.floor(size / HOUR_MS)} h`
  return `${Math.floor(size / DAY_MS)} d`
}

/** How long ago, or how far ahead, counted from `now`. */
export function ageText(at: Date, now: Date): string {
  const ms = now.getTime() - at.getTime()
  if (Math.abs(ms) < MINUTE_MS) return 'just now'
  return ms > 0 ? `${spanText(ms)} ago` : `in ${spanText(ms)}`
}
