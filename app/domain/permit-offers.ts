/** Which acts a permit's page offers to whom. The rules decide again when one is sent. */
import type { PermitActor, PermitFacts } from './permit-facts.ts'
import type { PermitAct } from './permit-words.ts'
import { standsInTheWay } from './permits.ts'

/** Acts that have their form on the permit's page, in the order of their buttons. */
export const OFFERED_ACTS = [
  'request',
  'approve',
  'return',
  'refuse',
  'accept',
  'revalidate',
  'hand-over',
  'hand-back',
  'extend',
  'made-safe',
  'resume',
  'cancel',
  'return-to-holder',
  'suspend',
  'withdraw',
  'discard',
] as const satisfies readonly PermitAct[]
export type OfferedAct = (typeof OFFERED_ACTS)[number]

/** Reasons that say that the act is for others altogether, and not that this person has lost it on this permit. */
const FOR_OTHERS: readonly string[] = ['no-draft', 'no-officer', 'not-named', 'not-holder', 'product']

/**
 * What stands in the way of an act for this person; null where the page does not offer it, because the permit is in
 * another state or the act is for other people. Somebody whose earlier part in the permit keeps them from an act is
 * offered it with the reason: they are told why, and who can, where they would look for it.
 */
export function offeredReasons(
  facts: PermitFacts,
  actor: PermitActor,
  act: OfferedAct,
  now: Date,
): string[] | null {
  // Whoever takes it over signs: its holder has nothing to fill in.
  if (act === 'hand-over' && facts.permit.holderId === actor.personId) return null
  const reasons = standsInTheWay(facts, actor, act, now)
  const hidden = reasons.some(
    ({ kind, code }) => kind === 'state' || (kind === 'person' && FOR_OTHERS.includes(code)),
  )
  return hidden ? null : reasons.map(({ text }) => text)
}

/** Reads the name of an act from an address. */
export function isOfferedAct(text: string | null | undefined): text is OfferedAct {
  return OFFERED_ACTS.some((act) => act === text)
}
