/** What is to be done next at a segment, in one sentence for somebody with gloves on and a tablet in one hand. */
import { ENDED_PERMIT_STATES, type PermitState } from './permit-words.ts'

export interface AtSite {
  state: PermitState
  /** Points that the permit asks for, and those that are locked and verified. */
  points: number
  held: number
  /** Tests that the permit asks for, and those that are good and in date. */
  tests: number
  good: number
  /** Whether barriers and signs have been checked since the permit was approved or suspended. */
  checked: boolean
  locksOut: number
  /** Current validity in words; empty where there is none. */
  until: string
}

/** Where the next step is done. */
export type SitePlace = 'locks' | 'tests' | 'check' | 'permit' | 'heating' | 'none'

export interface NextStep {
  place: SitePlace
  text: string
}

/** The next step at the site. What the rules of the permit say outranks it; this only points the way. */
export function nextAtSite(site: AtSite): NextStep {
  const { state, points, held, tests, good, checked, locksOut, until } = site
  switch (state) {
    case 'draft':
    case 'returned':
      return { place: 'permit', text: 'Nothing to do here yet: it is being written.' }
    case 'requested':
      return locksOut > 0
        ? {
            place: 'permit',
            text: 'Its terms are being changed. Locks stay on; no work until it is approved and accepted anew.',
          }
        : { place: 'permit', text: 'Wait for a safety officer’s decision. No locks yet.' }
    case 'approved':
      if (held < points) {
        const open = points - held
        return {
          place: 'locks',
          text: `Lock and verify ${open} isolation ${open === 1 ? 'point' : 'points'}.`,
        }
      }
      if (good < tests) return { place: 'tests', text: `${testsWord(tests - good)} to be taken.` }
      if (!checked) return { place: 'check', text: 'Check barriers and signs.' }
      return { place: 'permit', text: 'Ready for the holder to accept, here at the segment.' }
    case 'issued':
      if (good < tests) return { place: 'tests', text: `${testsWord(tests - good)} due.` }
      return {
        place: 'permit',
        text: until === '' ? 'Live.' : `Live until ${until}; revalidate before then.`,
      }
    case 'suspended':
      if (good < tests) return { place: 'tests', text: `Work is stopped. ${testsWord(tests - good)} due.` }
      if (!checked) return { place: 'check', text: 'Work is stopped. Check barriers and signs again.' }
      return { place: 'permit', text: 'Work is stopped. Only an officer lets it go on.' }
    case 'expired':
      return { place: 'heating', text: 'Time has run out: see that heating is off, say so, and hand back.' }
    case 'handed-back':
      return locksOut > 0
        ? {
            place: 'locks',
            text: `${locksOut} ${locksOut === 1 ? 'lock hangs' : 'locks hang'} still. Owners take them away.`,
          }
        : { place: 'permit', text: 'All locks are off. An officer inspects and cancels.' }
    default:
      return locksOut > 0 && ENDED_PERMIT_STATES.includes(state)
        ? { place: 'locks', text: 'It is over, and locks hang still. Owners take them away.' }
        : { place: 'none', text: 'It is over. Nothing is left to do here.' }
  }
}

function testsWord(count: number): string {
  return `${count} ${count === 1 ? 'test' : 'tests'}`
}
