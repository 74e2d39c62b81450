/**
 * Values that people type into the register's forms, read the same way in the browser and on the server. Each reader
 * takes the text of one field and gives a value, or says what was found and what is wanted.
 */
import { z } from 'zod'
import { readLocalTime, siteInstant } from './instant.ts'

export type FieldValue = string | number | boolean | Date | null

const NUMBER = /^[+-]?(?:\d+(?:[.,]\d*)?|[.,]\d+)(?:e[+-]?\d+)?$/i
/** "1,500" is one and a half to some and fifteen hundred to others; "0,600" is clear. */
const TWO_READINGS = /^[+-]?0*[1-9]\d{0,2},\d{3}$/

export type ReadNumber = { kind: 'number'; value: number } | { kind: 'two-readings' } | { kind: 'unreadable' }

/** Reads a number with a decimal point or comma and an optional exponent (`2.1e-7`, `2,1E-7`). */
export function readNumber(text: string): ReadNumber {
  const trimmed = text.trim()
  if (TWO_READINGS.test(trimmed)) return { kind: 'two-readings' }
  if (!NUMBER.test(trimmed)) return { kind: 'unreadable' }
  const value = Number(trimmed.replace(',', '.'))
  return Number.isFinite(value) ? { kind: 'number', value } : { kind: 'unreadable' }
}

export interface NumberRule {
  /** Lowest value taken. */
  min: number
  /** Highest value taken. */
  max: number
  unit: string
  whole?: boolean
  /** An empty field means "not known" and gives null. */
  optional?: boolean
}

/** A field that takes a number within bounds. */
export function numberValue(rule: NumberRule) {
  const range = `from ${rule.min} to ${rule.max}${rule.unit === '' ? '' : ` ${rule.unit}`}`
  return z.string({ error: `Give a number ${range}.` }).transform((text, context): number | null => {
    const refuse = (message: string): never => {
      context.addIssue({ code: 'custom', message })
      return z.NEVER
    }
    if (text.trim() === '') return rule.optional ? null : refuse(`Give a number ${range}.`)
    const read = readNumber(text)
    if (read.kind === 'two-readings') {
      const [whole, rest] = text.trim().split(',')
      return refuse(
        `"${text.trim()}" can be read as ${whole}${rest} or as ${whole}.${rest}. Write it in one of these ways.`,
      )
    }
    if (read.kind === 'unreadable') {
      return refuse(`"${text.trim()}" is not a number. Write it like 150, 0.6 or 2.1e-7, without a unit.`)
    }
    if (rule.whole && !Number.isInteger(read.value)) return refuse(`"${text.trim()}" is not a whole number.`)
    if (read.value < rule.min || read.value > rule.max)
      return refuse(`${text.trim()} is outside what is taken here: ${range}.`)
    return read.value
  })
}

/** A field of text. An optional one may stay empty. */
export function textValue(rule: { max: number; optional?: boolean; what: string }) {
  return z
    .string({ error: `Give ${rule.what}.` })
    .trim()
    .min(rule.optional ? 0 : 1, `Give ${rule.what}.`)
    .max(rule.max, `At most ${rule.max} characters.`)
}

/** A tag or serial number: letters, digits and a few joining marks, so that it can stand in an address and on a label. */
export function tagValue(max: number, example: string) {
  return z
    .string({ error: `Give a tag such as ${example}.` })
    .trim()
    .max(max, `At most ${max} characters.`)
    .regex(
      /^[A-Za-z0-9][A-Za-z0-9._-]*$/,
      `Use letters, digits, dot, dash and underscore, beginning with a letter or digit, such as ${example}.`,
    )
    .refine(
      (tag) => tag.toLowerCase() !== 'new',
      'The word "new" is taken by the page that adds one. Choose another.',
    )
}

/** A site time that may be left empty. */
export function optionalInstant(zone: string) {
  const instant = siteInstant(zone)
  return z
    .string()
    .default('')
    .transform((text, context): Date | null => {
      if (text.trim() === '') return null
      const read = instant.safeParse(text)
      if (read.success) return read.data
      context.addIssue({ code: 'custom', message: read.error.issues[0]?.message ?? 'Give a date and time.' })
      return z.NEVER
    })
}

/** A tick box as a form sends it: "on" or not at all. */
export function tickValue() {
  return z
    .literal('on')
    .optional()
    .transform((value) => value === 'on')
}

/**
 * A day up to and including which something holds, given as 2026-11-30; the value is the instant at which the next
 * day begins on site. Empty gives null.
 */
export function lastDayValue(zone: string) {
  return z
    .string()
    .trim()
    .transform((text, context): Date | null => {
      if (text === '') return null
      const parts = /^(\d{4})-(\d{2})-(\d{2})$/.exec(text)
      const start = parts === null ? null : readLocalTime(`${text}T12:00`, zone)
      if (start === null || start.kind !== 'instant') {
        context.addIssue({ code: 'custom', message: `"${text}" is not a day. Write it like 2026-11-30.` })
        return z.NEVER
      }
      const next = new Date(Date.UTC(Number(parts?.[1]), Number(parts?.[2]) - 1, Number(parts?.[3]) + 1))
      const midnight = readLocalTime(`${next.toISOString().slice(0, 10)}T00:00`, zone)
      if (midnight.kind === 'instant') return midnight.at
      // A midnight that comes twice or never: the later one, so that the day counts in full.
      if (midnight.kind === 'ambiguous') return midnight.second
      return new Date(start.at.getTime() + 12 * 3_600_000)
    })
}
