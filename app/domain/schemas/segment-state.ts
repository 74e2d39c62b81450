import { z } from 'zod'
import { SEGMENT_STATE_CODES } from '../segment-states.ts'
import { siteInstant } from './instant.ts'

/** Setting a segment's state: since when, and why. `unusual` confirms a change outside the usual cycle. */
export function segmentStateSchema(zone: string) {
  return z.object({
    state: z.enum(SEGMENT_STATE_CODES, { error: 'Choose a state.' }),
    since: siteInstant(zone),
    reason: z.string().trim().min(5, 'Say in a few words what was done or seen.').max(1000),
    unusual: z
      .enum(['on'])
      .optional()
      .transform((value) => value === 'on'),
    /** The state the form was made for, so that a stale page cannot overwrite a newer one. */
    from: z.enum(SEGMENT_STATE_CODES),
  })
}
