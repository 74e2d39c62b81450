/** The form in which a person notes where a bake left its plan. */
import { z } from 'zod'
import { DEVIATION_KINDS, type DeviationKind } from '../planning.ts'
import { siteInstant } from './instant.ts'
import { optionalInstant } from './register-values.ts'

export const DEVIATION_KIND_LABELS: Record<DeviationKind, string> = {
  temperature: 'Temperature',
  spread: 'Spread along the tube',
  'ramp-rate': 'Rate of the ramp',
  pressure: 'Pressure',
  energy: 'Energy',
  time: 'Time',
  supply: 'Supply',
  other: 'Something else',
}

/** @param zone zone in which the times are typed */
export function bakeDeviationSchema(zone: string) {
  return z.object({
    kind: z.enum(DEVIATION_KINDS, { error: 'Choose what it was about.' }),
    startsAt: siteInstant(zone),
    endsAt: optionalInstant(zone),
    detail: z
      .string()
      .trim()
      .min(5, 'Say what was seen, in a sentence.')
      .max(1000, 'At most 1 000 characters.'),
  })
}
