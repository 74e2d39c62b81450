/** Forms used at a heated segment: a test, a round, the caption of a photo. */
import { z } from 'zod'
import type { RequiredTest } from '../permit-content.ts'
import { PERMIT_TEST_KINDS } from '../permit-words.ts'
import { siteInstant } from './instant.ts'
import { lastDayValue, numberValue } from './register-values.ts'

const note = z.string().trim().max(500, 'At most 500 characters.').default('')
const by = z
  .string()
  .trim()
  .regex(/^\d*$/, 'Choose who tested from the list.')
  .default('')
  .transform((text) => (text === '' ? null : Number(text)))

/** How a form names one of the tests that a permit asks for. */
export function testKey({ kind, place }: Pick<RequiredTest, 'kind' | 'place'>): string {
  return `${kind}|${place}`
}

/** One test. Which figures and words it needs depends on its kind and is told by the service. */
export function permitTestSchema(zone: string) {
  return z.object({
    kind: z.enum(PERMIT_TEST_KINDS, { error: 'Choose what was tested.' }),
    place: z.string().trim().max(200, 'At most 200 characters.').default(''),
    value: numberValue({ min: -1000, max: 1e9, unit: '', optional: true }).optional(),
    /** The tester's word; nothing is chosen until somebody chooses. */
    says: z
      .enum(['passed', 'failed', ''], { error: 'Say whether it passed.' })
      .default('')
      .transform((word) => (word === '' ? null : word === 'passed')),
    instrument: z.string().trim().max(40, 'At most 40 characters.').default(''),
    calibrationDue: lastDayValue(zone).optional(),
    segment: z.string().trim().max(12).default(''),
    takenAt: siteInstant(zone),
    by,
    note,
  })
}
export type PermitTestForm = z.infer<ReturnType<typeof permitTestSchema>>

/** One round at a heated segment. */
export function permitRoundSchema(zone: string) {
  return z.object({
    at: siteInstant(zone),
    hottestC: numberValue({ min: -50, max: 600, unit: '°C', optional: true }),
    hottestAtM: numberValue({ min: 0, max: 100_000, unit: 'm', optional: true }),
    inOrder: z
      .enum(['yes', 'no'], { error: 'Say whether everything was in order.' })
      .transform((answer) => answer === 'yes'),
    text: z.string().trim().max(2000, 'At most 2000 characters.').default(''),
  })
}
export type PermitRoundForm = z.infer<ReturnType<typeof permitRoundSchema>>
