/** Forms of isolation points and lock boxes: one step each, signed. */
import { z } from 'zod'
import { lockNumberOf } from '../isolation-locks.ts'

const password = z.string().min(1, 'Sign with your own password.')
const id = z.coerce.number().int().positive('This form is not whole any more. Load the page again.')
const revision = z.coerce
  .number()
  .int()
  .min(1, 'This form is not whole any more. Load the page again and look at the point first.')
const lockNumber = z
  .string()
  .trim()
  .min(1, 'Read the number from the lock and type it, such as L-114.')
  .max(20, 'At most 20 characters.')
  .regex(/^[\p{L}\p{N}][\p{L}\p{N} ._/–-]*$/u, 'Letters, figures and dashes only, such as L-114.')
  .transform(lockNumberOf)
/** Empty for the signed-in person. */
const by = z
  .string()
  .trim()
  .regex(/^\d*$/, 'Choose who did it from the list.')
  .default('')
  .transform((text) => (text === '' ? null : Number(text)))
const note = z.string().trim().max(500, 'At most 500 characters.').default('')
const sentence = (ask: string) => z.string().trim().min(10, ask).max(500, 'At most 500 characters.')

/** The written procedure for a lock whose owner is not there. */
const absence = {
  verifiedAbsent: sentence('Say in a sentence how you made sure that the owner is not on site.'),
  efforts: sentence('Say in a sentence what was done to reach the owner, and when.'),
  informed: sentence('Say in a sentence how the owner will know before they resume work.'),
}
const pointId = id

export const LockStepSchema = z.discriminatedUnion(
  'act',
  [
    z.object({
      act: z.literal('apply'),
      tag: z.string().trim().min(1, 'Choose the point.').max(20),
      lockNumber,
      tagNumber: z.string().trim().max(20, 'At most 20 characters.').default(''),
      by,
      note,
      password,
    }),
    z.object({
      act: z.literal('verify'),
      pointId,
      revision,
      releasedHow: z
        .string()
        .trim()
        .min(3, 'Say how stored energy was released; where there is none, say so.')
        .max(500, 'At most 500 characters.'),
      zeroEnergy: z
        .string()
        .trim()
        .min(3, 'Say what the try-start or zero-energy check gave.')
        .max(500, 'At most 500 characters.'),
      by,
      password,
    }),
    z.object({ act: z.literal('remove'), pointId, revision, by, note, password }),
    z.object({ act: z.literal('remove-absent'), pointId, revision, ...absence, password }),
    z.object({
      act: z.literal('transfer'),
      pointId,
      revision,
      to: z.string().trim().min(1, 'Choose the permit that takes the lock over.').max(20),
      note,
      password,
    }),
    z.object({
      act: z.literal('box-on'),
      boxCode: z
        .string()
        .trim()
        .min(1, 'Read the code from the box, such as BOX-2.')
        .max(20, 'At most 20 characters.')
        .transform((text) => text.toUpperCase()),
      lockNumber,
      primary: z
        .enum(['yes', 'no'], { error: 'Say whether this is the crew’s primary authorised person.' })
        .transform((answer) => answer === 'yes'),
      by,
      password,
    }),
    z.object({ act: z.literal('box-off'), boxLockId: id, by, password }),
    z.object({ act: z.literal('box-off-absent'), boxLockId: id, ...absence, password }),
  ],
  { error: 'Choose what was done.' },
)
export type LockStep = z.infer<typeof LockStepSchema>
