/** What the window allows at each of its hours, computed once for a problem. */
import type { ScheduleProblem } from './problem.ts'
import { crewAt, onChangeDay, siteMoment } from './rosters.ts'

const HOUR_MS = 3_600_000
const DAY_MS = 86_400_000

/** Quarters of an hour, because crews begin and end at them. */
export const QUARTERS = 4
/** People that a start, a ramp end or a soak end needs together. */
const PAIR = 2

export interface Calendar {
  hours: number
  /** Cap of the site for each hour, kW, and whether it is the one of the day. */
  capKW: Float64Array
  byDay: Uint8Array
  /** Crews of two at work, and on call, for each quarter of an hour. */
  atWork: Uint8Array
  onCall: Uint8Array
  /** 1 on a holiday or the day before one: no first energising. */
  beforeHoliday: Uint8Array
  holiday: Uint8Array
  /** 1 on a day with a clock change. */
  changeDay: Uint8Array
  /** Quarters without any crew, summed up from the start: entry q counts those before q. */
  uncovered: Int32Array
}

const known = new WeakMap<ScheduleProblem, Calendar>()

/** The calendar of a problem; computed at the first question and kept with the problem. */
export function calendarOf(problem: ScheduleProblem): Calendar {
  const found = known.get(problem)
  if (found !== undefined) return found
  const made = buildCalendar(problem)
  known.set(problem, made)
  return made
}

function buildCalendar(problem: ScheduleProblem): Calendar {
  const { hours, rules, zone } = problem
  const quarters = hours * QUARTERS
  const calendar: Calendar = {
    hours,
    capKW: new Float64Array(hours),
    byDay: new Uint8Array(hours),
    atWork: new Uint8Array(quarters),
    onCall: new Uint8Array(quarters),
    beforeHoliday: new Uint8Array(hours),
    holiday: new Uint8Array(hours),
    changeDay: new Uint8Array(hours),
    uncovered: new Int32Array(quarters + 1),
  }
  const holidays = new Set(problem.holidays)
  const changes = new Map<string, boolean>()
  for (let hour = 0; hour < hours; hour += 1) {
    const ms = problem.fromMs + hour * HOUR_MS
    const at = siteMoment(ms, zone)
    const siteHour = at.minuteOfDay / 60
    const day = siteHour >= rules.dayFromHour && siteHour < rules.dayToHour
    calendar.byDay[hour] = day ? 1 : 0
    calendar.capKW[hour] = (day ? rules.dayKW : rules.nightKW) ?? 0
    const tomorrow = new Date((at.dayNumber + 1) * DAY_MS).toISOString().slice(0, 10)
    calendar.holiday[hour] = holidays.has(at.date) ? 1 : 0
    calendar.beforeHoliday[hour] = holidays.has(at.date) || holidays.has(tomorrow) ? 1 : 0
    let change = changes.get(at.date)
    if (change === undefined) {
      change = onChangeDay(ms, zone)
      changes.set(at.date, change)
    }
    calendar.changeDay[hour] = change ? 1 : 0
    countCrews(problem, calendar, hour, at)
  }
  for (let q = 0; q < quarters; q += 1) {
    const none = (calendar.atWork[q] ?? 0) + (calendar.onCall[q] ?? 0) === 0
    calendar.uncovered[q + 1] = (calendar.uncovered[q] ?? 0) + (none ? 1 : 0)
  }
  return calendar
}

function countCrews(
  problem: ScheduleProblem,
  calendar: Calendar,
  hour: number,
  at: ReturnType<typeof siteMoment>,
): void {
  if (calendar.holiday[hour] === 1) return
  const startMs = problem.fromMs + hour * HOUR_MS
  for (let quarter = 0; quarter < QUARTERS; quarter += 1) {
    const q = hour * QUARTERS + quarter
    const moment = { ...at, minuteOfDay: at.minuteOfDay + quarter * (60 / QUARTERS) }
    for (const crew of problem.crews) {
      if (crew.size < PAIR || (crew.endsMs !== null && crew.endsMs <= startMs)) continue
      const found = crewAt(crew.roster, moment)
      if (found === 'at work') calendar.atWork[q] = (calendar.atWork[q] ?? 0) + 1
      if (found === 'on call') calendar.onCall[q] = (calendar.onCall[q] ?? 0) + 1
    }
  }
}
