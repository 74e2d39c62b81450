/**
 * Roles as dated grants: who gave them, when, until when. Nobody gains a role by their own hand: what an
 * administrator grants to herself waits until another person has confirmed it.
 *
 * A waiting grant is stored as withdrawn by nobody. Whoever works out the roles in force therefore finds it not in
 * force without knowing that grants can wait; confirming it is what lifts that.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  findPerson,
  type GrantRow,
  insertGrant,
  listGrantRows,
  listPeople,
  lockPeople,
  updateGrant,
} from '../db/queries/people.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { hoursAfterConfirmation, ROLE_LABELS, rolesAt } from '../domain/roles.ts'
import type { GrantForm } from '../domain/schemas/people.ts'
import { writeRecord } from './record.server.ts'
import { fieldFault } from './register-values.server.ts'

/** A form that was opened a while ago still counts as "from now on". */
const BACK_MS = 60 * 60_000
const HOUR_MS = 3_600_000

export type GrantStanding = 'waiting' | 'coming' | 'in-force' | 'ended'

/** Whether a grant waits for a second person. */
function isWaiting(grant: GrantRow): boolean {
  return (
    grant.revokedAt !== null &&
    grant.revokedById === null &&
    grant.confirmedAt === null &&
    grant.grantedById === grant.personId
  )
}

/** Where a grant stands at an instant. */
export function grantStanding(grant: GrantRow, at: Date): GrantStanding {
  if (isWaiting(grant)) return 'waiting'
  if (rolesAt([grant], at).length > 0) return 'in-force'
  return grant.startsAt > at && grant.revokedAt === null ? 'coming' : 'ended'
}

/**
 * Gives a role to a person. What somebody gives to themselves waits for a second person.
 *
 * @returns whether it waits
 * @throws DomainError forbidden, not-found, bad-input (in the past, held already, no account to use it with)
 */
export async function grantRole(
  db: Db,
  actor: Actor,
  now: Date,
  personId: number,
  form: GrantForm,
): Promise<{ waits: boolean }> {
  demand(actor, 'people:edit')
  if (form.startsAt.getTime() < now.getTime() - BACK_MS) {
    throw fieldFault({
      startsAt: 'A role is given from now on, not for the past. Give the present time or a later one.',
    })
  }
  const waits = personId === actor.personId
  await tx(db, async (inside) => {
    await lockPeople(inside)
    const person = await findPerson(inside, personId)
    if (person === null) throw new DomainError('not-found', `There is no account ${personId}.`)
    if (!person.signsIn)
      throw fieldFault({
        role: `${person.name} is only named on records and cannot sign in; a role would be of no use.`,
      })
    if (person.endsAt !== null && person.endsAt <= form.startsAt) {
      throw fieldFault({
        startsAt: `The account of ${person.name} has ended by then. Lift or move its end first.`,
      })
    }
    const startsAt = form.startsAt > now ? form.startsAt : now
    const same = (await listGrantRows(inside, { personId })).find(
      (grant) => grant.role === form.role && (isWaiting(grant) || rolesAt([grant], startsAt).length > 0),
    )
    if (same !== undefined) {
      throw fieldFault({
        role: `${person.name} ${isWaiting(same) ? 'waits for' : 'holds'} the role ${ROLE_LABELS[form.role]} already.`,
      })
    }
    await insertGrant(inside, {
      personId,
      role: form.role,
      startsAt,
      endsAt: form.until,
      grantedBy: actor.personId,
      grantedAt: now,
      reason: form.reason,
      ...(waits ? { revokedAt: now, revokeReason: 'waits for a second person' } : {}),
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: waits ? 'role asked for' : 'role granted',
      subjectKind: 'person',
      subjectId: String(personId),
      effectiveAt: startsAt,
      after: { person: person.name, role: form.role, from: startsAt, until: form.until },
      reason: form.reason,
    })
  })
  return { waits }
}

/**
 * Confirms or refuses a role that somebody has given to themselves. It begins with the confirmation, never before; one
 * that approves what others plan begins a day after it, so that there is time to object.
 *
 * @throws DomainError forbidden (also for the person concerned), not-found, conflict (it no longer waits)
 */
export async function decideGrant(
  db: Db,
  actor: Actor,
  now: Date,
  decision: { grantId: number; decision: 'confirm' | 'refuse'; reason: string },
): Promise<void> {
  demand(actor, 'grant:confirm')
  await tx(db, async (inside) => {
    await lockPeople(inside)
    const grant = await grantById(inside, decision.grantId)
    if (grant.personId === actor.personId || grant.grantedById === actor.personId) {
      throw new DomainError(
        'forbidden',
        'You gave yourself this role; it takes another person to confirm or refuse it.',
      )
    }
    if (!isWaiting(grant)) {
      const by = grant.confirmedBy ?? grant.revokedBy
      throw new DomainError(
        'conflict',
        `This no longer waits${by === null ? '' : `: ${by} has decided it`}. Nothing has been changed.`,
      )
    }
    const confirmed = decision.decision === 'confirm'
    const earliest = new Date(now.getTime() + hoursAfterConfirmation(grant.role) * HOUR_MS)
    const startsAt = grant.startsAt > earliest ? grant.startsAt : earliest
    if (confirmed && grant.endsAt !== null && grant.endsAt <= startsAt) {
      throw new DomainError(
        'conflict',
        'Its last day would be over before it began. Refuse it; it can be asked for again.',
      )
    }
    await updateGrant(
      inside,
      grant.id,
      confirmed
        ? {
            confirmedBy: actor.personId,
            confirmedAt: now,
            startsAt,
            revokedAt: null,
            revokeReason: null,
          }
        : { revokedBy: actor.personId, revokedAt: now, revokeReason: decision.reason },
    )
    await writeRecord(inside, {
      at: now,
      actor,
      act: confirmed ? 'role confirmed' : 'role refused',
      subjectKind: 'person',
      subjectId: String(grant.personId),
      effectiveAt: confirmed ? startsAt : null,
      before: { person: grant.person, role: grant.role, standing: 'waiting' },
      after: { person: grant.person, role: grant.role, standing: confirmed ? 'granted' : 'refused' },
      reason: decision.reason,
    })
  })
}

/**
 * Takes a role away, at once.
 *
 * @throws DomainError forbidden, not-found, conflict (ended already, or nobody would administer the site any more)
 */
export async function endGrant(
  db: Db,
  actor: Actor,
  now: Date,
  end: { grantId: number; reason: string },
  personId: number,
): Promise<void> {
  demand(actor, 'people:edit')
  await tx(db, async (inside) => {
    await lockPeople(inside)
    const grant = await grantById(inside, end.grantId)
    // A form of one person's page takes nothing from another.
    if (grant.personId !== personId) throw new DomainError('not-found', 'This person has no such grant.')
    if (grantStanding(grant, now) === 'ended') {
      throw new DomainError(
        'conflict',
        `This role has ended already${grant.revokedBy === null ? '' : `: ${grant.revokedBy} took it away`}.`,
      )
    }
    await updateGrant(inside, grant.id, {
      revokedBy: actor.personId,
      revokedAt: now,
      revokeReason: end.reason,
    })
    await refuseNoAdministrator(inside, now)
    await writeRecord(inside, {
      at: now,
      actor,
      act: 'role taken away',
      subjectKind: 'person',
      subjectId: String(grant.personId),
      effectiveAt: now,
      before: { person: grant.person, role: grant.role, until: grant.endsAt },
      after: { person: grant.person, role: grant.role, until: now },
      reason: end.reason,
    })
  })
}

async function grantById(inside: DbOrTx, grantId: number): Promise<GrantRow> {
  const [grant] = await listGrantRows(inside, { grantId })
  if (grant === undefined) throw new DomainError('not-found', `There is no grant ${grantId}.`)
  return grant
}

/**
 * Refuses what would leave the site without an administrator at an instant. Called after the change, inside its
 * transaction and behind the lock on all accounts.
 */
export async function refuseNoAdministrator(inside: DbOrTx, at: Date): Promise<void> {
  const [people, grants] = await Promise.all([listPeople(inside), listGrantRows(inside)])
  const left = people.filter(({ id, signsIn, endsAt }) => {
    if (!signsIn || (endsAt !== null && endsAt <= at)) return false
    return rolesAt(
      grants.filter(({ personId }) => personId === id),
      at,
    ).includes('administrator')
  })
  if (left.length > 0) return
  throw new DomainError(
    'conflict',
    'Nobody would be administrator any more, and nobody could make one. Give the role to another person first.',
  )
}
