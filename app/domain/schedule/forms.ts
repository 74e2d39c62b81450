/** Forms of the schedule of bakes as they are posted. Times are in the site's zone. */
import { z } from 'zod'
import { SCHEDULE_OBJECTIVES } from '../planning.ts'
import { siteInstant } from '../schemas/instant.ts'

const id = z.coerce.number().int().positive()
const ticked = z
  .string()
  .optional()
  .transform((value) => value !== undefined)

/** A new schedule; plans are ticked as `plan-<id>`. */
export function newScheduleSchema(zone: string) {
  return z
    .looseObject({
      title: z.string().trim().min(3, 'Give the schedule a name, such as “November”.').max(120),
      fromAt: siteInstant(zone),
      days: z.coerce
        .number()
        .int()
        .min(1, 'A window has at least one day.')
        .max(200, 'A window has 200 days at most.'),
      objective: z.enum(SCHEDULE_OBJECTIVES),
    })
    .transform((form, context) => {
      const planIds = Object.keys(form)
        .filter((key) => /^plan-\d+$/.test(key))
        .map((key) => Number(key.slice(5)))
      if (planIds.length === 0)
        context.addIssue({ code: 'custom', path: ['plans'], message: 'Tick at least one plan.' })
      const { title, fromAt, days, objective } = form
      return { title, fromAt, days, objective, planIds }
    })
}
export type NewSchedule = z.infer<ReturnType<typeof newScheduleSchema>>

/** What can be done with a schedule that is there. */
export function scheduleActSchema(zone: string) {
  const basis = { scheduleId: id, revision: z.coerce.number().int() }
  return z.discriminatedUnion('act', [
    z.object({ act: z.literal('propose'), ...basis }),
    z.object({ act: z.literal('make-current'), ...basis }),
    z.object({
      act: z.literal('move'),
      ...basis,
      planId: id,
      startsAt: siteInstant(zone),
      supply: z.string().max(12),
      cart: z.string().max(12),
      pinned: ticked,
    }),
  ])
}
export type ScheduleAct = z.infer<ReturnType<typeof scheduleActSchema>>

/** How a search came out, as it is kept with the schedule. */
export const ScheduleOutcomeSchema = z.object({
  value: z.number().nullable(),
  bound: z.number(),
  boundWhy: z.string(),
  gap: z.number(),
  built: z.number(),
})
export type ScheduleOutcome = z.infer<typeof ScheduleOutcomeSchema>
