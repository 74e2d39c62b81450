import type { Separator, SourceProfile } from '../schemas/source-profile.ts'
import type { ChannelBook } from './channel-names.ts'
import { splitLoosely } from './fields.ts'
import { columnsInOrder, type HeaderColumn } from './header.ts'
import { choice, type QuestionList, question } from './questions.ts'
import type { HeadLine } from './sniff-separator.ts'
import { looksLikeTime } from './time-text.ts'

/** More columns than these are not asked about one by one. */
const MAX_ASKED = 40

/**
 * Columns of a file that has no header: by the order in the profile, else by what a person says about each of them.
 * Null when the lines hold no times, or there is nothing to choose from: then it is no log of this source.
 */
export function columnsWithoutHeader(
  lines: readonly HeadLine[],
  separator: Separator,
  profile: SourceProfile,
  book: ChannelBook,
  questions: QuestionList,
): HeaderColumn[] | null {
  if (profile.columnOrder !== null) return columnsInOrder(profile.columnOrder, profile)
  const rows = lines.map(({ text }) => splitLoosely(text, separator))
  const first = rows[0] ?? []
  const timeAt = first.findIndex((_, at) => {
    const times = rows.filter((fields) => isTime(fields[at] ?? ''))
    return times.length > 0.5 * rows.length
  })
  const names = book.names()
  if (timeAt === -1 || names.length === 0 || first.length > MAX_ASKED) return null
  const order = first.map((_, at) => {
    if (at === timeAt) return 'time'
    const id = `column:${at + 1}`
    const answer = questions.answer(id)
    if (answer === 'leave-out') return '-'
    if (answer !== null && book.isKnown(answer)) return answer
    const shown = rows.slice(0, 3).map((fields) => (fields[at] ?? '').trim())
    questions.ask(
      id,
      () =>
        question({
          id,
          kind: 'column',
          line: lines[0]?.line ?? null,
          column: at + 1,
          text: `The file names none of its columns. What is column ${at + 1}, with ${shown.map((cell) => `“${cell}”`).join(', ')}?`,
          found: shown.map((cell) => `“${cell}”`).join(', '),
          expected: 'a header line, or the order of the columns in the profile of the source',
          mend: 'Choose the channel by the values that its gauge showed last, or leave the column out.',
          choices: [choice('leave-out', 'leave it out'), ...names.map((name) => choice(name, name))],
        }),
      rows.length,
    )
    return '-'
  })
  return columnsInOrder(order, profile)
}

function isTime(text: string): boolean {
  return looksLikeTime(text) || /^(?:\d{10}|\d{13}|\d{16})$/.test(text.trim())
}
