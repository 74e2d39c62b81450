/** Pieces of sentences that the conflict rules share, and the question of whether two times meet. */
import { instantText } from '../instant-text.ts'
import { PLANNED_WORK_LABELS } from '../permit-words.ts'
import type { Stretch } from '../tunnel-stretch.ts'
import type { ConflictFacts, Place, WorkFact } from './facts.ts'

/** Length of the day, and of day and time, in an instant as it is written in a sentence. */
const DAY_LENGTH = '2026-11-16'.length
const OFFSET_AT = '2026-11-16 06:00'.length

/** A time from one instant up to another, the end not counted. */
export interface Span {
  from: Date
  to: Date
}

/** Whether two spans share an instant; the end of one may be the beginning of the other. */
export function meet(a: Span, b: Span): boolean {
  return a.from < b.to && b.from < a.to
}

/** What is left of the permit's window; null without a window, or when it is over. */
export function ahead({ now, own }: Pick<ConflictFacts, 'now' | 'own'>): Span | null {
  if (own.from === null || own.to === null) return null
  const from = own.from > now ? own.from : now
  return from < own.to ? { from, to: own.to } : null
}

/** The time for which a piece of work has to be reckoned with. Work that has begun goes on until it is finished. */
export function workSpan(work: WorkFact, now: Date): Span {
  const overrun = work.state === 'started' && work.to <= now
  return { from: work.from, to: overrun ? new Date(now.getTime() + 1) : work.to }
}

/** A length in metres without trailing zeros, such as 750 or 12.5. */
export function metres(value: number): string {
  return `${Math.round(value * 10) / 10}`
}

/** Such as `750 to 760 m`. */
export function stretchText({ fromM, toM }: Pick<Stretch, 'fromM' | 'toM'>): string {
  return fromM === toM ? `at ${metres(fromM)} m` : `${metres(fromM)} to ${metres(toM)} m`
}

/**
 * Such as `2026-11-16 06:00 to 2026-11-25 18:00 (UTC+01:00)`; the day once where it is one day, the offset at both ends
 * where the clock changes in between.
 */
export function spanText({ from, to }: Span, zone: string): string {
  const [first, last] = [instantText(from, zone), instantText(to, zone)]
  if (first.slice(OFFSET_AT) !== last.slice(OFFSET_AT)) return `${first} to ${last}`
  const sameDay = first.slice(0, DAY_LENGTH) === last.slice(0, DAY_LENGTH)
  return `${first.slice(0, OFFSET_AT)} to ${sameDay ? last.slice(DAY_LENGTH + 1) : last}`
}

/** Tags in a row: `SG-11`, `SG-11 and SG-12`. */
export function tagsText(places: readonly Pick<Place, 'tag'>[]): string {
  const tags = places.map(({ tag }) => tag)
  return tags.length < 2 ? (tags[0] ?? 'no segment') : `${tags.slice(0, -1).join(', ')} and ${tags.at(-1)}`
}

/** A piece of work by kind, title and number, where it is and when. */
export function workText(work: WorkFact, zone: string): string {
  const where =
    work.stretch === null ? 'the site as a whole' : `${work.stretch.line}, ${stretchText(work.stretch)}`
  return `${PLANNED_WORK_LABELS[work.kind]} “${work.title}” (work ${work.id}: ${where}; ${spanText(work, zone)})`
}
