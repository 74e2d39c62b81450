import type { TimeFormat } from '../schemas/source-profile.ts'
import { EARLIEST_MS } from './limits.ts'
import { isComment, readNote } from './line-kinds.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { TimeReader } from './time-text.ts'
import type { Choice, Question, ReadContext } from './types.ts'
import { offsetAt, wallText, type ZoneClock } from './zones.ts'

/** Instant from which a file counts its seconds, and whether the file says so itself or a person did. */
export interface StartTime {
  atMs: number
  /** A person gave it, since the file's own start is missing or impossible. */
  reconstructed: boolean
}

/** The first start named in the lines of metadata. */
export function notedStart(
  head: readonly { text: string; line: number }[],
  separator: string,
): { text: string; line: number } | null {
  for (const { text, line } of head) {
    if (!isComment(text, separator)) continue
    const { start } = readNote(text)
    if (start !== null) return { text: start, line }
  }
  return null
}

/** Instant of a start text; NaN when it cannot be read in this format. An hour that comes twice counts as its first. */
export function startInstant(text: string, format: TimeFormat, zone: ZoneClock): number {
  const reader = new TimeReader(format)
  if (!reader.read(text)) return Number.NaN
  if (!Number.isNaN(reader.offset)) return reader.wallMs - reader.offset * 60_000
  return zone.instants(reader.wallMs)[0] ?? Number.NaN
}

/**
 * Instant of an answer that names a time: an instant such as `2026-11-02T05:00:00Z`, or the clock of the source as
 * `2026-11-02 06:00` or `2026-11-02T06:00`. NaN for anything else.
 */
export function answeredInstant(text: string, zone: ZoneClock): number {
  if (!/^\d{4}-/.test(text.trim())) return Number.NaN
  return startInstant(text.trim(), 'iso', zone)
}

/** An instant as a choice: the value is exact, the label shows the clock of the source. */
export function instantChoice(atMs: number, zone: ZoneClock, why: string): Choice {
  const value = new Date(atMs).toISOString()
  const wall = wallText(atMs + offsetAt(zone.zone, atMs) * 60_000)
  return choice(value, `${wall}: ${why}`)
}

/** Instants that somebody may mean by the first row of a file without a clock: proposals only, never applied. */
export function startProposals(context: ReadContext, zone: ZoneClock): Choice[] {
  const proposals: Choice[] = []
  const named = /(\d{4})-?(\d{2})-?(\d{2})[T_ -]?(\d{2})[-:.h]?(\d{2})(?:[-:.m]?(\d{2}))?(?!\d)/.exec(
    context.fileName ?? '',
  )
  if (named !== null) {
    const [, year, month, day, hour, minute, second = '00'] = named
    const atMs = answeredInstant(`${year}-${month}-${day} ${hour}:${minute}:${second}`, zone)
    if (atMs >= EARLIEST_MS) proposals.push(instantChoice(atMs, zone, 'the time in the name of the file'))
  }
  const before = context.previousEndMs ?? null
  if (before !== null)
    proposals.push(instantChoice(before, zone, 'where the file taken in before this one ends'))
  return proposals
}

export interface StartFacts {
  noted: { text: string; line: number } | null
  format: TimeFormat | null
  zone: ZoneClock | null
  headerLine: number
  waiting: number
}

/**
 * Start of a file whose rows count seconds. One that is missing, cannot be read, or lies in the years a logger falls
 * back to becomes a question: without it no row has a time. Null while that is open.
 */
export function settleStart(
  facts: StartFacts,
  context: ReadContext,
  questions: QuestionList,
): StartTime | null {
  const { noted, format, zone } = facts
  if (zone === null) return null
  const answer = questions.answer('start')
  const answered = answer === null ? Number.NaN : answeredInstant(answer, zone)
  const given = noted === null || format === null ? Number.NaN : startInstant(noted.text, format, zone)
  if (given >= EARLIEST_MS && given <= context.nowMs) return { atMs: given, reconstructed: false }
  if (answered >= EARLIEST_MS) return { atMs: answered, reconstructed: true }
  questions.ask('start', () => startQuestion(facts, given, context, zone), facts.waiting)
  return null
}

function startQuestion(
  { noted, headerLine }: StartFacts,
  given: number,
  context: ReadContext,
  zone: ZoneClock,
): Question {
  const text =
    noted === null
      ? 'The rows count seconds, and nothing in the file says from when. When did it start?'
      : Number.isNaN(given)
        ? 'The rows count seconds from a start that cannot be read. When did the file start?'
        : `The rows count seconds from a start that the clock of the logger cannot have shown. When did the file start?`
  return question({
    id: 'start',
    kind: 'start',
    line: noted?.line ?? headerLine,
    text,
    found: noted === null ? 'no line such as “# Start: 2026-11-08 06:00:00”' : `“${noted.text}”`,
    expected: 'a start after the year 2010 and before the file came in',
    mend: 'Choose or give the time of the first second, from the logbook or a neighbouring file. Readings are marked as reconstructed in time.',
    choices: startProposals(context, zone),
    typed: 'time',
  })
}
