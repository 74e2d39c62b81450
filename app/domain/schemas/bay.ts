/** Forms of the page of closed bays: a reading of oxygen, and the release of a stretch. */
import { z } from 'zod'
import { siteInstant } from './instant.ts'

const percent = z
  .string()
  .trim()
  .transform((text, context): number => {
    const value = /^\d{1,3}(?:[.,]\d{1,2})?$/.test(text) ? Number(text.replace(',', '.')) : Number.NaN
    if (value >= 0 && value <= 100) return value
    context.addIssue({
      code: 'custom',
      message: `Found “${text}”; expected a share of oxygen between 0 and 100 %, such as 20.8.`,
    })
    return z.NEVER
  })

/** A reading of oxygen as somebody took it. */
export function oxygenReadingSchema(zone: string) {
  return z.object({
    intent: z.literal('type-oxygen'),
    segment: z.string().trim().min(1, 'Choose the segment beside which it was read.').max(12),
    percent,
    at: siteInstant(zone),
    place: z
      .string()
      .trim()
      .min(2, 'Say where it was read: metre, bay, pit, height above the floor.')
      .max(200, 'At most 200 characters.'),
    instrument: z
      .string()
      .trim()
      .min(1, 'Type the serial number or tag of the instrument.')
      .max(40, 'At most 40 characters.'),
    tester: z.string().trim().max(120, 'At most 120 characters.').default(''),
  })
}
export type OxygenReadingForm = z.infer<ReturnType<typeof oxygenReadingSchema>>

export const BayReleaseSchema = z.object({
  intent: z.literal('release'),
  closureId: z.coerce.number().int().positive(),
  reason: z
    .string()
    .trim()
    .min(10, 'Say in a sentence why the stretch is safe to enter: cause found, fans proven, source shut.')
    .max(1000, 'At most 1000 characters.'),
  password: z.string().min(1, 'Sign with your own password.'),
})
export type BayReleaseForm = z.infer<typeof BayReleaseSchema>

/** A reading as the record keeps it. */
export const ReadOxygenSchema = z.object({
  percent: z.number(),
  place: z.string(),
  instrument: z.string(),
  tester: z.string(),
  doubt: z.string(),
})

/** The readings that a release rested on, as they are kept with it. */
export const ReleaseReadingsSchema = z.array(ReadOxygenSchema.extend({ at: z.coerce.date() }))
