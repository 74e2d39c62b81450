/** K11, second part: nights of a clock change, holidays, and hours that no crew covers. */
import { tzOffset } from '@date-fns/tz'
import { instantText } from '../instant-text.ts'
import { crewAt, siteMoment } from '../schedule/rosters.ts'
import { offsetText } from '../schemas/instant.ts'
import type { ConflictFacts, Finding } from './facts.ts'
import { ahead, type Span } from './words.ts'

const HOUR_MS = 3_600_000

/** K11: what the calendar has in store for the window. */
export function calendarEvents(facts: ConflictFacts): Finding[] {
  const left = ahead(facts)
  if (left === null) return []
  return [...clockChanges(facts, left), ...holidays(facts, left), ...nobodyThere(facts, left)]
}

/** Instants on whole hours within a span. */
function hoursOf({ from, to }: Span): number[] {
  const first = Math.ceil(from.getTime() / HOUR_MS)
  const last = Math.ceil(to.getTime() / HOUR_MS)
  return Array.from({ length: Math.max(0, last - first) }, (_, index) => (first + index) * HOUR_MS)
}

/** Clocks of sites are changed on whole hours. */
function clockChanges({ zone }: ConflictFacts, left: Span): Finding[] {
  return hoursOf(left).flatMap((ms) => {
    const before = tzOffset(zone, new Date(ms - 1))
    const after = tzOffset(zone, new Date(ms))
    if (before === after || ms <= left.from.getTime()) return []
    const day = siteMoment(ms, zone).date
    const how = after < before ? 'put back, so an hour comes twice' : 'put forward, so an hour is left out'
    return [
      warning(
        `K11:clock:${day}`,
        `In the night to ${day} the clock is ${how}: UTC${offsetText(before)} becomes UTC${offsetText(after)} at ${instantText(new Date(ms), zone)}. Validity counts hours that pass, not the face of the clock.`,
        'Write times of that night with their offset, and tell both shifts when each validity ends.',
      ),
    ]
  })
}

function warning(key: string, text: string, wayOut: string): Finding {
  return { key, rule: 'K11', effect: 'warning', text, wayOut, place: null }
}

function holidays({ zone, holidays: known }: ConflictFacts, left: Span): Finding[] {
  const first = siteMoment(left.from.getTime(), zone).date
  const last = siteMoment(left.to.getTime() - 1, zone).date
  return known
    .filter(({ day }) => day >= first && day <= last)
    .map(({ day, name }) =>
      warning(
        `K11:holiday:${day}`,
        `${day} is a holiday (${name}): no crew works, and the rosters have nobody on call.`,
        'Agree who is on call that day, or keep heating out of it.',
      ),
    )
}

/** Hours in which no crew is at work or on call by its roster; holidays are said by themselves. */
function nobodyThere({ zone, crews, holidays: known }: ConflictFacts, left: Span): Finding[] {
  if (crews.length === 0) return []
  const free = new Set(known.map(({ day }) => day))
  const alone = hoursOf(left).filter((ms) => {
    const moment = siteMoment(ms, zone)
    if (free.has(moment.date)) return false
    return !crews.some(
      ({ roster, endsMs }) => (endsMs === null || endsMs > ms) && crewAt(roster, moment) !== null,
    )
  })
  const [first] = alone
  if (first === undefined) return []
  return [
    warning(
      'K11:on-call',
      `For ${alone.length === 1 ? 'one hour' : `${alone.length} hours`} of the window no crew is at work or on call by its roster, first at ${instantText(new Date(first), zone)}.`,
      'Agree who is on call then, and enter it in the rosters.',
    ),
  ]
}
