import type { SourceProfile, TimeFormat } from '../schemas/source-profile.ts'
import { choice, question } from './questions.ts'
import {
  allowedOrders,
  dateParts,
  hasDecimalComma,
  isTimeOfDay,
  looksLikeMonthName,
  TimeReader,
} from './time-text.ts'
import type { Candidate, Question, Refusal } from './types.ts'
import { wallText } from './zones.ts'

export interface TimeSample {
  text: string
  line: number
}

export interface TimeFinding {
  format: TimeFormat | null
  /** Set when the texts leave the format open. */
  question: Question | null
  refusal: Refusal | null
}

const ORDER_LABEL = {
  dmy: 'day, month, year',
  mdy: 'month, day, year',
  ymd: 'year, month, day',
} as const

/** A time under one format, for showing beside a choice. It is wall time: the zone comes later. */
function timeCandidate(sample: TimeSample, format: TimeFormat): Candidate {
  const reader = new TimeReader(format)
  const meaning = reader.read(sample.text) ? wallText(reader.wallMs) : 'no time in this order'
  return { line: sample.line, text: sample.text, meaning }
}

function settled(format: TimeFormat): TimeFinding {
  return { format, question: null, refusal: null }
}

/** Finds how the times of the head are written; asks where they can be read in more than one way. */
export function sniffTime(
  samples: readonly TimeSample[],
  profile: SourceProfile,
  decimalMark: '.' | ',' | null,
): TimeFinding {
  const usable = samples.filter((sample) => sample.text.trim() !== '' && !isTimeOfDay(sample.text))
  if (usable.length === 0) return { format: profile.time.format, question: null, refusal: null }
  const dotted = usable.map(({ text, line }) => {
    const trimmed = text.trim()
    return {
      text: decimalMark === ',' || hasDecimalComma(trimmed) ? trimmed.replace(',', '.') : trimmed,
      line,
    }
  })
  if (mostly(dotted, ({ text }) => /^\d(?:\.\d+)?[eE]\+?0?9$|^\d(?:\.\d+)?[eE]\+?12$/.test(text)))
    return rounded(usable)
  const wanted = profile.time.format
  if (wanted !== null && wanted !== 'dmy' && wanted !== 'mdy' && wanted !== 'ymd') {
    const reader = new TimeReader(wanted, decimalMark ?? '.')
    if (mostly(usable, ({ text }) => reader.read(text))) return settled(wanted)
  }
  if (mostly(dotted, ({ text }) => /^-?\d+(?:\.\d*)?$/.test(text))) return sniffNumeric(dotted)
  if (mostly(usable, ({ text }) => looksLikeMonthName(text))) return settled('month-name')
  const iso = new TimeReader('iso')
  if (wanted === null && mostly(usable, ({ text }) => iso.read(text) && !/^\d{4}[./]/.test(text.trim())))
    return settled('iso')
  return sniffOrder(usable, profile)
}

function mostly(samples: readonly TimeSample[], test: (sample: TimeSample) => boolean): boolean {
  return samples.filter(test).length > 0.5 * samples.length
}

function rounded(samples: readonly TimeSample[]): TimeFinding {
  const first = samples[0] as TimeSample
  return {
    format: null,
    question: null,
    refusal: {
      code: 'no-rows',
      line: first.line,
      column: 1,
      found: `times such as “${first.text}”, rounded by a spreadsheet so that the seconds are gone`,
      expected: 'times with all their digits, e.g. 1794204060000',
      mend: 'Send the logger’s own file, not a copy saved by a spreadsheet.',
    },
  }
}

function sniffNumeric(samples: readonly TimeSample[]): TimeFinding {
  const digits = (sample: TimeSample) => (/^-?\d+/.exec(sample.text)?.[0] ?? '').length
  if (mostly(samples, (sample) => digits(sample) === 13 || digits(sample) === 12)) return settled('epoch-ms')
  if (mostly(samples, (sample) => digits(sample) === 16 || digits(sample) === 15)) return settled('epoch-us')
  if (mostly(samples, (sample) => digits(sample) === 10 || digits(sample) === 9)) return settled('epoch-s')
  // Whole days since 1900 or 1904: these figures lie between 1982 and 2064.
  if (mostly(samples, ({ text }) => Number(text) >= 30_000 && Number(text) < 60_000))
    return serialQuestion(samples)
  return { format: null, question: null, refusal: unreadable(samples) }
}

function serialQuestion(samples: readonly TimeSample[]): TimeFinding {
  const first = samples[0] as TimeSample
  const shown = samples.slice(0, 3)
  const asked = question({
    id: 'date-order',
    kind: 'date-order',
    line: first.line,
    column: 1,
    text: 'The times are day numbers of a spreadsheet. From which day does it count?',
    found: `“${first.text}”`,
    expected: 'a base in the profile of the source, or times with a date',
    mend: 'Choose the base under which the dates are right; it is kept in the source’s profile.',
    choices: [
      choice(
        'serial-1900',
        'from the year 1900',
        shown.map((sample) => timeCandidate(sample, 'serial-1900')),
      ),
      choice(
        'serial-1904',
        'from the year 1904',
        shown.map((sample) => timeCandidate(sample, 'serial-1904')),
      ),
    ],
  })
  return { format: null, question: asked, refusal: null }
}

/** Orders allowed by every sample; one must remain, else a person decides. */
function sniffOrder(samples: readonly TimeSample[], profile: SourceProfile): TimeFinding {
  let orders: ('dmy' | 'mdy' | 'ymd')[] = ['dmy', 'mdy', 'ymd']
  let mark: '.' | '/' | '-' | null = null
  let dated = 0
  let first: TimeSample | null = null
  for (const sample of samples) {
    const parts = dateParts(sample.text)
    if (parts === null) continue
    const allowed = allowedOrders(parts)
    if (allowed.length === 0) continue
    dated += 1
    first ??= sample
    mark ??= parts.mark
    const left = orders.filter((order) => allowed.includes(order))
    if (left.length > 0) orders = left
  }
  if (first === null || dated * 2 < samples.length)
    return { format: null, question: null, refusal: unreadable(samples) }
  const wanted = profile.time.format
  const sameMark = profile.time.dateMark === null || profile.time.dateMark === mark
  if (wanted !== null && (orders as string[]).includes(wanted) && sameMark) return settled(wanted)
  if (orders.length === 1 && (wanted === null || wanted === 'iso')) return settled(orders[0] as 'dmy')
  return { format: null, refusal: null, question: orderQuestion(samples, first, orders, wanted) }
}

function orderQuestion(
  samples: readonly TimeSample[],
  first: TimeSample,
  orders: ('dmy' | 'mdy' | 'ymd')[],
  wanted: TimeFormat | null,
): Question {
  const shown = samples.slice(0, 3)
  const departs = wanted !== null
  return question({
    id: 'date-order',
    kind: 'date-order',
    line: first.line,
    column: 1,
    text: departs
      ? 'The dates are not written the way this source’s profile says. In which order do they stand?'
      : 'Day and month cannot be told apart in this file. In which order do they stand?',
    found: `“${first.text}”`,
    expected: departs
      ? `dates in the order of the profile (${wanted})`
      : 'a date with a part above 12, or an order in the profile',
    mend: 'Choose the order under which the dates are right; it is kept in the source’s profile.',
    choices: orders.map((order) =>
      choice(
        order,
        ORDER_LABEL[order],
        shown.map((sample) => timeCandidate(sample, order)),
      ),
    ),
  })
}

function unreadable(samples: readonly TimeSample[]): Refusal {
  const first = samples[0] as TimeSample
  return {
    code: 'no-rows',
    line: first.line,
    column: 1,
    found: `“${first.text.slice(0, 40)}” where the time should be`,
    expected:
      'a time such as 2026-11-08T06:00:00+01:00, 08.11.2026 06:00:00 or 1794204000000 in the column of the times',
    mend: 'Check that the right file was chosen and that one column of it holds the time.',
  }
}
