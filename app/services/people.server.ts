/** Accounts: who has one, what roles they hold and held, new ones and their ends. */
import { hashPassword } from '../auth/password.ts'
import type { Db } from '../db/client.server.ts'
import { isDuplicate } from '../db/errors.server.ts'
import {
  deleteSessionsOf,
  findPerson,
  type GrantRow,
  insertGrant,
  insertPerson,
  listGrantRows,
  listPeople,
  lockPeople,
  type PersonRow,
  updatePersonEnd,
} from '../db/queries/people.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { type Role, rolesAt } from '../domain/roles.ts'
import type { AccountEndForm, NewPersonForm } from '../domain/schemas/people.ts'
import { type GrantStanding, grantStanding, refuseNoAdministrator } from './grants.server.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'
import { instantWriter } from './site.server.ts'

export interface PersonWithRoles extends PersonRow {
  roles: Role[]
  ended: boolean
}

export interface GrantWithStanding extends GrantRow {
  standing: GrantStanding
}

/** Everybody with the roles in force at an instant, and the grants that wait for a second person. */
export async function readPeople(
  db: Db,
  actor: Actor,
  at: Date,
): Promise<{ people: PersonWithRoles[]; waiting: number }> {
  demand(actor, 'people:view')
  const [people, grants] = await Promise.all([listPeople(db), listGrantRows(db)])
  return {
    people: people.map((person) => ({
      ...person,
      roles: rolesAt(
        grants.filter(({ personId }) => personId === person.id),
        at,
      ),
      ended: person.endsAt !== null && person.endsAt <= at,
    })),
    waiting: grants.filter((grant) => grantStanding(grant, at) === 'waiting').length,
  }
}

/**
 * One person with every grant.
 *
 * @throws DomainError forbidden, not-found
 */
export async function readPerson(
  db: Db,
  actor: Actor,
  personId: number,
  at: Date,
): Promise<{ person: PersonRow; grants: GrantWithStanding[] }> {
  demand(actor, 'people:view')
  const person = Number.isSafeInteger(personId) ? await findPerson(db, personId) : null
  if (person === null)
    throw new DomainError('not-found', 'There is no such account. People lists those there are.')
  const grants = await listGrantRows(db, { personId })
  return { person, grants: grants.map((grant) => ({ ...grant, standing: grantStanding(grant, at) })) }
}

/** Grants that wait for a second person; `own` marks those which the reader cannot decide. */
export async function readWaiting(db: Db, actor: Actor): Promise<(GrantRow & { own: boolean })[]> {
  demand(actor, 'grant:confirm')
  const grants = await listGrantRows(db, { held: true })
  return grants.map((grant) => ({
    ...grant,
    own: grant.personId === actor.personId || grant.grantedById === actor.personId,
  }))
}

/** How many grants wait that this person may decide: none for somebody without a say, and never their own. */
export async function countWaitingFor(db: Db, actor: Actor): Promise<number> {
  if (!may(actor, 'grant:confirm')) return 0
  return (await readWaiting(db, actor)).filter(({ own }) => !own).length
}

/**
 * Makes an account with its first role. A last day holds for both.
 *
 * @returns the new account's id
 * @throws DomainError forbidden, bad-input (name or address taken, last day over)
 */
export async function addPerson(db: Db, actor: Actor, now: Date, form: NewPersonForm): Promise<number> {
  demand(actor, 'people:edit')
  if (form.until !== null && form.until <= now)
    throw fieldFault({ until: 'This day is over. Give a day to come.' })
  const passwordHash = await hashPassword(form.password)
  try {
    return await tx(db, async (inside) => {
      await lockPeople(inside)
      refuseTaken(await listPeople(inside), form)
      const personId = await insertPerson(inside, {
        name: form.name,
        email: form.email,
        passwordHash,
        note: form.note,
        endsAt: form.until,
        createdAt: now,
      })
      await insertGrant(inside, {
        personId,
        role: form.role,
        startsAt: now,
        endsAt: form.until,
        grantedBy: actor.personId,
        grantedAt: now,
        reason: form.reason,
      })
      await writeRecord(inside, {
        at: now,
        actor,
        act: 'account made',
        subjectKind: 'person',
        subjectId: String(personId),
        effectiveAt: now,
        after: { name: form.name, email: form.email, role: form.role, until: form.until },
        reason: form.reason,
      })
      return personId
    })
  } catch (error) {
    if (!isDuplicate(error)) throw error
    throw fieldFault({
      email: 'Somebody has just made an account with this name or address. Look at the list of people.',
    })
  }
}

function refuseTaken(people: readonly PersonRow[], form: NewPersonForm): void {
  const same = (a: string | null, b: string) => a?.toLowerCase() === b.toLowerCase()
  const byEmail = people.find(({ email }) => same(email, form.email))
  if (byEmail !== undefined)
    throw fieldFault({ email: `${byEmail.name} signs in with this address already.` })
  if (people.some(({ name }) => same(name, form.name))) {
    throw fieldFault({
      name: 'There is a person of this name. Add a middle name or initial, so that records tell the two apart.',
    })
  }
}

/**
 * Sets, moves or lifts the end of an account. After it the person no longer signs in; what they wrote stays.
 *
 * @throws DomainError forbidden, not-found, conflict (changed meanwhile, or nobody would be administrator any more),
 *   bad-input (the day is over, or nothing changes)
 */
export async function setAccountEnd(
  db: Db,
  actor: Actor,
  now: Date,
  personId: number,
  form: AccountEndForm,
): Promise<void> {
  demand(actor, 'people:edit')
  const endsAt = form.now ? now : form.until
  if (endsAt !== null && endsAt < now)
    throw fieldFault({ until: 'This day is over. To end the account at once, tick the box.' })
  await tx(db, async (inside) => {
    await lockPeople(inside)
    const person = await findPerson(inside, personId)
    if (person === null) throw new DomainError('not-found', `There is no account ${personId}.`)
    const before = person.endsAt?.toISOString() ?? ''
    if (before !== form.seen) {
      const ends = person.endsAt === null ? 'open' : (await instantWriter(inside))(person.endsAt)
      throw new DomainError(
        'conflict',
        `The end of this account has been changed since you opened this form: it is now ${ends}. Nothing of yours has been saved; look again and do it anew.`,
      )
    }
    if (before === (endsAt?.toISOString() ?? ''))
      throw fieldFault({ until: 'This is the end that is recorded already.' })
    await updatePersonEnd(inside, personId, endsAt)
    if (endsAt !== null) await refuseNoAdministrator(inside, endsAt)
    if (endsAt !== null && endsAt <= now) await deleteSessionsOf(inside, personId)
    await writeRecord(inside, {
      at: now,
      actor,
      act: endsAt === null ? 'end of account lifted' : 'end of account set',
      subjectKind: 'person',
      subjectId: String(personId),
      effectiveAt: endsAt,
      before: { person: person.name, until: person.endsAt },
      after: { person: person.name, until: endsAt },
      reason: form.reason,
    })
  })
}
