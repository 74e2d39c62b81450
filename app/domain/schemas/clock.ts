import { z } from 'zod'
import { siteInstant } from './instant.ts'

/** Moving the demo clock forward to a site time. */
export function clockMoveSchema(zone: string) {
  return z.object({
    to: siteInstant(zone),
    reason: z.string().trim().min(3, 'Say in a word or two what you want to watch.').max(500),
  })
}
