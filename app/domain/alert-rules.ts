/** What a version of an alert rule says. Limits in the quantity's own unit, delays in seconds. */
import { z } from 'zod'
import { ALERT_PRIORITIES } from './alert-words.ts'
import { ROLES } from './roles.ts'
import { SEGMENT_STATE_CODES } from './segment-states.ts'

const sentence = z.string().trim().max(600)

export const AlertRuleContentSchema = z.object({
  title: z.string().trim().min(1).max(120),
  /** What it watches; no tags means all of that kind. */
  scope: z.object({
    kind: z.enum(['segments', 'positions', 'sources', 'permits', 'site']),
    tags: z.array(z.string().trim().min(1).max(20)).max(400),
  }),
  /** Figures of the condition by name, see domain/alerts. */
  figures: z.record(z.string().max(40), z.number()),
  onDelayS: z
    .number()
    .int()
    .min(0)
    .max(7 * 86_400),
  offDelayS: z
    .number()
    .int()
    .min(0)
    .max(7 * 86_400),
  /** Share of a window that good readings have to cover; below it the rule is not evaluable, which is not "in order". */
  coverage: z.number().min(0).max(1),
  priority: z.enum(ALERT_PRIORITIES),
  /** Segment states in which it is visibly not monitored. */
  suppressedIn: z.array(z.enum(SEGMENT_STATE_CODES)),
  /** Ends only when its cause is gone and one of these roles has reset it; empty: ends by itself. */
  resetBy: z.array(z.enum(ROLES)),
  /** Without these four it cannot be switched on. */
  why: sentence,
  whatToDo: sentence,
  howLong: sentence,
  who: sentence,
})
export type AlertRuleContent = z.infer<typeof AlertRuleContentSchema>

/** Which of the four sentences are missing. */
export function missingSentences(content: AlertRuleContent): ('why' | 'whatToDo' | 'howLong' | 'who')[] {
  return (['why', 'whatToDo', 'howLong', 'who'] as const).filter((name) => content[name] === '')
}
