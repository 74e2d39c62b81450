/** The form by which an officer rules on a conflict of a permit. */
import { z } from 'zod'

export const PermitRulingSchema = z.object({
  act: z.literal('rule'),
  /** The conflict's key, see domain/permit-facts.ts. */
  key: z.string().min(1, 'This page is not whole any more. Load it again.').max(80),
  revision: z.coerce.number().int().min(1, 'This page is not whole any more. Load it again.'),
  allowed: z
    .enum(['yes', 'no'], { error: 'Choose whether it is allowed.' })
    .transform((answer) => answer === 'yes'),
  text: z
    .string()
    .trim()
    .min(10, 'Say in a sentence what is done so that it may go on, or why it may not.')
    .max(2000, 'At most 2000 characters.'),
  password: z.string().min(1, 'Sign with your own password.'),
})
