import type { TimeFormat } from '../schemas/source-profile.ts'

const MINUTE = 60_000
const DAY = 86_400_000
/** No date beyond this year is read as one. */
const LATEST_YEAR = 2200
const LATEST_MS = Date.UTC(LATEST_YEAR + 1, 0, 1)

/** A numeric date, optionally a time of day, AM or PM, and an offset. Part order is decided by the format. */
const NUMERIC =
  /^(\d{1,4})([./-])(\d{1,2})\2(\d{1,4})(?:(?:\s*[T,;]\s*|\s+)(\d{1,2})[:.h](\d{2})(?:[:.](\d{2})(?:[.,](\d{1,9}))?)?(?:\s*([AaPp])\.?[Mm]\.?)?)?\s*(Z|z|[+-]\d{2}:?\d{2})?(?:\[[\w/+-]+\])?$/
const COMPACT = /^(\d{4})(\d{2})(\d{2})[T_ ]?(\d{2})(\d{2})(\d{2})(?:[.,](\d{1,9}))?(Z|z|[+-]\d{2}:?\d{2})?$/
const MONTH_NAME =
  /^(?:[a-zäöüéû]{2,10}\.?,?\s+)?(?:(\d{1,2})[.\s-]*([a-zäöüéûç]{3,10})|([a-zäöüéûç]{3,10})\.?\s+(\d{1,2}),?)[.\s,-]+(\d{4}|\d{2})(?:[\sT,]+(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,9}))?)?(?:\s*([ap])\.?m\.?)?)?\s*(z|[+-]\d{2}:?\d{2})?$/i
const TIME_ONLY = /^(\d{1,2})[:.h](\d{2})(?:[:.](\d{2})(?:[.,](\d{1,9}))?)?(?:\s*([AaPp])\.?[Mm]\.?)?$/
const DATE_ONLY = /^(\d{1,4})([./-])(\d{1,2})\2(\d{1,4})$/

/** Month names by their first letters in English, German, French, Spanish, Italian and Dutch (common knowledge). */
const MONTHS: Record<string, number> = {
  jan: 1,
  jän: 1,
  ene: 1,
  gen: 1,
  feb: 2,
  fév: 2,
  fev: 2,
  mar: 3,
  mär: 3,
  mrz: 3,
  maa: 3,
  mrt: 3,
  apr: 4,
  avr: 4,
  abr: 4,
  mai: 5,
  may: 5,
  mag: 5,
  mei: 5,
  jun: 6,
  juin: 6,
  giu: 6,
  jul: 7,
  juil: 7,
  lug: 7,
  aug: 8,
  aoû: 8,
  aou: 8,
  ago: 8,
  sep: 9,
  set: 9,
  oct: 10,
  okt: 10,
  ott: 10,
  nov: 11,
  dec: 12,
  dez: 12,
  déc: 12,
  dic: 12,
}

function monthOf(name: string): number {
  const word = name.toLowerCase()
  return MONTHS[word.slice(0, 4)] ?? MONTHS[word.slice(0, 3)] ?? Number.NaN
}

function fraction(digits: string | undefined): number {
  return digits === undefined ? 0 : Math.round(Number(`0.${digits}`) * 1000)
}

/** Offset text in minutes east of UTC. */
function offsetMinutes(text: string): number {
  if (text === 'Z' || text === 'z') return 0
  const sign = text[0] === '-' ? -1 : 1
  const hours = Number(text.slice(1, 3))
  const minutes = Number(text.slice(-2))
  return sign * (hours * 60 + minutes)
}

function fullYear(text: string): number {
  const year = Number(text)
  // Two digits: a log is of this century.
  return text.length <= 2 ? 2000 + year : year
}

/**
 * Whether the comma of a number can only be its decimal mark, whatever the values of the file are written with: behind
 * four figures or more no comma parts thousands. So are the day numbers that a spreadsheet saves (`46335,3125`).
 */
export function hasDecimalComma(text: string): boolean {
  return /^-?\d{4,},\d+$/.test(text)
}

/**
 * Reads time texts of one format. A read leaves the wall time in `wallMs` (the figures taken as if they were UTC)
 * and the offset written in the text in `offset` (NaN when none); epochs leave the instant with offset 0.
 */
export class TimeReader {
  wallMs = Number.NaN
  offset = Number.NaN
  /** Set when the text held a leap second or another value that had to be rounded. */
  rounded = false
  /** Set when the text named no seconds. */
  noSeconds = false
  /** Whether AM or PM was written. */
  half = false
  readonly format: TimeFormat
  readonly #decimalComma: boolean
  #lastText = ''
  #lastGood = false

  constructor(format: TimeFormat, decimalMark: '.' | ',' = '.') {
    this.format = format
    this.#decimalComma = decimalMark === ','
  }

  /** Whether the text is a time in this format; fields are set only then. */
  read(text: string): boolean {
    if (text === this.#lastText && this.#lastGood) return true
    this.#lastText = text
    this.#lastGood = this.#read(text.trim())
    return this.#lastGood
  }

  #read(text: string): boolean {
    this.offset = Number.NaN
    this.rounded = false
    this.noSeconds = false
    this.half = false
    switch (this.format) {
      case 'epoch-s':
        return this.#epoch(text, 1000)
      case 'epoch-ms':
        return this.#epoch(text, 1)
      case 'epoch-us':
        return this.#epoch(text, 0.001)
      case 'serial-1900':
        return this.#serial(text, 25569)
      case 'serial-1904':
        return this.#serial(text, 24107)
      case 'month-name':
        return this.#monthName(text)
      case 'elapsed-s':
        return this.#elapsed(text)
      default:
        return this.#numeric(text)
    }
  }

  /** A time of day without a date, joined to the day that starts at `dayMs` (wall time). */
  readTimeOfDay(text: string, dayMs: number): boolean {
    this.#lastText = ''
    this.offset = Number.NaN
    this.rounded = false
    const match = TIME_ONLY.exec(text.trim())
    if (match === null) return false
    return this.#join(dayMs, match[1], match[2], match[3], match[4], match[5])
  }

  /** A date without a time of day; its start in wall time, or NaN. */
  readDate(text: string): number {
    const trimmed = text.trim()
    if (this.format === 'month-name') {
      this.#lastText = ''
      return this.#monthName(`${trimmed} 00:00`) ? this.wallMs : Number.NaN
    }
    const match = DATE_ONLY.exec(trimmed)
    if (match === null) return Number.NaN
    return this.#day(match[1] as string, match[3] as string, match[4] as string)
  }

  #epoch(text: string, factor: number): boolean {
    if (!/^\d{6,17}(?:[.,]\d+)?$/.test(text)) return false
    // Sub-millisecond parts fall away: the stored instant is whole milliseconds.
    this.wallMs = Math.round(Number(text.replace(',', '.')) * factor)
    this.offset = 0
    // A digit too many makes a time that no calendar reaches.
    return this.wallMs < LATEST_MS
  }

  #serial(text: string, epochDay: number): boolean {
    const number = this.#plain(text)
    if (Number.isNaN(number) || number < 1 || number > 200_000) return false
    this.wallMs = Math.round((number - epochDay) * DAY)
    return true
  }

  /** Seconds since a start that is known elsewhere: `wallMs` holds the span. */
  #elapsed(text: string): boolean {
    const number = this.#plain(text)
    if (!(number >= 0 && number < 1e9)) return false
    this.wallMs = Math.round(number * 1000)
    this.offset = 0
    return true
  }

  #plain(text: string): number {
    const dotted = this.#decimalComma || hasDecimalComma(text) ? text.replace(',', '.') : text
    return /^-?\d+(?:\.\d*)?(?:[eE][+-]?\d+)?$/.test(dotted) ? Number(dotted) : Number.NaN
  }

  #numeric(text: string): boolean {
    const match = NUMERIC.exec(text)
    if (match === null) {
      if (this.format !== 'iso' && this.format !== 'ymd') return false
      return this.#compact(text)
    }
    if (match[5] === undefined) return false
    const day = this.#day(match[1] as string, match[3] as string, match[4] as string)
    if (Number.isNaN(day)) return false
    if (!this.#join(day, match[5], match[6], match[7], match[8], match[9])) return false
    return this.#zoned(match[10])
  }

  #compact(text: string): boolean {
    const match = COMPACT.exec(text)
    if (match === null) return false
    const day = this.#day(match[1] as string, match[2] as string, match[3] as string)
    if (Number.isNaN(day)) return false
    if (!this.#join(day, match[4], match[5], match[6], match[7], undefined)) return false
    return this.#zoned(match[8])
  }

  #monthName(text: string): boolean {
    const match = MONTH_NAME.exec(text)
    if (match === null) return false
    if (match[6] === undefined) return false
    const month = monthOf((match[2] ?? match[3]) as string)
    const day = dayStart(fullYear(match[5] as string), month, Number(match[1] ?? match[4]))
    if (Number.isNaN(day)) return false
    if (!this.#join(day, match[6], match[7], match[8], match[9], match[10])) return false
    return this.#zoned(match[11])
  }

  #day(first: string, second: string, third: string): number {
    switch (this.format) {
      case 'dmy':
        return third.length === 3 ? Number.NaN : dayStart(fullYear(third), Number(second), Number(first))
      case 'mdy':
        return third.length === 3 ? Number.NaN : dayStart(fullYear(third), Number(first), Number(second))
      case 'ymd':
        return first.length === 3 || first.length === 1
          ? Number.NaN
          : dayStart(fullYear(first), Number(second), Number(third))
      default:
        return first.length === 4 ? dayStart(Number(first), Number(second), Number(third)) : Number.NaN
    }
  }

  #zoned(offset: string | undefined): boolean {
    if (offset === undefined) return true
    this.offset = offsetMinutes(offset)
    return Math.abs(this.offset) <= 18 * 60
  }

  #join(
    day: number,
    hourText: string | undefined,
    minuteText: string | undefined,
    secondText: string | undefined,
    fractionText: string | undefined,
    half: string | undefined,
  ): boolean {
    let hour = Number(hourText)
    const minute = Number(minuteText)
    const second = secondText === undefined ? 0 : Number(secondText)
    const millisecond = fraction(fractionText)
    this.noSeconds = secondText === undefined
    this.half = half !== undefined
    if (half !== undefined) {
      if (hour < 1 || hour > 12) return false
      hour = (hour % 12) + (half === 'p' || half === 'P' ? 12 : 0)
    }
    if (minute > 59 || second > 60 || hour > 24) return false
    // 24:00 is the end of the day; 24:00:01 is nothing.
    if (hour === 24 && (minute > 0 || second > 0 || millisecond > 0)) return false
    if (second === 60) this.rounded = true
    this.wallMs = day + hour * 60 * MINUTE + minute * MINUTE + second * 1000 + millisecond
    return true
  }
}

/** Start of a calendar day as if in UTC; NaN for a day that does not exist. */
function dayStart(year: number, month: number, day: number): number {
  if (!(month >= 1 && month <= 12 && day >= 1 && day <= 31) || year < 1900 || year > LATEST_YEAR)
    return Number.NaN
  const ms = Date.UTC(year, month - 1, day)
  const date = new Date(ms)
  return date.getUTCDate() === day ? ms : Number.NaN
}

/** Whether a text has the look of a date or time of day, whatever its format. */
export function looksLikeTime(text: string): boolean {
  const trimmed = text.trim()
  return (
    NUMERIC.test(trimmed) || COMPACT.test(trimmed) || TIME_ONLY.test(trimmed) || looksLikeMonthName(trimmed)
  )
}

export function looksLikeMonthName(text: string): boolean {
  const match = MONTH_NAME.exec(text.trim())
  return match !== null && !Number.isNaN(monthOf((match[2] ?? match[3]) as string))
}

export function isTimeOfDay(text: string): boolean {
  return TIME_ONLY.test(text.trim())
}

export interface DateParts {
  first: string
  mark: '.' | '/' | '-'
  second: string
  third: string
}

/** Parts of a numeric date as they stand, for finding the order out. */
export function dateParts(text: string): DateParts | null {
  const match = NUMERIC.exec(text.trim())
  if (match === null) return null
  return {
    first: match[1] as string,
    mark: match[2] as '.' | '/' | '-',
    second: match[3] as string,
    third: match[4] as string,
  }
}

/** Which orders a numeric date allows: a part above 12 is no month, four digits are a year. */
export function allowedOrders(parts: DateParts): ('dmy' | 'mdy' | 'ymd')[] {
  return (['dmy', 'mdy', 'ymd'] as const).filter((order) => {
    const [year, month, day] =
      order === 'dmy'
        ? [parts.third, parts.second, parts.first]
        : order === 'mdy'
          ? [parts.third, parts.first, parts.second]
          : [parts.first, parts.second, parts.third]
    if (year.length === 1 || year.length === 3 || month.length > 2 || day.length > 2) return false
    return !Number.isNaN(dayStart(fullYear(year), Number(month), Number(day)))
  })
}
