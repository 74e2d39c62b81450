/** What stands against a permit, and the rulings of officers on it. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { insertRuling, listRulings, type RulingRow } from '../db/queries/permit-conflicts.server.ts'
import { listPlanners } from '../db/queries/permit-register.server.ts'
import { findPermit, lockPermit, type PermitRow } from '../db/queries/permits.server.ts'
import { listLimits } from '../db/queries/segments.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { exclusionReach, needsExclusion } from '../domain/permit-conflicts/facts.ts'
import { findConflicts } from '../domain/permit-conflicts.ts'
import type { ConflictFact } from '../domain/permit-facts.ts'
import { CLAIMING_PERMIT_STATES, ENDED_PERMIT_STATES, PERMIT_STATE_LABELS } from '../domain/permit-words.ts'
import { conflictFactsOf, limitsOf, readConflictGround } from './permit-conflicts-facts.server.ts'
import { writeRecord } from './record.server.ts'
import { signAct, useSignedAct } from './signature.server.ts'

/** As much of a conflict's words as a ruling keeps. */
const KEPT_FACTS = 1000

/**
 * Conflicts of a permit in what is left of its window, the gravest first, each with the last ruling on it. A ruling is
 * stale when the facts that it was given on read differently now. A permit that has ended has none.
 */
export async function readConflicts(db: DbOrTx, permit: PermitRow, now: Date): Promise<ConflictFact[]> {
  if (ENDED_PERMIT_STATES.includes(permit.state)) return []
  const ground = await readConflictGround(db, now, [permit.id])
  const rulings = await listRulings(db, permit.id)
  return findConflicts(await conflictFactsOf(db, permit, ground)).map((finding) => ({
    ...finding,
    ruling: rulingOn(
      finding.text,
      rulings.findLast(({ conflictKey }) => conflictKey === finding.key),
    ),
  }))
}

/** The last ruling on a conflict that reads as given; stale when it was given on other facts. */
export function rulingOn(text: string, last: RulingRow | undefined): ConflictFact['ruling'] {
  if (last === undefined) return null
  const { allowed, by, at } = last
  return { allowed, stale: last.facts !== text.slice(0, KEPT_FACTS), text: last.text, by, at }
}

/** An officer's ruling as it is given; the key names the conflict. */
export interface RulingForm {
  key: string
  allowed: boolean
  text: string
  password: string
  /** Revision of the permit that the officer looked at. */
  revision: number
}

/**
 * Rules on a conflict that waits for an officer, signed. It holds for the facts as they are now.
 *
 * @throws DomainError forbidden (no officer, or one who asked for, planned or holds it), not-found, conflict (the permit
 *   or the conflict has changed), not-acceptable-now (nothing to rule on), signature-refused
 */
export async function ruleOnConflict(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  form: RulingForm,
): Promise<void> {
  demand(actor, 'permit:approve')
  const seen = existing(await findPermit(db, number), number)
  await requireOpenTo(db, actor, seen, form, now)
  const subject = { meaning: 'rule on a conflict of a permit', subjectKind: 'permit', subjectId: number }
  const signed = await signAct(db, { actor, password: form.password, now, ...subject })
  await tx(db, async (inside) => {
    const permit = existing(await lockPermit(inside, number), number)
    const conflict = await requireOpenTo(inside, actor, permit, form, now)
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    const facts = conflict.text.slice(0, KEPT_FACTS)
    await insertRuling(inside, {
      permitId: permit.id,
      conflictKey: conflict.key,
      facts,
      allowed: form.allowed,
      text: form.text,
      ruledBy: actor.personId,
      ruledAt: now,
      signedActId: act.id,
    })
    await writeRecord(inside, {
      at: now,
      actor,
      act: form.allowed ? 'permit conflict allowed' : 'permit conflict not allowed',
      subjectKind: 'permit',
      subjectId: number,
      before: conflict.ruling === null ? null : { ruling: conflict.ruling },
      after: { conflict: conflict.key, facts, allowed: form.allowed, ruling: form.text },
      reason: form.text.slice(0, KEPT_FACTS),
      signedActId: act.id,
    })
  })
}

/** Metres of tunnel that nobody enters beyond both ends of a permit's segments; 0 where it does not get hot enough. */
export async function readExclusion(
  db: DbOrTx,
  { content }: PermitRow,
  now: Date,
): Promise<{ westM: number; eastM: number }> {
  const limits = limitsOf(await listLimits(db, now))
  return needsExclusion(content, limits) ? exclusionReach(content, limits) : { westM: 0, eastM: 0 }
}

function existing(permit: PermitRow | null, number: string): PermitRow {
  if (permit !== null) return permit
  throw new DomainError('not-found', `There is no permit ${number}.`)
}

/** The conflict, if this officer may rule on it now. */
async function requireOpenTo(
  db: DbOrTx,
  actor: Actor,
  permit: PermitRow,
  form: Pick<RulingForm, 'key' | 'revision'>,
  now: Date,
): Promise<ConflictFact> {
  await requireApart(db, actor, permit)
  if (!CLAIMING_PERMIT_STATES.includes(permit.state)) {
    throw new DomainError(
      'not-acceptable-now',
      `${permit.number} is ${PERMIT_STATE_LABELS[permit.state].toLowerCase()}. Conflicts are ruled on from its request until it has ended.`,
    )
  }
  if (permit.revision !== form.revision) {
    throw new DomainError(
      'conflict',
      `${permit.number} has changed since this page was loaded (it is now ${PERMIT_STATE_LABELS[permit.state].toLowerCase()}, revision ${permit.revision}). Look at it again before you rule; what you typed is kept below.`,
    )
  }
  const conflict = (await readConflicts(db, permit, now)).find(({ key }) => key === form.key)
  if (conflict === undefined) {
    throw new DomainError(
      'conflict',
      'This conflict is no longer there: its facts have changed since the page was loaded. Load the permit again and look at what stands against it now.',
    )
  }
  if (conflict.effect !== 'ruling') {
    throw new DomainError(
      'not-acceptable-now',
      conflict.effect === 'block'
        ? `${conflict.rule} cannot be allowed by a ruling. ${conflict.wayOut}`
        : `${conflict.rule} only has to be known; it waits for no ruling.`,
    )
  }
  return conflict
}

/** Whoever asked for a permit, wrote it, planned its bake or holds it does not rule on it, whatever their roles. */
async function requireApart(db: DbOrTx, actor: Actor, permit: PermitRow): Promise<void> {
  const { content } = permit
  const planId = content.planId ?? permit.planId
  const planners = planId === null ? [] : ((await listPlanners(db, [planId])).get(planId) ?? [])
  const reasons = [
    permit.requestedBy === actor.personId && 'asked for it',
    permit.createdBy === actor.personId && 'drew it up',
    planners.includes(actor.personId) && 'planned the bake that it rests on',
    [permit.holderId, content.holderId, ...content.deputyIds].includes(actor.personId) &&
      'hold it or stand in for its holder',
  ].filter((reason) => reason !== false)
  if (reasons.length === 0) return
  throw new DomainError(
    'forbidden',
    `You ${reasons.join(', and you ')}, so another safety officer has to rule on conflicts of ${permit.number}.`,
  )
}
