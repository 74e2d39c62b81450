/**
 * Which night file a source owes. A night runs from 06:00 to 06:00 site time and its file is due at the source's hour
 * on the morning it ends.
 */
import { TZDate } from '@date-fns/tz'

const NIGHT_ENDS_HOUR = 6
/** The last row of a night may stand this far before 06:00 and still be the whole night. */
const TOLERANCE_MS = 30 * 60_000

export interface NightFileStatus {
  code: string
  /** Name of the day on which the night began, YYYY-MM-DD. */
  night: string
  /** When the night was over: nothing that came before is its file. */
  endsAt: Date
  /** When the file is due. */
  dueAt: Date
  state: 'taken-in' | 'expected' | 'missing'
}

/**
 * State of a source's newest night at `now`.
 *
 * @param dueAt site time of day, HH:MM
 * @param endAt last instant of the source's newest accepted file
 */
export function expectedNight(input: {
  code: string
  dueAt: string
  endAt: Date | null
  now: Date
  zone: string
}): NightFileStatus {
  const local = new TZDate(input.now.getTime(), input.zone)
  const [hour = 7, minute = 0] = input.dueAt.split(':').map(Number)
  const endOfNight = atSiteTime(local, input.zone, NIGHT_ENDS_HOUR, 0)
  // Before 06:00 the newest finished night is the one that ended yesterday.
  if (input.now < endOfNight) endOfNight.setDate(endOfNight.getDate() - 1)
  const due = atSiteTime(endOfNight, input.zone, hour, minute)
  const began = new TZDate(endOfNight.getTime(), input.zone)
  began.setDate(began.getDate() - 1)
  const night = `${began.getFullYear()}-${String(began.getMonth() + 1).padStart(2, '0')}-${String(began.getDate()).padStart(2, '0')}`
  const complete = input.endAt !== null && input.endAt.getTime() >= endOfNight.getTime() - TOLERANCE_MS
  return {
    code: input.code,
    night,
    endsAt: new Date(endOfNight.getTime()),
    dueAt: new Date(due.getTime()),
    state: complete ? 'taken-in' : input.now < due ? 'expected' : 'missing',
  }
}

function atSiteTime(day: TZDate, zone: string, hour: number, minute: number): TZDate {
  return new TZDate(day.getFullYear(), day.getMonth(), day.getDate(), hour, minute, 0, zone)
}
