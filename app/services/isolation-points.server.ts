/** What hangs for a permit: its isolation points with their locks, as rules and pages are told of them. */
import type { DbOrTx } from '../db/client.server.ts'
import {
  findLockUse,
  listBoxRows,
  listPointRows,
  type PointRow,
} from '../db/queries/isolation-points.server.ts'
import { findPermit, lockPermit, type PermitRow } from '../db/queries/permits.server.ts'
import { DomainError } from '../domain/errors.ts'
import { type LockPermit, type LockUse, type PointLock, pointFacts } from '../domain/isolation-locks.ts'
import { stateAsOf } from '../domain/permit-clock.ts'
import type { PointFact } from '../domain/permit-facts.ts'
import type { LockRemoval, PointPurpose } from '../domain/permit-words.ts'
import { instantWriter } from './site.server.ts'

/** What the permit's rules are told of its points. */
export async function readPoints(db: DbOrTx, permit: PermitRow): Promise<PointFact[]> {
  return pointFacts(permit.content.points, (await listPointRows(db, permit.id)).map(asLock))
}

/** Numbers of the locks that still hang for a permit, at its points and on its lock box. */
export async function readLocksOut(db: DbOrTx, permitId: number): Promise<string[]> {
  const [points, box] = await Promise.all([listPointRows(db, permitId), listBoxRows(db, permitId)])
  return [
    ...points.filter(({ removedAt }) => removedAt === null).map(({ lockNumber }) => lockNumber),
    ...box.filter(({ offAt }) => offAt === null).map(({ lockNumber }) => lockNumber),
  ]
}

/** A step at a lock: who did it, before which witness, and when. */
export interface LockDone {
  by: string
  witness: string | null
  at: Date
}

/** One line of the table of points: a point with a lock that hangs there, or hung there last, or none yet. */
export interface PointLine {
  tag: string
  isolates: string
  required: string
  purpose: PointPurpose
  boxed: boolean
  /** Whether the permit still asks for it; a lock may hang at a point that its terms no longer name. */
  asked: boolean
  lock: {
    id: number
    revision: number
    number: string
    tagNumber: string
    ownerId: number
    owner: string
    applied: LockDone
    verified: (LockDone & { releasedHow: string; zeroEnergy: string }) | null
    removed: (LockDone & { how: LockRemoval | null }) | null
    note: string
  } | null
}

/** The points of a permit with what hangs there; points in the order of the form, then locks at points no longer asked for. */
export async function readPointTable(
  db: DbOrTx,
  permit: Pick<PermitRow, 'id' | 'content'>,
): Promise<PointLine[]> {
  const rows = await listPointRows(db, permit.id)
  const asked = permit.content.points
  const lines = asked.flatMap((point): PointLine[] => {
    const own = rows.filter(({ tag }) => tag === point.tag)
    const hanging = own.filter(({ removedAt }) => removedAt === null)
    const shown = hanging.length > 0 ? hanging : own.slice(-1)
    if (shown.length === 0) return [{ ...point, asked: true, lock: null }]
    return shown.map((row) => ({ ...point, asked: true, lock: lockLine(row) }))
  })
  const strays = rows
    .filter(({ tag, removedAt }) => removedAt === null && !asked.some((point) => point.tag === tag))
    .map((row): PointLine => ({ ...row, boxed: false, asked: false, lock: lockLine(row) }))
  return [...lines, ...strays].map(({ tag, isolates, required, purpose, boxed, asked: still, lock }) => ({
    tag,
    isolates,
    required,
    purpose,
    boxed,
    asked: still,
    lock,
  }))
}

function lockLine(row: PointRow): NonNullable<PointLine['lock']> {
  return {
    id: row.id,
    revision: row.revision,
    number: row.lockNumber,
    tagNumber: row.tagNumber,
    ownerId: row.appliedBy,
    owner: row.appliedByName,
    applied: { by: row.appliedByName, witness: row.appliedWitnessName, at: row.appliedAt },
    verified:
      row.verifiedAt === null
        ? null
        : {
            by: row.verifiedByName ?? '',
            witness: row.verifiedWitnessName,
            at: row.verifiedAt,
            releasedHow: row.releasedHow,
            zeroEnergy: row.zeroEnergy,
          },
    removed:
      row.removedAt === null
        ? null
        : {
            by: row.removedByName ?? '',
            witness: row.removedWitnessName,
            at: row.removedAt,
            how: row.removedHow,
          },
    note: row.note,
  }
}

/** A lock's row as the rules see it. */
export function asLock(row: PointRow): PointLock {
  return { ...row, permit: row.permitNumber, removed: row.removedAt !== null }
}

/** What the lock rules see of a permit: its state at this instant, also where the worker has not written it down yet. */
export function lockPermitOf(permit: PermitRow, now: Date): LockPermit {
  return { number: permit.number, approvedBy: permit.approvedBy, state: stateAsOf(permit, now).state }
}

/** The permit of a number. @throws DomainError not-found */
export async function permitOf(db: DbOrTx, number: string): Promise<PermitRow> {
  const permit = await findPermit(db, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  return permit
}

/** Locks the permit's row, so that steps at its points and acts on it come one after the other. */
export async function lockedPermit(inside: DbOrTx, number: string): Promise<PermitRow> {
  const permit = await lockPermit(inside, number)
  if (permit === null) throw new DomainError('not-found', `There is no permit ${number}.`)
  return permit
}

/** Throws when there is a reason against a step; all reasons at once. */
export function refuseFor(refusals: readonly string[]): void {
  if (refusals.length === 0) return
  throw new DomainError('not-acceptable-now', 'Nothing has been written down.', {
    fields: { form: [...refusals] },
  })
}

/** Where a lock hangs, as the rules are told. */
export async function lockUseOf(db: DbOrTx, lockNumber: string): Promise<LockUse | null> {
  const use = await findLockUse(db, lockNumber)
  if (use === null) return null
  const when = await instantWriter(db)
  return { permit: use.permit, place: use.place, since: when(use.since) }
}
