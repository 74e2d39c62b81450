/** How a permit stands, in the large letters that a posted copy needs. */
import { instantText } from '../instant-text.ts'
import { PERMIT_STATE_LABELS, type PermitState } from '../permit-words.ts'

export interface StandingFacts {
  /** As time has made it, written down or not. */
  state: PermitState
  version: number
  approvedVersion: number | null
  windowFrom: Date | null
  currentUntil: Date | null
  zone: string
}

const NOT_A_PERMIT: readonly PermitState[] = [
  'draft',
  'requested',
  'returned',
  'refused',
  'lapsed',
  'withdrawn',
  'discarded',
]

const MEANINGS: Record<Exclude<PermitState, 'issued'>, string> = {
  draft: 'Somebody is still writing this. Nothing may be heated on the strength of it.',
  requested: 'No officer has agreed to what it says now. Nothing may be heated on the strength of it.',
  returned: 'An officer has sent it back. Nothing may be heated on the strength of it.',
  refused: 'An officer has said no. Nothing may be heated on the strength of it.',
  approved:
    'An officer has agreed to a window. It is no leave to heat until its holder has accepted it at the segment.',
  suspended: 'Work is stopped. Only an officer lets it go on.',
  expired: 'Its time has run out, and it is never live again. Heating must be off.',
  'handed-back': 'Its holder has handed it back. Nothing may be heated on the strength of it.',
  cancelled: 'It has ended. Take every copy down.',
  lapsed: 'Nobody took it up in time. Take every copy down.',
  withdrawn: 'It was taken back. Take every copy down.',
  discarded: 'It was thrown away as a draft. Take every copy down.',
}

/** The large letters and what they mean; no large letters for a permit that is live. */
export function standingOf(facts: StandingFacts): { large: string | null; meaning: string } {
  const { state, version, approvedVersion, currentUntil, zone } = facts
  if (state === 'issued') {
    const until = currentUntil === null ? 'its end' : instantText(currentUntil, zone)
    return {
      large: null,
      meaning: `Live until ${until}, unless it is revalidated, suspended or handed back before.`,
    }
  }
  const word = PERMIT_STATE_LABELS[state].toUpperCase()
  const meaning = MEANINGS[state]
  if (approvedVersion !== null && approvedVersion !== version) {
    return {
      large: `${word}: APPROVAL VOID`,
      meaning: `Version ${approvedVersion} was approved and this is version ${version}: copies of the earlier one are superseded, take them down. ${meaning}`,
    }
  }
  if (NOT_A_PERMIT.includes(state)) return { large: `${word}: NOT A PERMIT`, meaning }
  if (state === 'approved') return { large: 'APPROVED: NOT YET LIVE', meaning }
  return { large: `${word}: NOT LIVE`, meaning }
}
