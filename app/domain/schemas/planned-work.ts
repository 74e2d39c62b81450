/** Forms of work by others in the tunnel: planning it, and what is done with it afterwards. */
import { z } from 'zod'
import { PLANNED_WORK_KINDS } from '../permit-words.ts'
import { PLACED_WORK } from '../planned-work.ts'
import { siteInstant } from './instant.ts'
import { numberValue, textValue } from './register-values.ts'

const metre = numberValue({ min: 0, max: 100_000, unit: 'm', optional: true })
/** Longer than a fortnight it is no piece of work but a state of the site. */
const LONGEST_DAYS = 31

/** A piece of work as it is asked for. `place` is `segment:SG-06`, `line:MAIN` or empty for the whole site. */
export function plannedWorkSchema(zone: string) {
  return z
    .object({
      kind: z.enum(PLANNED_WORK_KINDS, { error: 'Choose what kind of work it is.' }),
      title: textValue({ max: 200, what: 'what will be done, in a few words' }),
      place: z
        .string()
        .regex(/^$|^(segment|line):[\w.-]{1,20}$/, 'Choose a segment, a line or the whole site.')
        .default(''),
      fromM: metre,
      toM: metre,
      startsAt: siteInstant(zone),
      endsAt: siteInstant(zone),
      people: textValue({ max: 500, optional: true, what: 'who will be there' }),
      note: textValue({ max: 1000, optional: true, what: 'a note' }),
    })
    .superRefine((form, context) => {
      const fault = (path: string, message: string) =>
        context.addIssue({ code: 'custom', path: [path], message })
      if (form.endsAt <= form.startsAt)
        fault('endsAt', 'The end lies before the beginning. Give a later one.')
      if (form.endsAt.getTime() - form.startsAt.getTime() > LONGEST_DAYS * 86_400_000)
        fault('endsAt', `At most ${LONGEST_DAYS} days. Plan a longer job in parts.`)
      if (PLACED_WORK.includes(form.kind) && form.place === '')
        fault('place', 'This kind of work has a place. Choose the segment or the line.')
      if (PLACED_WORK.includes(form.kind) && form.people === '')
        fault('people', 'Say who will be there: names, or how many of which firm.')
      if ((form.fromM === null) !== (form.toM === null))
        fault(form.fromM === null ? 'fromM' : 'toM', 'Give both ends of the stretch, or neither.')
      if (form.fromM !== null && form.toM !== null && form.toM < form.fromM)
        fault('toM', 'The stretch goes from west to east: its end lies before its beginning.')
      if (form.place === '' && form.fromM !== null) fault('place', 'Choose the line that this stretch is on.')
      if (form.place.startsWith('line:') && form.fromM === null)
        fault('fromM', 'Give the stretch of the line.')
    })
}
export type PlannedWorkForm = z.infer<ReturnType<typeof plannedWorkSchema>>

const revision = z.coerce
  .number()
  .int()
  .min(1, 'This page is not whole any more. Load it again and act on what it shows then.')
const password = z.string().min(1, 'Sign with your own password.')
const words = (what: string) => z.string().trim().min(10, what).max(2000, 'At most 2000 characters.')

/** A change of what was planned, on top of the form above. */
export const ChangeWorkSchema = z.object({
  revision,
  reason: z.string().trim().min(5, 'Say what has changed and why.').max(1000, 'At most 1000 characters.'),
})

/** What is done with a piece of work. */
export const WorkActSchema = z.discriminatedUnion(
  'act',
  [
    z.object({
      act: z.literal('limit'),
      revision,
      fromM: numberValue({ min: 0, max: 100_000, unit: 'm' }).transform((value) => value ?? 0),
      toM: numberValue({ min: 0, max: 100_000, unit: 'm' }).transform((value) => value ?? 0),
      barrier: z
        .string()
        .trim()
        .min(5, 'Say which barrier stands where.')
        .max(500, 'At most 500 characters.'),
      ruling: words('Say in a sentence what is allowed and why that is enough.'),
      password,
    }),
    z.object({
      act: z.literal('refuse'),
      revision,
      ruling: words('Say in a sentence why it cannot be done.'),
      password,
    }),
    z.object({ act: z.literal('start'), revision }),
    z.object({
      act: z.literal('finish'),
      revision,
      note: z.string().trim().max(1000, 'At most 1000 characters.').default(''),
    }),
    z.object({
      act: z.literal('call-off'),
      revision,
      reason: z.string().trim().min(5, 'Say why.').max(1000, 'At most 1000 characters.'),
    }),
  ],
  { error: 'Choose what is to be done with this work.' },
)
export type WorkAct = z.infer<typeof WorkActSchema>
