import type { SourceProfile } from '../schemas/source-profile.ts'
import type { ChannelBook } from './channel-names.ts'
import type { HeaderColumn } from './header.ts'
import { choice, type QuestionList, question } from './questions.ts'
import type { ColumnStatistic, Question, StatisticKind } from './types.ts'

/** What a column of a stretch of time is called (common practice, no source). */
const WORDS: Record<string, StatisticKind> = {
  min: 'lowest',
  minimum: 'lowest',
  lowest: 'lowest',
  max: 'highest',
  maximum: 'highest',
  highest: 'highest',
  mean: 'mean',
  avg: 'mean',
  average: 'mean',
  mittel: 'mean',
  mittelwert: 'mean',
  moyenne: 'mean',
  logmean: 'log-mean',
  'log mean': 'log-mean',
  'log-mean': 'log-mean',
  'geometric mean': 'log-mean',
}
const WORD = Object.keys(WORDS)
  .sort((a, b) => b.length - a.length)
  .join('|')
const BEHIND = new RegExp(`^(.+?)[\\s_.:/-]*[([]?(${WORD})[)\\]]?\\.?$`, 'i')
const BEFORE = new RegExp(`^(${WORD})[\\s_.:(-]+(.+?)\\)?$`, 'i')

/** Words for a kind of column, for sentences and lists. */
const STATISTIC_WORDS: Record<StatisticKind, string> = {
  mean: 'mean',
  'log-mean': 'mean of the logarithms',
  lowest: 'lowest value',
  highest: 'highest value',
}

/** A header cell of which the last word names a statistic, cut before that word; null for others. */
export function statisticTail(text: string): { rest: string; word: string } | null {
  const match = BEHIND.exec(text)
  return match === null ? null : { rest: match[1] as string, word: match[2] as string }
}

/** The kind that a name consisting of nothing else stands for, as `min` in a file that names its channel in a row. */
export function bareStatistic(name: string): StatisticKind | null {
  return WORDS[name.trim().toLowerCase()] ?? null
}

/** The registered channel that a column is the lowest, highest or mean value of; null for a channel of its own. */
export function statisticOf(name: string, book: ChannelBook): ColumnStatistic | null {
  if (!book.closed || book.isKnown(name)) return null
  const behind = BEHIND.exec(name)
  const before = BEFORE.exec(name)
  for (const [base, word] of [
    [behind?.[1], behind?.[2]],
    [before?.[2], before?.[1]],
  ]) {
    const match = book.match(base ?? '')
    const kind = WORDS[word?.toLowerCase() ?? '']
    if (match.kind === 'known' && kind !== undefined) return { of: match.channel.name, kind }
  }
  return null
}

/** One column of a header with its statistic and the channel that it goes to without one. */
interface StatisticColumn {
  statistic: ColumnStatistic | null
  /** Name of the channel that the column is known to give, if any. */
  given: string | null
}

/** A channel of which a file holds statistics only: their kinds, and where they stand. */
export interface OpenReading {
  name: string
  kinds: StatisticKind[]
  at: number[]
}

/**
 * Which columns give the reading of a channel of which the file holds only statistics, by what a person or the
 * profile said. A channel that has a column under its own name keeps that one, and the others are its bounds.
 */
export function readingColumns(
  columns: readonly StatisticColumn[],
  wanted: string | null,
): { chosen: Set<number>; open: OpenReading[] } {
  const given = new Set(columns.map((column) => column.given))
  const groups = new Map<string, { kinds: StatisticKind[]; at: number[] }>()
  columns.forEach(({ statistic }, at) => {
    if (statistic === null || given.has(statistic.of)) return
    const group = groups.get(statistic.of) ?? { kinds: [], at: [] }
    group.kinds.push(statistic.kind)
    group.at.push(at)
    groups.set(statistic.of, group)
  })
  const chosen = new Set<number>()
  const open: OpenReading[] = []
  for (const [name, group] of groups) {
    if (wanted === 'leave-out') continue
    const fitting = group.at.filter((_, i) => group.kinds[i] === wanted)
    for (const at of fitting) chosen.add(at)
    if (fitting.length === 0) open.push({ name, ...group })
  }
  return { chosen, open }
}

/** Asks which column counts of a channel that the file gives only by statistics. */
export function askReadingColumn(
  open: readonly OpenReading[],
  columns: readonly HeaderColumn[],
  headerLine: number,
  firstRow: { fields: readonly string[]; line: number } | undefined,
  questions: QuestionList,
): void {
  const first = open[0]
  if (first === undefined) return
  const kinds = Array.from(new Set(open.flatMap((group) => group.kinds)))
  const names = first.at.map((at) => `“${columns[at]?.inFile ?? ''}”`).join(', ')
  questions.ask('reading-of', () =>
    question({
      id: 'reading-of',
      kind: 'reading-of',
      blocking: false,
      line: headerLine,
      column: (first.at[0] ?? 0) + 1,
      text: `Which column is the reading of ${first.name}${open.length > 1 ? ` and of ${open.length - 1} more such channels` : ''}? ${names} cover a stretch of time each, and none of them bears the name of the channel.`,
      found: `${names} and no column “${first.name}”`,
      expected: 'one column for each channel, or a word about which of several counts',
      mend: 'Choose what the logger should be read by. The others stay in the original file, and every row is held against them.',
      choices: [
        ...kinds.map((kind) => {
          const at = first.at.find((_, i) => first.kinds[i] === kind)
          const cell = at === undefined ? '' : (firstRow?.fields[at] ?? '').trim()
          const shown = { line: firstRow?.line ?? 0, text: cell, meaning: 'what it shows first' }
          return choice(kind, `the ${STATISTIC_WORDS[kind]}`, cell === '' ? [] : [shown])
        }),
        choice('leave-out', 'leave these channels out of the file'),
      ],
    }),
  )
}

type Averaging = NonNullable<SourceProfile['averaging']>

const AVERAGING_WORDS: Record<Averaging, string> = {
  momentary: 'momentary values',
  mean: 'means of the values',
  'log-mean': 'means of their logarithms',
}

/** What one reading stands for: by an answer, by the name of its column, or by the profile of the source. */
export function averagingOf(
  kinds: readonly StatisticKind[],
  profile: SourceProfile,
  questions: QuestionList,
): Averaging | null {
  const answer = questions.answer('averaging')
  if (answer === 'momentary' || answer === 'mean' || answer === 'log-mean') return answer
  if (kinds.includes('log-mean')) return 'log-mean'
  if (kinds.includes('mean')) return profile.averaging === 'log-mean' ? 'log-mean' : 'mean'
  return profile.averaging
}

/**
 * Asks what rows that cover a stretch of time stand for, unless the file or the profile says it.
 *
 * @param kinds of the columns that give readings
 * @param found names of the columns that hold statistics
 */
export function askAveraging(
  kinds: readonly StatisticKind[],
  found: readonly string[],
  profile: SourceProfile,
  questions: QuestionList,
): void {
  if (found.length === 0 || questions.answer('averaging') !== null) return
  // Which columns are the readings comes first: a column of means is no momentary value.
  if (questions.isAsked('reading-of')) return
  const isMean = kinds.includes('mean')
  const { averaging } = profile
  if (kinds.includes('log-mean') && (averaging === null || averaging === 'log-mean')) return
  // A reading that is the lowest or highest of its stretch is no mean of any sort.
  if (kinds.some((kind) => kind === 'lowest' || kind === 'highest') && !isMean) return
  if (averaging !== null && !(averaging === 'momentary' && kinds.some((kind) => kind.endsWith('mean'))))
    return
  questions.ask('averaging', (): Question => {
    const open: Averaging[] = isMean ? ['mean', 'log-mean'] : ['momentary', 'mean', 'log-mean']
    return question({
      id: 'averaging',
      kind: 'averaging',
      blocking: false,
      text: 'Is each reading of this source a momentary value, or a mean over the time since the row before? On a fast ramp the mean of the values and the mean of their logarithms lie more than a tenth apart. The figures are stored as written either way, and labelled.',
      found: `${found.map((name) => `“${name}”`).join(', ')}${averaging === null ? ' and nothing in the profile about means' : `, and a profile that says ${AVERAGING_WORDS[averaging]}`}`,
      expected: 'momentary values, means of the values, or means of their logarithms',
      mend: 'Look at the setting of the logger, or ask whoever set it up.',
      choices: open.map((value) => choice(value, AVERAGING_WORDS[value])),
    })
  })
}
