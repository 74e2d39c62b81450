/** Forms for the tokens with which machines send readings. */
import { z } from 'zod'
import { ReasonSchema } from './register.ts'
import { lastDayValue } from './register-values.ts'

/** A new token: what it is for, which sources it may send for, and its last day. */
export function newTokenSchema(zone: string) {
  return z.object({
    intent: z.literal('add'),
    name: z
      .string()
      .trim()
      .min(3, 'Say what will use it, such as “temperature logger, gateway in the cellar”.')
      .max(80, 'At most 80 characters.'),
    sources: z
      .union([z.string(), z.array(z.string())])
      .optional()
      .transform((value) => [...new Set(value === undefined ? [] : [value].flat())])
      .refine((codes) => codes.length > 0, { error: 'Tick at least one source.' }),
    until: lastDayValue(zone).transform((until, context): Date => {
      if (until !== null) return until
      context.addIssue({
        code: 'custom',
        message: 'A token always has a last day. Give one, such as 2027-06-30.',
      })
      return z.NEVER
    }),
    reason: ReasonSchema,
  })
}

/** Revoking a token, at once. */
export const RevokeTokenSchema = z.object({
  intent: z.literal('revoke'),
  tokenId: z.coerce.number().int().positive(),
  reason: ReasonSchema,
})

export type NewTokenForm = z.infer<ReturnType<typeof newTokenSchema>>
