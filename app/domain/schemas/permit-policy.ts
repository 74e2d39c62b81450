/** Forms of the site's permit policy and of the deletion of old records. */
import { z } from 'zod'
import { PermitPolicySchema } from '../permit-policy.ts'

const password = z.string().min(1, 'Sign with your own password.')
const reason = z
  .string()
  .trim()
  .min(5, 'Say why, for those who read it later.')
  .max(500, 'At most 500 characters.')
const days = PermitPolicySchema.shape.keepDays

/** What an officer sets. `seen` is the number of the setting that the page showed, 0 for none. */
export const PolicyFormSchema = z.object({
  intent: z.literal('set-policy'),
  seen: z.coerce.number().int().min(0),
  extensionAllowed: z
    .enum(['yes', 'no'], { error: 'Choose whether a window may be extended.' })
    .transform((answer) => answer === 'yes'),
  keepDays: z.coerce
    .number({ error: 'Give a whole number of days.' })
    .int('Give a whole number of days.')
    .min(
      days.minValue ?? 0,
      `At least ${days.minValue} days: cancelled permits are looked through for a year.`,
    )
    .max(days.maxValue ?? 0, `At most ${days.maxValue} days.`),
  reason,
  password,
})
export type PolicyForm = z.infer<typeof PolicyFormSchema>

/** An administrator's wish to delete what is old enough. */
export const AskRetentionSchema = z.object({ intent: z.literal('ask-run'), password })

const run = {
  runId: z.coerce.number().int().positive(),
  revision: z.coerce.number().int().positive(),
}
export const RunDecisionSchema = z.discriminatedUnion(
  'intent',
  [
    z.object({ intent: z.literal('agree'), ...run, password }),
    z.object({ intent: z.literal('call-off'), ...run }),
  ],
  { error: 'Choose what is to be done with this run.' },
)
export type RunDecision = z.infer<typeof RunDecisionSchema>

export const HoldFormSchema = z.object({
  intent: z.enum(['hold', 'release']),
  number: z.string().trim().min(1, 'Type the number of the permit.').max(20),
  reason,
  password,
})
export type HoldForm = z.infer<typeof HoldFormSchema>
