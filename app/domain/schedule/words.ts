/** Hours of the window in words, by site time. */
import type { ScheduleProblem } from './problem.ts'
import { siteMoment } from './rosters.ts'

const HOUR_MS = 3_600_000
const MONTHS = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec']

type Window = Pick<ScheduleProblem, 'fromMs' | 'zone'>

/** Day alone, such as `12 Nov`. */
export function dayWords(window: Window, hour: number): string {
  const { date } = siteMoment(window.fromMs + hour * HOUR_MS, window.zone)
  return `${Number(date.slice(8, 10))} ${MONTHS[Number(date.slice(5, 7)) - 1]}`
}

function clockWords(window: Window, hour: number): string {
  const { minuteOfDay } = siteMoment(window.fromMs + hour * HOUR_MS, window.zone)
  const two = (value: number) => String(value).padStart(2, '0')
  return `${two(Math.floor(minuteOfDay / 60))}:${two(minuteOfDay % 60)}`
}

/** Day and time, such as `12 Nov 09:00`. */
export function hourWords(window: Window, hour: number): string {
  return `${dayWords(window, hour)} ${clockWords(window, hour)}`
}

/** A stretch of time, such as `12 Nov 09:00–15:00` or `12 Nov 22:00 to 13 Nov 06:00`. */
export function spanWords(window: Window, fromH: number, untilH: number): string {
  const from = hourWords(window, fromH)
  return dayWords(window, fromH) === dayWords(window, untilH)
    ? `${from}–${clockWords(window, untilH)}`
    : `${from} to ${hourWords(window, untilH)}`
}

/** Kilowatts without a fraction that nobody reads. */
export function kwWords(kw: number): string {
  return Number.isInteger(kw) || kw >= 100 ? kw.toFixed(0) : kw.toFixed(1)
}
