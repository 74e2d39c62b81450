/**
 * The form of an act on a permit: text as it was posted, made into values. What an act has to say, and whether it may
 * be done, is judged with the permit's facts (domain/permits.ts), so that all reasons are told at once.
 */
import { z } from 'zod'
import type { PermitAct } from '../permit-words.ts'
import { siteInstant } from './instant.ts'

/** What is done with a form of its own; the rest is done by editing or by time. */
export const FORM_ACTS = [
  'request',
  'return',
  'refuse',
  'approve',
  'withdraw',
  'discard',
  'site-check',
  'accept',
  'hand-over',
  'revalidate',
  'extend',
  'suspend',
  'made-safe',
  'resume',
  'hand-back',
  'return-to-holder',
  'cancel',
] as const satisfies readonly PermitAct[]
export type FormAct = (typeof FORM_ACTS)[number]

type Reader = (typed: string | undefined) => unknown

const text: Reader = (typed) => typed ?? ''
const tick: Reader = (typed) => typed === 'on' || typed === 'yes'
/** Left out where nothing was chosen, so that the form asks for it. */
const choice: Reader = (typed) => (typed === undefined || typed === '' ? undefined : typed)
/** What is no number goes on as text, which the rules refuse with their own words. */
const figure: Reader = (typed) => {
  const plain = (typed ?? '').trim().replace('−', '-').replace(',', '.')
  return plain === '' || Number.isNaN(Number(plain)) ? choice(typed) : Number(plain)
}

const FIELDS: Partial<Record<FormAct, Record<string, Reader>>> = {
  approve: { terms: text },
  'site-check': { barriersPlaced: tick, signsPosted: tick, text },
  accept: { onSite: tick },
  'hand-over': { outgoingId: figure, how: choice, readBack: tick },
  revalidate: { onSite: tick },
  extend: { hours: figure, recheck: text },
  'made-safe': { who: text, how: text },
  'hand-back': {
    outcome: choice,
    plantState: text,
    peopleClear: tick,
    toolsOut: tick,
    hottestC: figure,
    locks: choice,
    locksText: text,
  },
  cancel: { inspection: text, lessons: text },
}

/**
 * Values of an act's form. Fields are named as in domain/permit-act-details.ts.
 *
 * @param zone of the site, in which times are typed
 */
export function permitActSchema(zone: string) {
  const instant = siteInstant(zone)
  return z
    .object({
      act: z.enum(FORM_ACTS, 'Choose what is to be done with this permit.'),
      revision: z.coerce
        .number('This page is not whole any more. Load it again.')
        .int('This page is not whole any more. Load it again.')
        .min(1, 'This page is not whole any more. Load it again.'),
      reason: z.string().trim().default(''),
      password: z.string().default(''),
    })
    .catchall(z.string().optional())
    .transform(({ act, revision, reason, password, ...typed }, context) => {
      const detail: Record<string, unknown> = {}
      for (const [name, read] of Object.entries(FIELDS[act] ?? {})) detail[name] = read(typed[name])
      if (act === 'made-safe') {
        const at = instant.safeParse(typed.at ?? '')
        if (at.success) detail.at = at.data.toISOString()
        else
          for (const { message } of at.error.issues)
            context.addIssue({ code: 'custom', path: ['at'], message })
      }
      return { act, revision, reason, password, detail }
    })
}
