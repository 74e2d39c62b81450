/** Days typed by people that stand for an instant of the site. */
import { z } from 'zod'
import { readLocalTime } from './instant.ts'

/** A day from which on something holds, given as 2026-11-30; the value is the instant at which it begins on site. */
export function firstDayValue(zone: string) {
  return z
    .string()
    .trim()
    .transform((text, context): Date => {
      const noon = /^\d{4}-\d{2}-\d{2}$/.test(text) ? readLocalTime(`${text}T12:00`, zone) : null
      if (noon === null || noon.kind !== 'instant') {
        context.addIssue({ code: 'custom', message: `"${text}" is not a day. Write it like 2026-11-30.` })
        return z.NEVER
      }
      const midnight = readLocalTime(`${text}T00:00`, zone)
      if (midnight.kind === 'instant') return midnight.at
      // A midnight that comes twice or never: the earlier one, so that the day counts in full.
      return midnight.kind === 'ambiguous' ? midnight.first : new Date(noon.at.getTime() - 12 * 3_600_000)
    })
}
