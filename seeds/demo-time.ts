/** Times of the demo. Everything in it is dated against the demo clock's start, never against the machine. */
import { TZDate } from '@date-fns/tz'

/** Zone of the invented site; chosen for its clock changes. */
export const DEMO_ZONE = 'Europe/Vienna'

/** Site date and time, "2026-11-06 14:00", as an instant. The second pass of a repeated hour cannot be said this way. */
export function at(text: string): Date {
  const match = /^(\d{4})-(\d{2})-(\d{2})(?: (\d{2}):(\d{2}))?$/.exec(text)
  if (match === null) throw new Error(`Found the demo time "${text}"; expected such as 2026-11-06 14:00`)
  const [year, month, day, hour, minute] = match.slice(1).map((part) => Number(part ?? 0))
  const local = new TZDate(
    year as number,
    (month as number) - 1,
    day as number,
    hour as number,
    minute as number,
    0,
    DEMO_ZONE,
  )
  return new Date(local.getTime())
}

/** Where the demo clock starts. */
export const DEMO_START = at('2026-11-09 08:00')

/** When the register was first filled in; what has always been so is dated from here. */
export const REGISTER_BEGAN = at('2025-09-01 08:00')
