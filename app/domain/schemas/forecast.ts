/** The question put to a forecast, as an address or a form carries it. */
import { z } from 'zod'
import { readAskedPressure } from './asked-pressure.ts'
import { optionalInstant } from './register-values.ts'

const target = z
  .string()
  .default('')
  .transform((text, context): number | null => {
    const { pa, error } = readAskedPressure(text)
    if (error !== null) context.addIssue({ code: 'custom', message: error })
    return pa
  })

/** Pressure and window; what is left empty is chosen by the product. */
export function forecastAskSchema(zone: string) {
  return z
    .object({ target, from: optionalInstant(zone), to: optionalInstant(zone) })
    .refine(({ from, to }) => from === null || to === null || from < to, {
      path: ['to'],
      message: 'The window ends before it begins. Give a later end, or leave both empty.',
    })
    .transform(({ target: targetPa, from, to }) => ({ targetPa, from, to }))
}

/** A forecast to be put on record; its pressure has to be said. */
export function forecastRecordSchema(zone: string) {
  return z.intersection(
    forecastAskSchema(zone).refine((ask): ask is typeof ask & { targetPa: number } => ask.targetPa !== null, {
      path: ['target'],
      message: 'Say which pressure the forecast is for, such as 1e-6.',
    }),
    z.object({ note: z.string().trim().max(1000, 'At most 1000 characters.').default('') }),
  )
}
