/** When crews work and when they are on call, by site time. */
import { tzOffset } from '@date-fns/tz'
import { z } from 'zod'

const HOUR_MS = 3_600_000
const DAY_MS = 86_400_000
const clock = z.string().regex(/^([01]\d|2[0-3]):[0-5]\d$|^24:00$/, 'A time of day is HH:MM, such as 06:45.')

/** Hours worked by day of the week (0 is Sunday), and the weeks in which a crew is on call outside them. */
export const RosterSchema = z.object({
  worked: z.array(z.object({ days: z.array(z.int().min(0).max(6)), from: clock, to: clock })),
  /** A week on call begins on a Monday; null for a crew that is never on call. */
  onCall: z.object({ firstMonday: z.iso.date(), everyWeeks: z.int().min(1).max(52) }).nullable(),
})
export type Roster = z.infer<typeof RosterSchema>

/** An instant taken apart by site time. */
export interface SiteMoment {
  /** YYYY-MM-DD. */
  date: string
  /** 0 is Sunday. */
  weekday: number
  minuteOfDay: number
  /** Whole days since 1970 by the site's calendar. */
  dayNumber: number
}

/** Site date and time of day of an instant, milliseconds since 1970. */
export function siteMoment(ms: number, zone: string): SiteMoment {
  const wall = new Date(ms + tzOffset(zone, new Date(ms)) * 60_000)
  return {
    date: wall.toISOString().slice(0, 10),
    weekday: wall.getUTCDay(),
    minuteOfDay: wall.getUTCHours() * 60 + wall.getUTCMinutes(),
    dayNumber: Math.floor(wall.getTime() / DAY_MS),
  }
}

/** Whether a crew is at work, on call, or neither. Holidays are for the caller. */
export function crewAt(roster: Roster, at: SiteMoment): 'at work' | 'on call' | null {
  const working = roster.worked.some(
    ({ days, from, to }) =>
      days.includes(at.weekday) && at.minuteOfDay >= minutes(from) && at.minuteOfDay < minutes(to),
  )
  if (working) return 'at work'
  if (roster.onCall === null) return null
  const first = Math.floor(Date.parse(`${roster.onCall.firstMonday}T00:00:00Z`) / DAY_MS)
  const week = Math.floor((at.dayNumber - first) / 7)
  return week >= 0 && week % roster.onCall.everyWeeks === 0 ? 'on call' : null
}

function minutes(text: string): number {
  return Number(text.slice(0, 2)) * 60 + Number(text.slice(3, 5))
}

/** The instant so many working days (Monday to Friday, no holidays) after another, at the same site time of day. */
export function addWorkingDays(
  fromMs: number,
  days: number,
  zone: string,
  holidays: readonly string[],
): number {
  const start = siteMoment(fromMs, zone)
  let day = start.dayNumber
  for (let left = days; left > 0; ) {
    day += 1
    const noon = new Date(day * DAY_MS + DAY_MS / 2)
    const weekday = noon.getUTCDay()
    if (weekday !== 0 && weekday !== 6 && !holidays.includes(noon.toISOString().slice(0, 10))) left -= 1
  }
  const wall = day * DAY_MS + start.minuteOfDay * 60_000
  // The offset is that of the day arrived at; twice, because the first guess may lie on the other side of a change.
  const guess = wall - tzOffset(zone, new Date(wall)) * 60_000
  return wall - tzOffset(zone, new Date(guess)) * 60_000
}

/** Whether the site date of an instant has a clock change: it is not 24 hours long. */
export function onChangeDay(ms: number, zone: string): boolean {
  const { minuteOfDay } = siteMoment(ms, zone)
  // Midday before and after are on either side of a change, which comes by night.
  const noon = ms + (12 * 60 - minuteOfDay) * 60_000
  return tzOffset(zone, new Date(noon - 12 * HOUR_MS)) !== tzOffset(zone, new Date(noon + 11 * HOUR_MS))
}
