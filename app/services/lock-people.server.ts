/** Who has done a step at a lock or a test, told by the person it is entered for and the person who is signed in. */
import type { DbOrTx } from '../db/client.server.ts'
import { findPerson, listGrantRows, listPeople } from '../db/queries/people.server.ts'
import type { Actor } from '../domain/actor.ts'
import type { LockPerson } from '../domain/isolation-locks.ts'
import { rolesAt, rolesHave } from '../domain/roles.ts'
import { fieldFault } from './register-values.server.ts'

/** The signed-in person, who signs. */
export function signerOf(actor: Actor): LockPerson {
  return { personId: actor.personId, name: actor.name, signsIn: true }
}

/**
 * The person who did a step.
 *
 * @param by null for the signed-in person
 * @throws DomainError bad-input when there is no such person
 */
export async function lockPersonOf(
  db: DbOrTx,
  by: number | null,
  actor: Actor,
  now: Date,
): Promise<LockPerson> {
  if (by === null || by === actor.personId) return signerOf(actor)
  const [person, grants] = await Promise.all([findPerson(db, by), listGrantRows(db, { personId: by })])
  if (person === null) throw fieldFault({ by: 'There is no such person. Choose one from the list.' })
  const inForce = person.signsIn && (person.endsAt === null || person.endsAt > now)
  // An account that does not reach these pages is no log-in here: a contractor's, for entries and photos only.
  const signsIn = inForce && rolesHave(rolesAt(grants, now), 'facility:view')
  return { personId: by, name: person.name, signsIn }
}

/** People for whom a witness may enter a step, by name. */
export async function peopleWithoutLogIn(
  db: DbOrTx,
  now: Date,
): Promise<{ personId: number; name: string }[]> {
  const [people, grants] = await Promise.all([listPeople(db), listGrantRows(db)])
  return people
    .filter(({ id, signsIn, endsAt }) => {
      const own = grants.filter(({ personId }) => personId === id)
      const inForce = signsIn && (endsAt === null || endsAt > now)
      return !(inForce && rolesHave(rolesAt(own, now), 'facility:view'))
    })
    .map(({ id, name }) => ({ personId: id, name }))
}
