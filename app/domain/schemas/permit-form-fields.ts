/** Fields of the permit form as they are typed: all text, and what each text means. */
import { tzOffset } from '@date-fns/tz'
import { z } from 'zod'
import { offsetText, readLocalTime, siteInstant } from './instant.ts'

/** A line of text of at most so many characters; line ends of the browser count as one character. */
export function text(most: number) {
  return z
    .string()
    .default('')
    .transform((typed) => typed.replaceAll('\r\n', '\n').trim())
    .refine((typed) => typed.length <= most, {
      error: ({ input }) =>
        `This is ${String(input).length} characters long and at most ${most} fit. Shorten it, or attach a paper and name it.`,
    })
}

const FIGURE = /^[+-]?\d+(?:[.,]\d+)?(?:e[+-]?\d+)?$/i
/** A comma before exactly three figures: a thousand to some, a thousandth to others. */
const TWO_MEANINGS = /^[+-]?[1-9]\d{0,2},\d{3}$/

/** What is wrong with a figure that was typed, or the figure. Decimal comma and spaces between thousands are read. */
function readFigure(typed: string): number | string {
  const tight = typed.replaceAll(/(?<=\d)[\s\u00a0\u202f](?=\d{3}(?!\d))/g, '')
  if (TWO_MEANINGS.test(tight)) {
    const [whole, part] = tight.split(',')
    return `"${typed}" can be read as ${whole}${part} or as ${whole}.${part}. Write it with a point, or without the comma.`
  }
  if (!FIGURE.test(tight)) return `"${typed}" is no number.`
  return Number(tight.replace(',', '.'))
}

interface FigureRange {
  low: number
  high: number
  unit: string
  /** The lowest value itself does not do. */
  above?: boolean
}

function outOf(value: number, { low, high, above = false }: FigureRange): boolean {
  return !Number.isFinite(value) || value > high || (above ? value <= low : value < low)
}

function rangeText({ low, high, unit, above = false }: FigureRange): string {
  if (low === -Infinity) return 'a number'
  return `a number ${above ? `above ${low} and up to` : `from ${low} to`} ${high} ${unit}`.trimEnd()
}

/** A figure, or null where the field was left empty. */
export function figure(range: FigureRange) {
  return z
    .string()
    .default('')
    .transform((typed, context): number | null => {
      const trimmed = typed.trim()
      if (trimmed === '') return null
      const read = readFigure(trimmed)
      if (typeof read === 'number' && !outOf(read, range)) return read
      const found = typeof read === 'string' ? read : `"${trimmed}" does not do.`
      context.addIssue({ code: 'custom', message: `${found} Give ${rangeText(range)}.` })
      return z.NEVER
    })
}

/** A person chosen from the list, or null. */
export function personChoice() {
  return z
    .string()
    .default('')
    .transform((typed, context): number | null => {
      if (typed === '') return null
      if (/^[1-9]\d{0,8}$/.test(typed)) return Number(typed)
      context.addIssue({ code: 'custom', message: `"${typed}" is nobody of the list. Choose a name.` })
      return z.NEVER
    })
}

/** Several people. A group of one box gives its value or nothing instead of a list. */
export function peopleChoice(most: number) {
  return z.preprocess(
    (given) => {
      const list = Array.isArray(given) ? given : [given]
      return list.filter((one) => typeof one === 'string' && one !== '')
    },
    z
      .array(
        z
          .string()
          .regex(/^[1-9]\d{0,8}$/, 'Choose people of the list.')
          .transform(Number),
      )
      .max(most, `At most ${most} people fit here.`)
      .transform((ids) => [...new Set(ids)]),
  )
}

/** Yes, no, or not answered yet. */
export function yesNo() {
  return z
    .string()
    .nullish()
    .transform((typed, context): boolean | null => {
      if (typed === undefined || typed === null || typed === '') return null
      if (typed === 'yes' || typed === 'no') return typed === 'yes'
      context.addIssue({ code: 'custom', message: 'Answer with yes or no.' })
      return z.NEVER
    })
}

/** An instant in site time as UTC ISO 8601, or null. */
export function windowEnd(zone: string) {
  const one = siteInstant(zone)
  return z
    .string()
    .default('')
    .transform((typed, context): string | null => {
      if (typed.trim() === '') return null
      const read = one.safeParse(typed.trim())
      if (read.success) return read.data.toISOString()
      for (const { message } of read.error.issues) {
        // Its advice about a logger that kept its old time is for readings.
        const told = message.startsWith('This time does not exist')
          ? 'This time does not exist: that night the clock is put forward. Give a time before or after the gap.'
          : message
        context.addIssue({ code: 'custom', message: told })
      }
      return z.NEVER
    })
}

/**
 * An instant as a person types it, which reads back as that instant: with seconds where it has any, and with its offset
 * where the clock change makes one local time mean two.
 */
export function typedInstant(at: Date, zone: string): string {
  const minutes = tzOffset(zone, at)
  const wall = new Date(at.getTime() + minutes * 60_000).toISOString()
  const plain = wall.slice(0, wall.slice(17, 19) === '00' ? 16 : 19).replace('T', ' ')
  return readLocalTime(plain, zone).kind === 'instant' ? plain : `${plain} ${offsetText(minutes)}`
}
