import type { Separator, SourceProfile, TimeFormat } from '../schemas/source-profile.ts'
import type { ChannelBook } from './channel-names.ts'
import { hasDecimalCommas, joinDecimalCommas } from './comma-pairs.ts'
import { refuseMarkup } from './content-kind.ts'
import { splitLoosely } from './fields.ts'
import { type HeaderColumn, isFurtherHeader, looksLikeHeader, readHeader } from './header.ts'
import { directiveSeparator, isComment, isFooter } from './line-kinds.ts'
import { columnsWithoutHeader } from './no-header.ts'
import { decimalEvidence } from './numbers.ts'
import { choice, type QuestionList, question } from './questions.ts'
import { settleTime } from './settle-time.ts'
import { type HeadLine, sniffSeparator } from './sniff-separator.ts'
import type { StartTime } from './start-time.ts'
import type { ReadContext, Refusal } from './types.ts'
import type { ZoneClock } from './zones.ts'

/** How the file is written, as far as its head shows it. */
export interface Dialect {
  separator: Separator
  decimalMark: '.' | ','
  /** Fields are cut at commas and numbers hold commas too: cells have to be joined. */
  joinsCommas: boolean
  layout: 'wide' | 'long'
  columns: HeaderColumn[]
  /** 0 when the file has none. */
  headerLine: number
  timeFormat: TimeFormat | null
  /** Zone of times that carry no offset; null while a person has to say it. */
  zone: ZoneClock | null
  /** Start of a file that counts seconds. */
  start: StartTime | null
  startFormat: TimeFormat | null
  /** Rows share their times: only their order tells them apart. */
  coarse: boolean
  /** Rows of the head, cut into fields. */
  rows: { fields: string[]; line: number }[]
  periodMs: number | null
}

const EXPECTED = 'a header line such as “Zeit;HC-01A;HC-01B” or “epoch_ms,channel,value,unit,status”'

function excerpt(text: string): string {
  const trimmed = text.trim()
  return trimmed.length > 60 ? `“${trimmed.slice(0, 60)}…”` : `“${trimmed}”`
}

/** Settles separator, header, decimal mark, times and zone from the head; asks or refuses where it cannot. */
export function settleDialect(
  head: readonly HeadLine[],
  profile: SourceProfile,
  context: ReadContext,
  book: ChannelBook,
  questions: QuestionList,
): Dialect | Refusal {
  const markup = refuseMarkup(head.map(({ text }) => text).join('\n'))
  if (markup !== null) return markup
  const first = head.find(({ text }) => text.trim() !== '') as HeadLine
  const notLog = (found: string, line: number): Refusal => ({
    code: 'not-a-log',
    line,
    column: 1,
    found,
    expected: EXPECTED,
    mend: 'Check that the right file was chosen, and send the file as the logger wrote it.',
  })
  const separation = sniffSeparator(head, profile)
  if (separation === null) return notLog(excerpt(first.text), first.line)
  const { separator } = separation
  const isPlain = ({ text }: HeadLine) =>
    text.trim() !== '' &&
    directiveSeparator(text) === null &&
    !isComment(text, separator) &&
    !text.includes('\u0000')
  const plain = head.filter(isPlain)
  const headerLine = plain.find(({ text }) => looksLikeHeader(splitLoosely(text, separator), book))
  const bare =
    headerLine === undefined ? columnsWithoutHeader(plain, separator, profile, book, questions) : null
  if (headerLine === undefined && bare === null) {
    const at = plain[0] ?? first
    return notLog(`${excerpt(at.text)} and no line with the names of the columns`, at.line)
  }
  const { layout, columns } =
    bare !== null || headerLine === undefined
      ? { layout: 'wide' as const, columns: bare ?? [] }
      : readHeader(splitLoosely(headerLine.text, separator), book, profile)
  const headerAt = headerLine?.line ?? 0
  const timeAt = columns.findIndex(({ role }) => role === 'time')
  if (timeAt === -1)
    return notLog(`no column for the time in ${excerpt((headerLine ?? first).text)}`, headerAt || first.line)
  const rows = plain
    .filter(({ line, text }) => line > headerAt && !isFooter(text))
    .map(({ line, text }) => ({ fields: splitLoosely(text, separator), line }))
    .filter(({ fields }) => fields.length > 1 && !isFurtherHeader(fields, book))
  if (rows.length === 0)
    return {
      code: 'header-only',
      line: headerAt,
      column: null,
      found: 'a header and no row under it',
      expected: 'at least one row of readings under the header',
      mend: 'The logger wrote nothing this night, or the file was cut. Fetch it again; this counts as no data received.',
    }
  const joinsCommas = separator === ',' && hasDecimalCommas(rows, columns.length)
  if (joinsCommas)
    for (const row of rows) {
      const joined = joinDecimalCommas(row.fields, columns.length)
      if (joined?.kind === 'one') row.fields = joined.fields
    }
  const decimalMark = settleDecimalMark(joinsCommas, rows, columns, layout, separator, profile, questions)
  const time = settleTime(
    {
      lines: head,
      columns,
      rows,
      headerLine: headerAt || (rows[0]?.line ?? 1),
      separator,
      decimalMark,
      layout,
    },
    profile,
    context,
    questions,
  )
  if (time.refusal !== null) return time.refusal
  return {
    separator,
    decimalMark,
    joinsCommas,
    layout,
    columns,
    headerLine: headerAt,
    timeFormat: time.format,
    zone: time.zone,
    start: time.start,
    startFormat: time.startFormat,
    coarse: time.coarse,
    rows,
    periodMs: time.periodMs,
  }
}

function settleDecimalMark(
  joinsCommas: boolean,
  rows: Dialect['rows'],
  columns: readonly HeaderColumn[],
  layout: 'wide' | 'long',
  separator: Separator,
  profile: SourceProfile,
  questions: QuestionList,
): '.' | ',' {
  // In a file cut at commas no unquoted number can hold one.
  if (separator === ',' && profile.decimalMark !== ',' && !joinsCommas) return '.'
  const value = layout === 'long' ? columns.findIndex(({ role }) => role === 'value') : -1
  const sure: Record<'.' | ',', number> = { '.': 0, ',': 0 }
  let doubtful: { text: string; line: number; column: number } | null = null
  for (const { fields, line } of rows)
    fields.forEach((field, i) => {
      const counts = layout === 'long' ? i === value : columns[i]?.role === 'channel'
      if (!counts) return
      const evidence = decimalEvidence(field)
      if (evidence.mark === null || evidence.mark === 'both') return
      if (evidence.sure) sure[evidence.mark] += 1
      else doubtful ??= { text: field.trim(), line, column: i + 1 }
    })
  const seen = sure['.'] === sure[','] ? null : sure['.'] > sure[','] ? '.' : ','
  if (seen !== null && (profile.decimalMark === null || profile.decimalMark === seen)) return seen
  if (seen === null && profile.decimalMark !== null) return profile.decimalMark
  if (seen === null && doubtful === null) return '.'
  const answer = questions.answer('decimal-mark')
  if (answer === '.' || answer === ',') return answer
  const found = doubtful as { text: string; line: number; column: number } | null
  questions.ask('decimal-mark', () =>
    question({
      id: 'decimal-mark',
      kind: 'decimal-mark',
      line: found?.line ?? rows[0]?.line ?? null,
      column: found?.column ?? null,
      text:
        seen === null
          ? 'The mark in the numbers may stand before the decimals or between thousands. Which is it?'
          : `The numbers use “${seen}” as decimal mark, the profile of this source says “${profile.decimalMark}”.`,
      found: found === null ? `numbers with “${seen}”` : `“${found.text}”`,
      expected: 'one decimal mark, the same as in the profile of the source',
      mend: 'Choose the mark that stands before the decimals.',
      choices: [
        choice(',', 'the comma stands before the decimals'),
        choice('.', 'the point stands before the decimals'),
      ],
    }),
  )
  return seen ?? '.'
}
