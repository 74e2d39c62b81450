/** Forms of isolation tests: the window to fit, and the engineer's word on the result. */
import { z } from 'zod'
import { siteInstant } from './instant.ts'
import { tickValue } from './register-values.ts'

const password = z.string().min(1, 'Sign with your own password.')
const revision = z.coerce
  .number()
  .int()
  .min(1, 'This page is not whole any more. Load it again and give your word on what it shows then.')
const remark = z
  .string()
  .trim()
  .min(10, 'Say in a sentence what the curve shows and why that is enough, or why not.')
  .max(1000, 'At most 1000 characters.')

/** The window as typed: closing of the valve, begin and end of the fit, and the gauge. */
export function isolationWindowSchema(zone: string) {
  return z.object({
    gauge: z.string().min(1, 'Choose the gauge.').max(20),
    closedAt: siteInstant(zone),
    fitFrom: siteInstant(zone),
    fitTo: siteInstant(zone),
  })
}

/** The window with what is kept beside the result. */
export function newIsolationTestSchema(zone: string) {
  return isolationWindowSchema(zone).extend({
    note: z.string().trim().max(1000, 'At most 1000 characters.').default(''),
  })
}

/** Accepting or voiding a recorded test. */
export const IsolationDecisionSchema = z.discriminatedUnion(
  'intent',
  [
    z.object({ intent: z.literal('accept'), revision, remark, knowingly: tickValue(), password }),
    z.object({ intent: z.literal('void'), revision, remark, password }),
  ],
  { error: 'Choose what is to be done with this test.' },
)
export type IsolationDecision = z.infer<typeof IsolationDecisionSchema>
