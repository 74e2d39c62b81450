import { z } from 'zod'
import { QUALITIES, QUANTITY_NAMES } from '../readings.ts'

/**
 * What has been confirmed about the files of one source. Every field may be `null`, which means "not settled yet":
 * the reader then works it out from the file, and asks where the file leaves more than one answer. A profile is kept
 * in versions; an answer to a question makes the next version.
 */

/** How the time of a row is written. The numeric orders (dmy, mdy, ymd) allow any of the marks . / - between parts. */
export const TIME_FORMATS = [
  'iso',
  'dmy',
  'mdy',
  'ymd',
  'month-name',
  'epoch-s',
  'epoch-ms',
  'epoch-us',
  'serial-1900',
  'serial-1904',
  'elapsed-s',
] as const
export type TimeFormat = (typeof TIME_FORMATS)[number]

export const SEPARATORS = [',', ';', '\t', '|', ' '] as const
export type Separator = (typeof SEPARATORS)[number]

/** Whether a text is an IANA zone or a fixed offset. */
export function isZone(text: string): boolean {
  if (/^[+-]\d{2}:\d{2}$/.test(text)) return true
  try {
    new Intl.DateTimeFormat('en', { timeZone: text })
    return true
  } catch {
    return false
  }
}

/** An IANA zone such as Europe/Vienna (follows clock changes) or a fixed offset such as +01:00 (does not). */
const ZoneSchema = z.string().refine(isZone, {
  error: 'Give an IANA zone such as Europe/Vienna, or a fixed offset such as +01:00',
})

const ProfileColumnSchema = z.object({
  /** Name as the file writes it, or the position (counted from 1) of a file without a header, as text. */
  inFile: z.string().min(1).max(120),
  /** Raw channel name of the source; null leaves the column out from now on. */
  channel: z.string().min(1).max(80).nullable(),
  unit: z.string().max(24).nullable().default(null),
  quantity: z.enum(QUANTITY_NAMES).nullable().default(null),
})

/** What a gauge writes that gives volts on a logarithmic scale, as its manual or certificate says. */
const VoltCurveSchema = z.object({
  /** Raw channel of the pressure. */
  channel: z.string().min(1).max(80),
  voltsPerDecade: z.number().refine((volts) => volts !== 0, { error: 'A curve has a slope other than 0 V.' }),
  /** Output in volts at one of `unit`. */
  voltsAtUnit: z.number(),
  unit: z.string().min(1).max(24),
  /** Raw channel that keeps the volts themselves; null when the register has none. */
  voltsChannel: z.string().min(1).max(80).nullable().default(null),
})

export const SourceProfileSchema = z.object({
  version: z.int().min(1).default(1),
  layout: z.enum(['wide', 'long']).nullable().default(null),
  separator: z.enum(SEPARATORS).nullable().default(null),
  decimalMark: z.enum(['.', ',']).nullable().default(null),
  /** Mark between groups of three digits. Without it in the profile a number with such a mark is refused. */
  thousandsMark: z.enum(['.', ',', ' ', "'"]).nullable().default(null),
  /** Whether `3.2-08` (no letter) means 3.2 × 10⁻⁸ in these files. */
  bareExponent: z.boolean().default(false),
  /** Unit of the columns that do not name their own. */
  unit: z.string().min(1).max(24).nullable().default(null),
  /** Whether these files say their unit themselves, so that one that says none is refused instead of trusted. */
  unitInFile: z.boolean().default(true),
  time: z
    .object({
      format: z.enum(TIME_FORMATS).nullable().default(null),
      /** Mark between day, month and year; a file that writes another one is asked about again. */
      dateMark: z.enum(['.', '/', '-']).nullable().default(null),
      zone: ZoneSchema.nullable().default(null),
      /** How the start of files that count seconds is written in their lines of metadata. */
      startFormat: z.enum(['iso', 'dmy', 'mdy', 'ymd', 'month-name']).nullable().default(null),
    })
    .prefault({}),
  /** Word in the file (lower case, single spaces) to its meaning; `ok` and `on` are no qualities but may stand here. */
  words: z.record(z.string(), z.enum([...QUALITIES, 'ok', 'on'])).default({}),
  /** Unit as these files write it to the unit that is meant, or `leave-out`. */
  units: z.record(z.string().min(1).max(40), z.string().min(1).max(24)).default({}),
  /** Numbers that this source uses as words. */
  sentinels: z.array(z.object({ value: z.number(), quality: z.enum(QUALITIES) })).default([]),
  /** Curves of gauges whose columns hold volts. Without one such a column is left out and asked about. */
  curves: z.array(VoltCurveSchema).default([]),
  /** Minutes after a gauge was switched on in which its readings are those of a starting gauge. */
  startingMinutes: z.number().min(0).max(1440).default(0),
  basis: z
    .object({
      kind: z.enum(['nitrogen-equivalent', 'corrected']),
      gas: z.string().max(24).nullable().default(null),
    })
    .nullable()
    .default(null),
  /** Whether a row is a momentary value or a mean over the period before it. */
  averaging: z.enum(['momentary', 'mean', 'log-mean']).nullable().default(null),
  /** Which column is the reading of a channel that a file gives only by its lowest, highest and mean values. */
  readingColumn: z.enum(['mean', 'log-mean', 'lowest', 'highest', 'leave-out']).nullable().default(null),
  expectedPeriodSeconds: z.number().positive().nullable().default(null),
  /** Columns of a wide file, or channel names of a long one, that are not called like the source's channels. */
  columns: z.array(ProfileColumnSchema).default([]),
  /** Order of the columns in files without a header: `time`, `date`, `-` to leave out, or a raw channel name. */
  columnOrder: z.array(z.string().min(1).max(120)).nullable().default(null),
})

export type SourceProfile = z.infer<typeof SourceProfileSchema>

/** A profile with nothing settled: the reader asks about whatever the file leaves open. */
export function emptyProfile(): SourceProfile {
  return SourceProfileSchema.parse({})
}
