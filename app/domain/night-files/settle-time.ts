import { isZone, type SourceProfile, type TimeFormat } from '../schemas/source-profile.ts'
import type { HeaderColumn } from './header.ts'
import { isComment, readNote } from './line-kinds.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { sniffTime, type TimeSample } from './sniff-time.ts'
import { notedStart, type StartTime, settleStart } from './start-time.ts'
import { isTimeOfDay, TimeReader } from './time-text.ts'
import type { ReadContext, Refusal } from './types.ts'
import { wallText, ZoneClock } from './zones.ts'

/** What the head of a file shows about its times. */
export interface TimeSettlement {
  format: TimeFormat | null
  /** Zone of times that carry no offset; null while a person has to say it. */
  zone: ZoneClock | null
  /** Only in files that count seconds; null there while the start is open. */
  start: StartTime | null
  /** Commonest step between rows, or the profile's. */
  periodMs: number | null
  /** How the start is written; only in files that count seconds. */
  startFormat: TimeFormat | null
  /** Rows share their times because the times are cut to the minute or second: only their order tells them apart. */
  coarse: boolean
  refusal: Refusal | null
}

export interface TimeHead {
  lines: readonly { text: string; line: number }[]
  columns: readonly HeaderColumn[]
  rows: readonly { fields: string[]; line: number }[]
  headerLine: number
  separator: string
  decimalMark: '.' | ','
  layout: 'wide' | 'long'
}

/** Names of columns that count seconds since the start of the file. */
const ELAPSED = /^(?:elapsed(?:[\s_]*(?:time|seconds?|secs?|s))?|seconds?|secs?|sekunden|t_s|time_s)$/i

/** Settles how times are written, on which clock, and from which start; asks where the head leaves it open. */
export function settleTime(
  head: TimeHead,
  profile: SourceProfile,
  context: ReadContext,
  questions: QuestionList,
): TimeSettlement {
  const samples = timeSamples(head)
  const timeAt = head.columns.findIndex(({ role }) => role === 'time')
  if (countsSeconds(head, samples, profile, timeAt))
    return settleElapsed(head, samples, profile, context, questions)
  const sniffed = settleFormat(samples, profile, head.decimalMark, questions)
  if (sniffed.refusal !== null) return { ...nothing, refusal: { ...sniffed.refusal, column: timeAt + 1 } }
  const { format } = sniffed
  return {
    format,
    zone: settleZone(head, samples, format, profile, context, questions),
    start: null,
    startFormat: null,
    periodMs: settlePeriod(samples, format, profile),
    coarse: isCoarse(head, samples),
    refusal: null,
  }
}

const nothing: TimeSettlement = {
  format: null,
  zone: null,
  start: null,
  periodMs: null,
  startFormat: null,
  coarse: false,
  refusal: null,
}

/** Times of the rows as one text each: a date of its own, or of a row before, stands in front. */
function timeSamples({ columns, rows, lines }: TimeHead): TimeSample[] {
  const timeAt = columns.findIndex(({ role }) => role === 'time')
  const dateAt = columns.findIndex(({ role }) => role === 'date')
  let date = ''
  for (const { text } of lines) date ||= readNote(text).date ?? ''
  return rows.map(({ fields, line }) => {
    const text = (fields[timeAt] ?? '').trim()
    if (dateAt !== -1) {
      date = (fields[dateAt] ?? '').trim() || date
      return { text: `${date} ${text}`.trim(), line }
    }
    if (isTimeOfDay(text)) return { text: date === '' ? text : `${date} ${text}`, line }
    date = /^(\S+(?:[./-]\S+)?)[T ]\d{1,2}:\d{2}/.exec(text)?.[1] ?? date
    return { text, line }
  })
}

/** Share of rows from which on rows under one time are the rule and no accident. */
const COARSE_SHARE = 0.2

/** Whether different rows of one track often stand under the same time. */
function isCoarse({ rows, columns, layout }: TimeHead, samples: readonly TimeSample[]): boolean {
  const channelAt = layout === 'long' ? columns.findIndex(({ role }) => role === 'channel') : -1
  const last = new Map<string, { time: string; row: string }>()
  let repeats = 0
  rows.forEach(({ fields }, i) => {
    const track = fields[channelAt] ?? ''
    const now = { time: samples[i]?.text ?? '', row: fields.join('\u0000') }
    const before = last.get(track)
    if (before?.time === now.time && before.row !== now.row) repeats += 1
    last.set(track, now)
  })
  return rows.length >= 5 && repeats > COARSE_SHARE * rows.length
}

function countsSeconds(
  { columns }: TimeHead,
  samples: readonly TimeSample[],
  profile: SourceProfile,
  timeAt: number,
): boolean {
  const { format } = profile.time
  if (format === 'elapsed-s') return true
  if (format !== null || !ELAPSED.test(columns[timeAt]?.name ?? '')) return false
  const reader = new TimeReader('elapsed-s')
  return samples.filter(({ text }) => reader.read(text)).length > 0.5 * samples.length
}

function settleElapsed(
  head: TimeHead,
  samples: readonly TimeSample[],
  profile: SourceProfile,
  context: ReadContext,
  questions: QuestionList,
): TimeSettlement {
  const noted = notedStart(head.lines, head.separator)
  const startProfile = {
    ...profile,
    time: { ...profile.time, format: profile.time.startFormat, dateMark: null },
  }
  const sniffed =
    noted === null ? { format: null } : settleFormat([noted], startProfile, head.decimalMark, questions)
  const zone = settleZone(
    head,
    noted === null ? [] : [noted],
    // Without a start of its own the file takes what a person types, on the clock of the source.
    sniffed.format ?? 'iso',
    profile,
    context,
    questions,
  )
  const start = settleStart(
    { noted, format: sniffed.format, zone, headerLine: head.headerLine, waiting: samples.length },
    context,
    questions,
  )
  return {
    format: 'elapsed-s',
    zone: start === null ? null : zone,
    start,
    startFormat: sniffed.format,
    periodMs: settlePeriod(samples, 'elapsed-s', profile),
    coarse: false,
    refusal: null,
  }
}

/** Format of these times, asking for the order of the date when it is open. */
function settleFormat(
  samples: readonly TimeSample[],
  profile: SourceProfile,
  decimalMark: '.' | ',',
  questions: QuestionList,
): { format: TimeFormat | null; refusal: Refusal | null } {
  const found = sniffTime(samples, profile, decimalMark)
  const asked = found.question
  if (found.refusal !== null || asked === null) return { format: found.format, refusal: found.refusal }
  const answer = questions.answer(asked.id)
  const answered = asked.choices.find(({ value }) => value === answer)
  if (answered !== undefined) return { format: answered.value as TimeFormat, refusal: null }
  questions.ask(asked.id, () => asked, samples.length)
  return { format: null, refusal: null }
}

/** Zone of times without an offset; UTC for epochs, a fixed stand-in when every time carries its own offset. */
function settleZone(
  { lines, separator }: TimeHead,
  samples: readonly TimeSample[],
  format: TimeFormat | null,
  profile: SourceProfile,
  context: ReadContext,
  questions: QuestionList,
): ZoneClock | null {
  if (format?.startsWith('epoch') === true) return new ZoneClock('UTC')
  const answer = questions.answer('clock-changes') ?? questions.answer('zone')
  if (answer !== null && answer !== '' && answer !== 'leave-out') return new ZoneClock(answer)
  if (profile.time.zone !== null) return new ZoneClock(profile.time.zone)
  if (format === null) return null
  const reader = new TimeReader(format)
  const bare = samples.find(({ text }) => reader.read(text) && Number.isNaN(reader.offset))
  if (samples.length > 0 && bare === undefined) return new ZoneClock('UTC')
  const example = bare !== undefined && reader.read(bare.text) ? { ...bare, wallMs: reader.wallMs } : null
  const noted = lines.find(({ text }) => isComment(text, separator) && readNote(text).zone !== null)
  const proposed = [noted === undefined ? null : readNote(noted.text).zone, context.siteZone, 'UTC']
  const zones = Array.from(new Set(proposed.filter((zone) => zone !== null && isZone(zone)))) as string[]
  questions.ask(
    'zone',
    () =>
      question({
        id: 'zone',
        kind: 'zone',
        line: example?.line ?? null,
        text: 'The times carry no offset and the profile of this source names no zone. On which clock did the logger run?',
        found: example === null ? 'seconds from a start that somebody has to say' : `“${example.text}”`,
        expected: 'a zone in the profile of the source, or times with an offset such as +01:00',
        mend: 'Choose the clock of the logger. Ask whoever set it up rather than guess.',
        choices: zones.map((zone) =>
          choice(
            zone,
            zone,
            example === null
              ? []
              : [
                  {
                    line: example.line,
                    text: example.text,
                    meaning: `${wallText(new ZoneClock(zone).instants(example.wallMs)[0] ?? example.wallMs)} UTC`,
                  },
                ],
          ),
        ),
      }),
    samples.length,
  )
  return null
}

/** Commonest step between the times of the head, unless the profile gives the period. */
function settlePeriod(
  samples: readonly TimeSample[],
  format: TimeFormat | null,
  profile: SourceProfile,
): number | null {
  if (profile.expectedPeriodSeconds !== null) return profile.expectedPeriodSeconds * 1000
  if (format === null) return null
  const reader = new TimeReader(format)
  const steps = new Map<number, number>()
  let before = Number.NaN
  for (const { text } of samples) {
    if (!reader.read(text)) continue
    const step = reader.wallMs - before
    if (step > 0) steps.set(step, (steps.get(step) ?? 0) + 1)
    before = reader.wallMs
  }
  let commonest: number | null = null
  for (const [step, count] of steps)
    if (commonest === null || count > (steps.get(commonest) ?? 0)) commonest = step
  return commonest
}
