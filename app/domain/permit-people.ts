/**
 * Duties on a permit are separated per person and for good: whoever did one of two steps that two people have to do
 * cannot do the other, whatever roles they hold now and whoever they stand in for.
 */
import type { PermitActor, PermitFacts } from './permit-facts.ts'
import { personReason, type Reason, spanText } from './permit-reasons.ts'
import type { PermitAct } from './permit-words.ts'

/** Hours for which an approving role waits after a second person confirmed it, so that others can object. */
const APPROVING_WAIT_HOURS = 24

const HOUR_MS = 3_600_000

function did(facts: PermitFacts, personId: number, ...acts: readonly PermitAct[]): boolean {
  return facts.acts.some((each) => each.personId === personId && acts.includes(each.act))
}

/** Holder and deputies whom the officer approved by name; before an approval those whom the form names. */
export function namedHolders({ permit }: PermitFacts): number[] {
  const { holderId, deputyIds } = permit.approvedContent ?? permit.content
  return [...(holderId === null ? [] : [holderId]), ...deputyIds]
}

/** Whether a person has approved this permit, in whichever version. */
export function hasApproved(facts: PermitFacts, personId: number): boolean {
  return facts.permit.approvedBy === personId || did(facts, personId, 'approve')
}

function hasHeld(facts: PermitFacts, personId: number): boolean {
  return facts.permit.holderId === personId || did(facts, personId, 'accept', 'hand-over', 'hand-back')
}

export function asDrafter(actor: PermitActor): Reason[] {
  if (actor.mayDraft) return []
  return [
    personReason(
      'no-draft',
      'This takes a vacuum technician or engineer. Ask one of them; your role does not.',
    ),
  ]
}

/** An approving role in force, confirmed a day ago. */
export function asOfficer(actor: PermitActor, now: Date): Reason[] {
  if (!actor.mayApprove || actor.approvingSince === null) {
    return [
      personReason(
        'no-officer',
        'This takes a safety officer, whatever the rank of others. Ask one; priority can be set on the bake plan.',
      ),
    ]
  }
  const age = now.getTime() - actor.approvingSince.getTime()
  if (age >= APPROVING_WAIT_HOURS * HOUR_MS) return []
  return [
    personReason(
      'young-grant',
      `Your role as safety officer was confirmed ${spanText(Math.max(0, age))} ago and works ${APPROVING_WAIT_HOURS} h after that, so that others can object. Ask another officer.`,
    ),
  ]
}

/** An officer who has had no other part in this permit. */
export function asUninvolved(facts: PermitFacts, actor: PermitActor, now: Date): Reason[] {
  const { permit, points, plannerIds } = facts
  const me = actor.personId
  const reasons = asOfficer(actor, now)
  if (permit.createdBy === me || did(facts, me, 'draft', 'edit')) {
    reasons.push(personReason('own-draft', 'You wrote on this permit. Another officer has to decide on it.'))
  }
  if (permit.requestedBy === me || did(facts, me, 'request', 'change-terms')) {
    reasons.push(
      personReason('own-request', 'You asked for this permit. Another officer has to decide on it.'),
    )
  }
  if (plannerIds.includes(me)) {
    reasons.push(
      personReason('own-plan', 'You planned the bake that it is for. Another officer has to decide on it.'),
    )
  }
  const { holderId, deputyIds } = permit.content
  if (holderId === me || deputyIds.includes(me) || namedHolders(facts).includes(me) || hasHeld(facts, me)) {
    reasons.push(
      personReason(
        'own-holding',
        'You are its holder or a deputy, or were. Another officer has to decide on it.',
      ),
    )
  }
  const verified = points.filter(({ verifiedBy }) => verifiedBy === me).map(({ tag }) => tag)
  if (verified.length > 0) {
    reasons.push(
      personReason(
        'own-verification',
        `You verified ${verified.join(', ')}: who verifies isolation does not approve. Another officer has to decide on it.`,
      ),
    )
  }
  return reasons
}

/** An officer who looks at a place that somebody else has held: who approved the permit may inspect. */
export function asInspector(facts: PermitFacts, actor: PermitActor, now: Date): Reason[] {
  const reasons = asOfficer(actor, now)
  if (hasHeld(facts, actor.personId)) {
    reasons.push(
      personReason(
        'own-holding',
        'You have held this permit yourself. An officer who has not looks at the place instead.',
      ),
    )
  }
  return reasons
}

/** Holder or deputy, by the name that an officer approved, and nobody who has approved this permit. */
export function asNamed(facts: PermitFacts, actor: PermitActor): Reason[] {
  const reasons: Reason[] = []
  if (!namedHolders(facts).includes(actor.personId)) {
    reasons.push(
      personReason(
        'not-named',
        'This takes the permit holder or a deputy, as named when it was approved. Nobody signs for somebody else: have one of them sign in, or change the terms so that you are named.',
      ),
    )
  }
  if (hasApproved(facts, actor.personId)) {
    reasons.push(
      personReason('own-approval', 'You approved this permit; who approves does not hold it. A deputy can.'),
    )
  }
  return reasons
}

/** The one person who holds the permit now. */
export function asHolder(facts: PermitFacts, actor: PermitActor): Reason[] {
  if (facts.permit.holderId === actor.personId) return []
  return [
    personReason(
      'not-holder',
      'This takes the person who holds the permit now. Nobody signs for somebody else: have them sign in, or take it over from them first if you are named as holder or deputy.',
    ),
  ]
}
