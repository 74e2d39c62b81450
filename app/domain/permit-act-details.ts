/** What an act on a permit has to say besides its reason; kept with the act for good. Times as UTC ISO 8601. */
import { z } from 'zod'
import type { PermitAct } from './permit-words.ts'

const text = z.string().trim().max(2000)
const nothing = z.object({})

function said(message: string) {
  return text.refine((value) => value.length >= 3, message)
}

function confirmed(message: string) {
  return z.boolean(message).refine((value) => value, message)
}

const onSite = z.object({
  onSite: confirmed('This is signed at the segment. Confirm that you are there.'),
})

const HandOverDetailSchema = z
  .object({
    /** Who held the permit until now. */
    outgoingId: z.number('Say who hands over.').int().positive('Say who hands over.'),
    how: z.enum(['at-site', 'by-phone'], 'Say whether you are together at the segment or on the phone.'),
    readBack: z.boolean().default(false),
  })
  .refine(({ how, readBack }) => how === 'at-site' || readBack, {
    path: ['readBack'],
    message: 'By phone the state of the work is read back, word for word, before the signature.',
  })

const HandBackDetailSchema = z
  .object({
    outcome: z.enum(['complete', 'stopped'], 'Say whether the work is complete or was stopped.'),
    plantState: said('Say in which state the plant is left.'),
    peopleClear: confirmed('It can be handed back when everybody is clear. Confirm that they are.'),
    toolsOut: confirmed('It can be handed back when tools and materials are out. Confirm that they are.'),
    hottestC: z
      .number('Give the hottest surface that you measured, in °C.')
      .min(-50, 'A surface of a tunnel is not colder than −50 °C.')
      .max(600, 'A surface of a tube is not hotter than 600 °C.'),
    locks: z.enum(['removed', 'left'], 'Say whether all locks are off or some are left on.'),
    locksText: text.default(''),
  })
  .refine(({ locks, locksText }) => locks === 'removed' || locksText.length >= 3, {
    path: ['locksText'],
    message: 'Say which locks are left on, and why.',
  })

export const PERMIT_ACT_DETAILS = {
  draft: nothing,
  edit: nothing,
  request: nothing,
  return: nothing,
  refuse: nothing,
  /** Terms that the officer adds to those of the form. */
  approve: z.object({ terms: text.default('') }),
  'change-terms': nothing,
  withdraw: nothing,
  discard: nothing,
  lapse: nothing,
  'site-check': z.object({
    barriersPlaced: z.boolean('Say whether the barriers stand.'),
    signsPosted: z.boolean('Say whether the signs are up.'),
    text: text.default(''),
  }),
  accept: onSite,
  'hand-over': HandOverDetailSchema,
  revalidate: onSite,
  extend: z.object({
    hours: z.number('Give the hours that are added.').positive('Give the hours that are added.').max(72),
    recheck: said('Say what was checked again for the longer window.'),
  }),
  suspend: nothing,
  'made-safe': z.object({
    who: said('Name who made it safe.').pipe(z.string().max(120)),
    at: z.iso.datetime('Say when it was made safe.'),
    how: said('Say how it was made safe.'),
  }),
  resume: nothing,
  expire: nothing,
  'hand-back': HandBackDetailSchema,
  'return-to-holder': nothing,
  cancel: z.object({
    inspection: said('Say what you found at the segment.'),
    lessons: text.default(''),
  }),
} as const satisfies Record<PermitAct, z.ZodType>

/** Checked detail of an act. */
export type ActDetail<Act extends PermitAct> = z.output<(typeof PERMIT_ACT_DETAILS)[Act]>
