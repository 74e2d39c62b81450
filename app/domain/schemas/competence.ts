/** Forms of competences and licences: a new one, a correction of one that was entered, and taking one back. */
import { z } from 'zod'
import { COMPETENCE_KINDS } from '../permit-words.ts'
import { lastDayValue, textValue } from './register-values.ts'
import { firstDayValue } from './site-day.ts'

/** What a person may do, from a day up to and including another, or for good. */
function competenceFields(zone: string) {
  return {
    kind: z.enum(COMPETENCE_KINDS, { error: 'Choose what the person may do.' }),
    number: textValue({ max: 40, optional: true, what: 'the number of the licence or certificate' }),
    startsAt: firstDayValue(zone),
    until: lastDayValue(zone),
    note: textValue({ max: 500, what: 'where it is written, such as the certificate that was shown' }),
  }
}

const replaces = z.coerce
  .number({ error: 'This page is not whole any more. Load it again.' })
  .int()
  .positive()

function inOrder(
  form: { kind: string; number: string; startsAt: Date; until: Date | null },
  context: z.RefinementCtx,
): void {
  if (form.until !== null && form.until <= form.startsAt) {
    context.addIssue({
      code: 'custom',
      path: ['until'],
      message: 'The last day lies before the first. Give a later one, or leave it empty.',
    })
  }
  if (form.kind === 'electrician-licence' && form.number === '') {
    context.addIssue({
      code: 'custom',
      path: ['number'],
      message: 'A licence has a number. Give it, such as EL-204.',
    })
  }
}

export function newCompetenceSchema(zone: string) {
  return z.object(competenceFields(zone)).superRefine(inOrder)
}
export type CompetenceForm = z.infer<ReturnType<typeof newCompetenceSchema>>

export function correctedCompetenceSchema(zone: string) {
  return z.object({ ...competenceFields(zone), replaces }).superRefine(inOrder)
}

export const TakeBackCompetenceSchema = z.object({
  replaces,
  reason: z.string().trim().min(5, 'Say why it never held.').max(500, 'At most 500 characters.'),
})
