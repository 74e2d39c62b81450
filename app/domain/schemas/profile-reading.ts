/** The form for what only a person can know of a source's files: curves of volts, the time a gauge takes to start, the column that counts. */
import { z } from 'zod'
import { unitOf } from '../night-files/units.ts'
import { ReasonSchema } from './register.ts'
import { numberValue } from './register-values.ts'
import type { SourceProfile } from './source-profile.ts'

/** Most curves of one source. */
const MOST_CURVES = 40

/** What the reading of a channel is that a file gives only by its lowest, highest and mean values; '' asks at the file. */
export const READING_COLUMN_LABELS = {
  '': 'Ask when a file raises it',
  mean: 'The mean',
  'log-mean': 'The mean of the logarithms',
  lowest: 'The lowest value',
  highest: 'The highest value',
  'leave-out': 'None: leave such channels out',
} as const

type ReadingColumn = keyof typeof READING_COLUMN_LABELS

/** Fields of one curve, each with the row's number behind it: `channel0`, `voltsPerDecade0` … */
export const CURVE_FIELDS = ['channel', 'voltsPerDecade', 'voltsAtUnit', 'unit', 'voltsChannel'] as const

const volts = numberValue({ min: -1000, max: 1000, unit: 'V' })

/** Reads the rows of curves; a row with nothing in it is none. */
function curvesOf(typed: Record<string, unknown>, context: z.RefinementCtx): SourceProfile['curves'] {
  const textOf = (name: string) => String(typed[name] ?? '').trim()
  const curves: SourceProfile['curves'] = []
  for (let row = 0; row < MOST_CURVES; row += 1) {
    if (CURVE_FIELDS.every((field) => textOf(`${field}${row}`) === '')) continue
    const fault = (field: (typeof CURVE_FIELDS)[number], message: string) => {
      context.addIssue({ code: 'custom', path: [`${field}${row}`], message })
    }
    const numberOf = (field: 'voltsPerDecade' | 'voltsAtUnit') => {
      const read = volts.safeParse(textOf(`${field}${row}`))
      if (!read.success) fault(field, read.error.issues[0]?.message ?? 'Give a number of volts.')
      return read.success ? (read.data ?? 0) : Number.NaN
    }
    const [voltsPerDecade, voltsAtUnit] = [numberOf('voltsPerDecade'), numberOf('voltsAtUnit')]
    const [channel, unit] = [textOf(`channel${row}`), textOf(`unit${row}`)]
    const voltsChannel = textOf(`voltsChannel${row}`) || null
    if (channel === '') fault('channel', 'Give the channel that the pressure goes to.')
    if (voltsPerDecade === 0) fault('voltsPerDecade', 'A curve has a slope other than 0 V a decade.')
    if (unitOf(unit)?.quantity !== 'pressure')
      fault('unit', unit === '' ? 'Give a unit such as mbar.' : `"${unit}" is no unit of pressure.`)
    if (curves.some((other) => other.channel === channel)) fault('channel', `${channel} has a curve already.`)
    curves.push({ channel, voltsPerDecade, voltsAtUnit, unit, voltsChannel })
  }
  return curves
}

/** What the form gives; `seen` is the version of the profile that it was made for, 0 where there was none. */
export const ProfileReadingSchema = z
  .looseObject({
    seen: z.coerce.number().int().min(0),
    startingMinutes: numberValue({ min: 0, max: 1440, unit: 'min' }),
    readingColumn: z.enum(Object.keys(READING_COLUMN_LABELS) as [ReadingColumn, ...ReadingColumn[]], {
      error: 'Choose one of the list.',
    }),
    reason: ReasonSchema,
  })
  .transform((typed, context) => ({
    seen: typed.seen,
    startingMinutes: typed.startingMinutes ?? 0,
    readingColumn: typed.readingColumn === '' ? null : typed.readingColumn,
    curves: curvesOf(typed, context),
    reason: typed.reason,
  }))

export type ProfileReading = z.infer<typeof ProfileReadingSchema>
