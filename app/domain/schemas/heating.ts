/** The form in which a person says whether a heating is on. */
import { z } from 'zod'
import { siteInstant } from './instant.ts'

/** What was found, when, how it is known, and at which supply set if that was looked at. */
export function heatingSchema(zone: string) {
  return z.object({
    on: z
      .enum(['on', 'off'], {
        error: 'Say whether the heating is on or off. If you do not know, leave it unsaid.',
      })
      .transform((answer) => answer === 'on'),
    at: siteInstant(zone),
    supply: z.string().trim().max(12).default(''),
    how: z
      .string()
      .trim()
      .min(5, 'Say how you know: what you read, switched or locked.')
      .max(500, 'At most 500 characters.'),
  })
}
export type HeatingForm = z.infer<ReturnType<typeof heatingSchema>>
