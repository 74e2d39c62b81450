/** Forms of the People place: accounts, dated grants, and their ends. */
import { z } from 'zod'
import { ROLES } from '../roles.ts'
import { siteInstant } from './instant.ts'
import { ReasonSchema } from './register.ts'
import { lastDayValue } from './register-values.ts'

const LEAST_PASSWORD = 12

const role = z.enum(ROLES, { error: 'Choose a role.' })

/** A contributor is somebody from outside: never without an end. */
function contributorEnds<Form extends { role: string; until: Date | null }>(
  form: Form,
  context: z.RefinementCtx<Form>,
): void {
  if (form.role !== 'contributor' || form.until !== null) return
  context.addIssue({
    code: 'custom',
    path: ['until'],
    message: 'A contributor always has a last day. Give one, such as 2026-11-30.',
  })
}

/** A new account with its first role. */
export function newPersonSchema(zone: string) {
  return z
    .object({
      name: z.string().trim().min(3, 'Give first and last name.').max(120, 'At most 120 characters.'),
      email: z
        .email('Give an e-mail address such as name@example.org; the person signs in with it.')
        .max(254),
      password: z
        .string()
        .min(
          LEAST_PASSWORD,
          `At least ${LEAST_PASSWORD} characters: three or four words are easy to tell and hard to guess.`,
        )
        .max(1000, 'At most 1000 characters.'),
      role,
      until: lastDayValue(zone),
      note: z.string().trim().max(500, 'At most 500 characters.').default(''),
      reason: ReasonSchema,
    })
    .superRefine(contributorEnds)
}

/** A role for a person from an instant, up to and including a day or for good. */
export function grantSchema(zone: string) {
  return z
    .object({ role, startsAt: siteInstant(zone), until: lastDayValue(zone), reason: ReasonSchema })
    .superRefine(contributorEnds)
    .superRefine((form, context) => {
      if (form.until === null || form.until > form.startsAt) return
      context.addIssue({
        code: 'custom',
        path: ['until'],
        message: 'The last day lies before the beginning. Give a later one, or leave it empty.',
      })
    })
}

const grantId = z.coerce.number().int().positive()

/** Taking a role away, now. */
export const EndGrantSchema = z.object({ grantId, reason: ReasonSchema })

/** Confirming or refusing a role that somebody gave to themselves. */
export const DecideGrantSchema = z.object({
  grantId,
  decision: z.enum(['confirm', 'refuse'], { error: 'Choose whether you confirm it or refuse it.' }),
  reason: ReasonSchema,
})

/** The last day of an account; empty lifts a day that was set. */
export function accountEndSchema(zone: string) {
  return z.object({
    /** The end that the form was made for, so that a stale form is noticed. */
    seen: z.string().max(40).default(''),
    until: lastDayValue(zone),
    /** Ends it at once, whatever the day says. */
    now: z
      .literal('on')
      .optional()
      .transform((value) => value === 'on'),
    reason: ReasonSchema,
  })
}

export type NewPersonForm = z.infer<ReturnType<typeof newPersonSchema>>
export type GrantForm = z.infer<ReturnType<typeof grantSchema>>
export type AccountEndForm = z.infer<ReturnType<typeof accountEndSchema>>
