/**
 * What a logger may post: a list of readings, each with a raw channel name, an instant and a value. A post that has a
 * fault is refused as a whole, with every fault named, so that a sender never has to guess which part was kept.
 */
import { z } from 'zod'
import { EARLIEST_MS } from '../night-files/limits.ts'

export const POST_LIMITS = {
  readings: 10_000,
  bodyBytes: 2 * 1024 * 1024,
  /** Faults named in an answer; the count is always that of all. */
  faults: 50,
} as const

/** One thing that is wrong with a post. */
export interface PostFault {
  /** Reading in the list, counted from 0; null when it concerns the post as a whole. */
  index: number | null
  field: string
  found: string
  expected: string
  mend: string
}

/** RFC 3339, section 5.6: full-date "T" full-time, the offset never left out. */
const DATE_TIME =
  /^(\d{4})-(\d{2})-(\d{2})[Tt](\d{2}):(\d{2}):(\d{2})(?:\.(\d{1,9}))?(?:[Zz]|([+-])(\d{2}):(\d{2}))$/

/** Milliseconds since 1970 UTC of an RFC 3339 instant, cut to the millisecond; null when it is none. */
export function readDateTime(text: string): number | null {
  const match = DATE_TIME.exec(text)
  if (match === null) return null
  const [year, month, day, hour, minute, second] = match.slice(1, 7).map(Number) as [
    number,
    number,
    number,
    number,
    number,
    number,
  ]
  const wall = Date.UTC(year, month - 1, day, hour, minute, second)
  const check = new Date(wall)
  // A day that the month does not have comes back as one of the next month.
  if (check.getUTCMonth() !== month - 1 || check.getUTCDate() !== day) return null
  if (hour > 23 || minute > 59 || second > 59) return null
  const [offsetHours, offsetMinutes] = [Number(match[9] ?? 0), Number(match[10] ?? 0)]
  if (offsetHours > 23 || offsetMinutes > 59) return null
  const offset = (match[8] === '-' ? -1 : 1) * (offsetHours * 60 + offsetMinutes)
  const milliseconds = Number((match[7] ?? '').slice(0, 3).padEnd(3, '0'))
  return wall + milliseconds - offset * 60_000
}

const EXPECTED = {
  channel: 'the name of a channel as the register has it, 1 to 80 characters',
  at: 'an RFC 3339 instant with its offset, such as 2026-11-09T08:05:00+01:00',
  value: 'a number, or a word or bound such as "OFF" or ">1e-2", or null',
  unit: 'a unit such as Pa, mbar or °C; without one the unit of the quantity holds (Pa, °C, V, A …)',
  status: 'a word of at most 40 characters, such as OK or OFF',
} as const

const MEND: Record<keyof typeof EXPECTED, string> = {
  channel: 'Send the name under which the source writes this channel.',
  at: 'Send date and time with Z or an offset. A time without one can mean two instants.',
  value: 'Send the number itself, with a decimal point and without quotation marks.',
  unit: 'Leave the unit out, or send one that fits the quantity.',
  status: 'Leave the status out, or send a shorter word.',
}

/** What is expected of a field, as a sentence. */
function described(field: keyof typeof EXPECTED): string {
  const text = EXPECTED[field]
  return `${text.charAt(0).toUpperCase()}${text.slice(1)}.`
}

const LiveReadingSchema = z.strictObject({
  channel: z
    .string()
    .trim()
    .min(1)
    .max(80)
    .meta({ description: described('channel') }),
  at: z
    .string()
    .meta({ format: 'date-time', description: described('at') })
    .transform((text, context): number => {
      const atMs = readDateTime(text)
      if (atMs !== null && atMs >= EARLIEST_MS) return atMs
      context.addIssue({ code: 'custom' })
      return z.NEVER
    }),
  value: z.union([z.number(), z.string().max(40), z.null()]).meta({ description: described('value') }),
  unit: z
    .string()
    .max(24)
    .optional()
    .meta({ description: described('unit') }),
  status: z
    .string()
    .max(40)
    .optional()
    .meta({ description: described('status') }),
})

/** A reading as posted; `at` in milliseconds since 1970 UTC. */
export type LiveReading = z.infer<typeof LiveReadingSchema>

/** Body of a post. */
export const PostSchema = z.strictObject({
  readings: z.array(LiveReadingSchema).min(1).max(POST_LIMITS.readings),
})

export type ParsedPost =
  | { ok: true; readings: LiveReading[] }
  | { ok: false; faults: PostFault[]; total: number }

/** Checks the shape of a post (JSON, parsed already). */
export function parsePost(body: unknown): ParsedPost {
  const parsed = PostSchema.safeParse(body)
  if (parsed.success) return { ok: true, readings: parsed.data.readings }
  const faults = parsed.error.issues.flatMap((issue) => faultsOf(issue, body))
  return { ok: false, faults: faults.slice(0, POST_LIMITS.faults), total: faults.length }
}

function faultsOf(issue: z.core.$ZodIssue, body: unknown): PostFault[] {
  const [list, index, field] = issue.path
  if (list === 'readings' && typeof index === 'number') {
    const item = at(at(body, 'readings'), index)
    if (issue.code === 'unrecognized_keys') return issue.keys.map((key) => strayField(index, key))
    if (typeof field !== 'string' || !(field in EXPECTED)) {
      return [
        {
          index,
          field: 'readings',
          found: shown(item),
          expected: 'an object with channel, at and value',
          mend: 'Send each reading as an object of its own.',
        },
      ]
    }
    const name = field as keyof typeof EXPECTED
    return [{ index, field: name, found: shown(at(item, name)), expected: EXPECTED[name], mend: MEND[name] }]
  }
  if (issue.code === 'unrecognized_keys' && list === undefined)
    return issue.keys.map((key) => strayField(null, key))
  const readings = at(body, 'readings')
  return [
    {
      index: null,
      field: 'readings',
      found: Array.isArray(readings) ? `a list of ${readings.length}` : shown(readings),
      expected: `an object with a list "readings" of 1 to ${POST_LIMITS.readings} readings`,
      mend: 'Send {"readings": [...]}; more readings than that go in several posts.',
    },
  ]
}

function strayField(index: number | null, field: string): PostFault {
  return {
    index,
    field: field.slice(0, 80),
    found: 'a field of this name',
    expected: index === null ? 'only readings' : 'only channel, at, value, unit and status',
    mend: 'Leave the field out, or correct its name.',
  }
}

function at(value: unknown, key: string | number): unknown {
  return typeof value === 'object' && value !== null
    ? (value as Record<string | number, unknown>)[key]
    : undefined
}

/** A value as it was sent, short enough to be read in a message. */
export function shown(value: unknown): string {
  if (value === undefined) return 'nothing'
  // JSON's 1e999 is a number to its parser and has no JSON of its own.
  if (typeof value === 'number') return String(value)
  const text = JSON.stringify(value)
  return text.length > 80 ? `${text.slice(0, 77)}…` : text
}
