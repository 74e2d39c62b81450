/** One change to one account, as its page posts it: the form says by its intent which. */
import type { Db } from '../db/client.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { accountEndSchema, EndGrantSchema, grantSchema } from '../domain/schemas/people.ts'
import { endGrant, grantRole } from './grants.server.ts'
import { setAccountEnd } from './people.server.ts'
import type { Parse } from './register-change.server.ts'
import { getSite } from './site.server.ts'

/**
 * Makes the change that a posted form asks for.
 *
 * @returns what has been done, as a sentence
 * @throws DomainError whatever the change itself refuses; bad-input for a form that does not belong here
 */
export async function changePerson(
  db: Db,
  actor: Actor,
  now: Date,
  personId: number,
  typed: Readonly<Record<string, string>>,
  parse: Parse,
): Promise<string> {
  if (!Number.isSafeInteger(personId)) throw new DomainError('not-found', 'There is no such account.')
  const { timeZone } = await getSite(db)
  if (typed.intent === 'grant') {
    const { waits } = await grantRole(db, actor, now, personId, parse(grantSchema(timeZone), typed))
    return waits ? 'Asked for. It holds once another person has confirmed it.' : 'Role given.'
  }
  if (typed.intent === 'end-grant') {
    await endGrant(db, actor, now, parse(EndGrantSchema, typed), personId)
    return 'Role taken away.'
  }
  if (typed.intent === 'account-end') {
    await setAccountEnd(db, actor, now, personId, parse(accountEndSchema(timeZone), typed))
    return 'End of the account saved.'
  }
  throw new DomainError(
    'bad-input',
    'This page has no such form; nothing has been saved. Open it again from People.',
  )
}
