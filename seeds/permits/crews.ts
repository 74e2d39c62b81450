/** Who does what on a permit of the demo. */
import type { PersonKey } from '../people.ts'
import type { DemoPermit } from '../scenario/permits.ts'

const MATES: Partial<Record<PersonKey, PersonKey>> = {
  pim: 'odalys',
  odalys: 'pim',
  corwin: 'nerys',
  nerys: 'corwin',
}

interface PermitPeople {
  holder: PersonKey
  deputy: PersonKey
  /** Works with the holder at the segment; isolates what the holder then verifies. */
  mate: PersonKey
  /** Has no sign-in: the mate enters those steps. */
  electrician: PersonKey
  /** Of the other crew. */
  attendant: PersonKey
}

/** The people of a permit: the holder's crew, the electrician, and somebody of the other crew to keep watch. */
export function peopleOf({ holder, deputy }: DemoPermit): PermitPeople {
  const mate = MATES[holder]
  if (mate === undefined) throw new Error(`${holder} belongs to no crew of the demo`)
  const attendant = holder === 'pim' || holder === 'odalys' ? 'nerys' : 'odalys'
  return { holder, deputy: deputy ?? mate, mate, electrician: 'wendel', attendant }
}
