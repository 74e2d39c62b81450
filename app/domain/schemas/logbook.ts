import { z } from 'zod'
import { ENTRY_KINDS } from '../logbook.ts'
import { siteInstant } from './instant.ts'

const text = z
  .string()
  .trim()
  .min(3, 'Write at least a few words: what was done or seen.')
  .max(8000, 'At most 8000 characters; write a second entry for the rest.')

/** A new entry: on a segment, or on the facility as a whole when `segment` is empty. */
export function newEntrySchema(zone: string) {
  return z.object({
    segment: z.string().max(12).default(''),
    kind: z.enum(ENTRY_KINDS, { error: 'Choose what kind of entry this is.' }),
    eventAt: siteInstant(zone),
    text,
    onChart: z
      .enum(['on'])
      .optional()
      .transform((value) => value === 'on'),
    password: z.string().min(1, 'Sign with your own password.'),
  })
}

export const AmendmentSchema = z.object({
  text,
  reason: z.string().trim().min(5, 'Say in a few words why it is amended.').max(500),
  password: z.string().min(1, 'Sign with your own password.'),
})
