/** Which instants the loggers of the demo wrote a row at, and into which file. */
import { TZDate } from '@date-fns/tz'
import { addDays, addMonths, format, startOfMonth } from 'date-fns'
import { at, DEMO_ZONE } from '../demo-time.ts'
import { BAKES } from '../scenario/bakes.ts'
import { LEAKS, POWER_DIP, VENTS } from '../scenario/events.ts'

const MINUTE_MS = 60_000
const HOUR_MS = 60 * MINUTE_MS
const DAY_MS = 24 * HOUR_MS

/** Whole nights are kept from here; what is older stands in monthly files thinned to a row an hour. */
const NIGHTS_SINCE = '2026-09-14'
const HISTORY_SINCE = '2025-09-09'
/** The pressure loggers wrote a row a minute in the nights from here on, and one every ten minutes before. */
const MINUTES_SINCE = '2026-10-26'

/** A night runs from 06:00 to 06:00 site time; its first row comes one step after, so no instant is in two files. */
export interface Span {
  fromMs: number
  toMs: number
}

/** Nights whose files were kept whole, oldest first; the last ends on the demo's morning. */
export function demoNights(): string[] {
  const nights: string[] = []
  let day = new TZDate(at(`${NIGHTS_SINCE} 12:00`).getTime(), DEMO_ZONE)
  while (format(day, 'yyyy-MM-dd') !== '2026-11-09') {
    nights.push(format(day, 'yyyy-MM-dd'))
    day = addDays(day, 1) as TZDate
  }
  return nights
}

/** Beginning and end of a night, by the calendar: the night of a clock change is an hour longer or shorter. */
export function spanOfNight(night: string): Span {
  const began = new TZDate(at(`${night} 06:00`).getTime(), DEMO_ZONE)
  return { fromMs: began.getTime(), toMs: addDays(began, 1).getTime() }
}

/** Instants of a pressure logger's rows in a night. */
export function pressureRows(night: string): number[] {
  const { fromMs, toMs } = spanOfNight(night)
  return everyStep(fromMs, toMs, pressurePeriodMs(night))
}

/** Time between the rows of a pressure logger in a night. */
export function pressurePeriodMs(night: string): number {
  return night >= MINUTES_SINCE ? MINUTE_MS : 10 * MINUTE_MS
}

/** Instants after `fromMs` up to `toMs`, a step apart. */
export function everyStep(fromMs: number, toMs: number, stepMs: number): number[] {
  return Array.from(
    { length: Math.floor((toMs - fromMs) / stepMs) },
    (_, index) => fromMs + (index + 1) * stepMs,
  )
}

/** Months (YYYY-MM) before the nights that are kept whole, with the stretch that each one's file covers. */
export function archiveMonths(firstNight = NIGHTS_SINCE): { month: string; span: Span }[] {
  const end = spanOfNight(firstNight).fromMs
  const months: { month: string; span: Span }[] = []
  let fromMs = spanOfNight(HISTORY_SINCE).fromMs
  while (fromMs < end) {
    const local = new TZDate(fromMs + DAY_MS, DEMO_ZONE)
    const next = addMonths(startOfMonth(local), 1)
    const toMs = Math.min(end, spanOfNight(format(next, 'yyyy-MM-dd')).fromMs)
    months.push({ month: format(local, 'yyyy-MM'), span: { fromMs, toMs } })
    fromMs = toMs
  }
  return months
}

/** Stretches in which more happened to a segment than an hour's row can show. */
function busyStretches(segment: string): Span[] {
  const span = (from: Date, to: Date, beforeH: number, afterH: number): Span => ({
    fromMs: from.getTime() - beforeH * HOUR_MS,
    toMs: to.getTime() + afterH * HOUR_MS,
  })
  return [
    ...BAKES.filter((one) => one.segment === segment).map(({ cartAt, inServiceAt }) =>
      span(cartAt, inServiceAt ?? at('2026-11-09'), 24, 0),
    ),
    ...LEAKS.filter((one) => one.segment === segment).flatMap(({ opensAt, mendedAt }) => [
      span(opensAt, opensAt, 6, 12),
      span(mendedAt, mendedAt, 3, 6),
    ]),
    ...VENTS.filter((one) => one.segment === segment).flatMap(({ ventedAt, pumpingAt }) => [
      span(ventedAt, ventedAt, 3, 1),
      ...(pumpingAt === null ? [] : [span(pumpingAt, pumpingAt, 1, 72)]),
    ]),
    span(POWER_DIP.at, POWER_DIP.gaugesBackAt, 3, 24),
    // The hour that the clocks repeat.
    span(at('2025-10-26 00:00'), at('2025-10-26 05:00'), 0, 0),
  ]
}

/** Whether a monthly file has a row for a segment at a ten-minute instant: on the hour, and in busy stretches. */
export function keptInArchive(segments: readonly string[]): (atMs: number) => boolean {
  const busy = segments.flatMap(busyStretches)
  return (atMs) => atMs % HOUR_MS === 0 || busy.some(({ fromMs, toMs }) => atMs >= fromMs && atMs <= toMs)
}
