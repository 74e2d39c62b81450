/** Locks on the isolation points of the demo's permits: hung, verified and taken off again. */
import type { boxLock, isolationPoint, lockInUse } from '../../app/db/schema/index.ts'
import { at } from '../demo-time.ts'
import { hoursAfter } from '../log/entry.ts'
import { PERSON_ID, type PersonKey } from '../people.ts'
import type { DemoPermit } from '../scenario/permits.ts'
import { LOCKS_MOVED, type PermitHistory } from './acts.ts'
import { peopleOf } from './crews.ts'
import { jobOf } from './jobs.ts'
import { plannedPoints } from './points.ts'
import type { Signatures } from './signatures.ts'

export interface LockRows {
  points: (typeof isolationPoint.$inferInsert & { id: number })[]
  inUse: (typeof lockInUse.$inferInsert)[]
  boxes: (typeof boxLock.$inferInsert & { id: number })[]
}

interface Step {
  by: PersonKey
  at: Date
}

interface Hung {
  tag: string
  isolates: string
  required: string
  purpose: 'to-heat' | 'to-work'
  lock: string
  applied: Step
  verified: Step
  /** Null while it hangs. */
  removed: Step | null
  note: string
}

const minutesAfter = (when: Date, minutes: number) => hoursAfter(when, minutes / 60)

/** Who has no sign-in acts through somebody who has, and who does not verify the same point. */
function witnessOf({ by }: Step, mate: PersonKey, verifier: PersonKey): PersonKey | null {
  if (by !== 'wendel') return null
  return mate === verifier ? 'odalys' : mate
}

/** Locks of the site's cabinet that older permits borrowed, L-020 to L-099 in turn. */
function cabinetLock(index: number): string {
  return `L-${String(20 + (index % 80)).padStart(3, '0')}`
}

const ELECTRICAL = /breaker|links? out|locked off/

/** Locks of a permit that was worked, in the order of its points. `taken` counts the cabinet's locks so far. */
function hungOn(permit: DemoPermit, history: PermitHistory, taken: number): Hung[] {
  const job = jobOf(permit)
  const { acceptedAt, handedBackAt } = history
  if (job === null || acceptedAt === null) return []
  const { holder, mate } = peopleOf(permit)
  const hung = plannedPoints(permit, job).map((point, index): Hung => {
    const electrical = ELECTRICAL.test(point.required)
    const crane = point.required.includes('key')
    const applied = minutesAfter(acceptedAt, -44 + 4 * index)
    return {
      ...point,
      lock: permit.locks?.[index] ?? cabinetLock(taken + index),
      applied: { by: electrical ? 'wendel' : crane ? holder : mate, at: applied },
      verified: { by: crane ? mate : holder, at: minutesAfter(applied, 7) },
      removed:
        handedBackAt === null
          ? null
          : {
              by: electrical ? 'wendel' : crane ? holder : mate,
              at: minutesAfter(handedBackAt, 4 + 2 * index),
            },
      note: '',
    }
  })
  if (permit.number === 'HSP-2026-030') return outputOfTheSet(hung)
  return permit.points === undefined ? hung : hungTwice(permit, hung)
}

/** The set's output was locked while bars were fitted, free for the bake, and is locked again since its end. */
function outputOfTheSet(hung: readonly Hung[]): Hung[] {
  return hung.flatMap((one) =>
    one.purpose === 'to-work'
      ? [
          {
            ...one,
            removed: { by: 'wendel' as const, at: at('2026-11-01 10:05') },
            note: 'Off for the bake; nothing was heated while it hung',
          },
          {
            ...one,
            applied: { by: 'wendel' as const, at: at('2026-11-08 23:33') },
            verified: { by: 'corwin' as const, at: at('2026-11-08 23:38') },
            removed: null,
          },
        ]
      : [one],
  )
}

/** Hung on the morning, off while the crane worked, and hung again as the scenario has it. */
function hungTwice({ points = [] }: DemoPermit, hung: readonly Hung[]): Hung[] {
  return hung.flatMap((one, index) => {
    const given = points[index]
    if (given === undefined) return [one]
    const { appliedBy, appliedAt, verifiedBy, verifiedAt } = given
    return [
      {
        ...one,
        applied: { ...one.applied, by: appliedBy },
        verified: { ...one.verified, by: verifiedBy },
        removed: { by: appliedBy, at: minutesAfter(LOCKS_MOVED.off, 2 * index) },
        note: 'Off while the crane brought in the last cover; nothing was energised',
      },
      {
        ...one,
        applied: { by: appliedBy, at: appliedAt },
        verified: { by: verifiedBy, at: verifiedAt },
        removed: null,
      },
    ]
  })
}

/** Adds a permit's locks to the rows. */
export function addLocks(
  rows: LockRows,
  permit: DemoPermit,
  permitId: number,
  history: PermitHistory,
  { sign }: Signatures,
): void {
  const { mate, holder } = peopleOf(permit)
  for (const one of hungOn(permit, history, rows.points.length)) {
    const id = rows.points.length + 1
    const subject = { kind: 'isolation-point', id: `${permit.number}/${one.tag}` }
    const witness = witnessOf(one.applied, mate, one.verified.by)
    const signer = (step: Step) => witnessOf(step, mate, one.verified.by) ?? step.by
    rows.points.push({
      id,
      permitId,
      tag: one.tag,
      isolates: one.isolates,
      required: one.required,
      purpose: one.purpose,
      lockNumber: one.lock,
      tagNumber: one.lock.replace('L', 'T'),
      appliedBy: PERSON_ID[one.applied.by],
      appliedAt: one.applied.at,
      appliedWitness: witness === null ? null : PERSON_ID[witness],
      appliedSignedActId: sign(
        signer(one.applied),
        one.applied.at,
        `apply isolation lock ${one.lock}`,
        subject,
      ),
      verifiedBy: PERSON_ID[one.verified.by],
      verifiedAt: one.verified.at,
      verifiedSignedActId: sign(
        one.verified.by,
        one.verified.at,
        `verify isolation lock ${one.lock}`,
        subject,
      ),
      releasedHow: ELECTRICAL.test(one.required)
        ? 'Earthed and shorted, then covered'
        : 'Nothing stored behind it',
      zeroEnergy: ELECTRICAL.test(one.required)
        ? '0.0 V between the ends and to earth'
        : 'Tried by hand: does not move',
      ...(one.removed === null
        ? {}
        : {
            removedBy: PERSON_ID[one.removed.by],
            removedAt: one.removed.at,
            removedWitness: witness === null ? null : PERSON_ID[witness],
            removedHow: 'owner' as const,
            removedSignedActId: sign(
              signer(one.removed),
              one.removed.at,
              `take away isolation lock ${one.lock}`,
              subject,
            ),
          }),
      note: one.note,
      revision: one.removed === null ? 2 : 3,
    })
    if (one.removed === null) {
      rows.inUse.push({ lockNumber: one.lock, permitId, pointId: id, since: one.applied.at })
    }
  }
  if (permit.handBackRefused !== undefined) addBox(rows, permitId, history, [holder, mate], sign)
}

/** Keys in a box, and the crew's own locks on it: the first on is the last off. */
function addBox(
  { boxes }: LockRows,
  permitId: number,
  { acceptedAt, handedBackAt }: PermitHistory,
  crew: PersonKey[],
  sign: Signatures['sign'],
): void {
  if (acceptedAt === null || handedBackAt === null) return
  for (const [index, owner] of crew.entries()) {
    const id = boxes.length + 1
    const subject = { kind: 'box-lock', id: String(id) }
    const onAt = minutesAfter(acceptedAt, -10 + index)
    const offAt = minutesAfter(handedBackAt, -24 - 2 * index)
    boxes.push({
      id,
      permitId,
      boxCode: 'BOX-2',
      lockNumber: `P-${String(PERSON_ID[owner]).padStart(2, '0')}`,
      ownerId: PERSON_ID[owner],
      primary: index === 0,
      onAt,
      onSignedActId: sign(owner, onAt, 'put a personal lock on a box', subject),
      offAt,
      offBy: PERSON_ID[owner],
      offHow: 'owner',
      offSignedActId: sign(owner, offAt, 'take a personal lock off a box', subject),
    })
  }
}
