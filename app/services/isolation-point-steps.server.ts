/**
 * Locks at the isolation points of a permit: put on, verified by somebody else, taken away by their owner, or given over
 * to another permit. Every step is signed and kept. Ebbline writes down what was locked; it locks nothing.
 */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  claimLock,
  freeLock,
  insertPointRow,
  listBoxRows,
  listPointRows,
  moveLock,
  type PointRow,
  updatePointRow,
} from '../db/queries/isolation-points.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import {
  applyRefusals,
  type Doers,
  lockInUseRefusal,
  pointToTakeOver,
  removeRefusals,
  transferRefusals,
  verifyRefusals,
} from '../domain/isolation-locks.ts'
import type { LockStep } from '../domain/schemas/lock-step.ts'
import { readHeating } from './heating.server.ts'
import {
  asLock,
  lockedPermit,
  lockPermitOf,
  lockUseOf,
  permitOf,
  refuseFor,
} from './isolation-points.server.ts'
import { lockPersonOf, signerOf } from './lock-people.server.ts'
import { writeRecord } from './record.server.ts'
import { type SignedSubject, signAct, useSignedAct } from './signature.server.ts'

type Of<Act extends LockStep['act']> = Extract<LockStep, { act: Act }>
export type PointStep = Of<'apply'> | Of<'verify'> | Of<'remove'> | Of<'remove-absent'> | Of<'transfer'>

/**
 * Takes one step at a point of a permit.
 *
 * @returns one sentence for the person
 * @throws DomainError forbidden, not-found, not-acceptable-now (every reason in `fields.form`), conflict (somebody else
 *   was first), signature-refused
 */
export async function takePointStep(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  step: PointStep,
): Promise<string> {
  demandStep(actor, step)
  const judge = (inside: DbOrTx, permit: PermitRow) => judgeStep(inside, actor, now, permit, step)
  const permit = await permitOf(db, number)
  const judged = await judge(db, permit)
  const subject: SignedSubject = {
    meaning: `${MEANINGS[step.act]} ${judged.lockNumber}`,
    subjectKind: 'isolation-point',
    subjectId: `${number}/${judged.tag}`,
  }
  const signed = await signAct(db, { actor, password: step.password, now, ...subject })
  return tx(db, async (inside) => {
    const fresh = await lockBoth(inside, number, step)
    const found = await judge(inside, fresh)
    const act = await useSignedAct(inside, signed, { actor, now, ...subject })
    return perform(inside, { actor, now, permit: fresh, step, found, signedActId: act.id })
  })
}

const MEANINGS: Record<PointStep['act'], string> = {
  apply: 'apply isolation lock',
  verify: 'verify isolation lock',
  remove: 'take away isolation lock',
  'remove-absent': 'take away, its owner absent, isolation lock',
  transfer: 'transfer isolation lock',
}

function demandStep(actor: Actor, step: PointStep): void {
  if (step.act === 'remove-absent') demand(actor, 'permit:clear-lock')
  else if (step.act !== 'transfer' || !may(actor, 'permit:clear-lock')) demand(actor, 'permit:lock')
}

/** A transfer concerns two permits; their rows are locked in one order, or two transfers could wait for each other. */
async function lockBoth(inside: DbOrTx, number: string, step: PointStep): Promise<PermitRow> {
  if (step.act !== 'transfer') return lockedPermit(inside, number)
  for (const one of [number, step.to].toSorted()) await lockedPermit(inside, one)
  return permitOf(inside, number)
}

interface Judged {
  tag: string
  lockNumber: string
  doers: Doers
  /** The lock's row, but for a lock that is only now put on. */
  row: PointRow | null
  to: { permit: PermitRow; tag: string } | null
}

async function judgeStep(
  db: DbOrTx,
  actor: Actor,
  now: Date,
  permit: PermitRow,
  step: PointStep,
): Promise<Judged> {
  const rows = await listPointRows(db, permit.id)
  const locks = rows.map(asLock)
  const facts = { permit: lockPermitOf(permit, now), locks, onBox: await countOnBox(db, permit.id) }
  const signer = signerOf(actor)
  if (step.act === 'apply') {
    const { tag, lockNumber } = step
    const point = permit.content.points.find((one) => one.tag === tag)
    const by = await lockPersonOf(db, step.by, actor, now)
    const inUse = await lockUseOf(db, lockNumber)
    refuseFor(applyRefusals({ ...facts, by, signer, point, tag, lockNumber, inUse }))
    return { tag, lockNumber, doers: { by, signer }, row: null, to: null }
  }
  const row = rows.find(({ id }) => id === step.pointId)
  if (row === undefined) {
    throw new DomainError('not-found', `${permit.number} has no such lock. Load the page again.`)
  }
  if (row.revision !== step.revision) throw overtaken(row)
  const lock = asLock(row)
  const owner = await lockPersonOf(db, row.appliedBy, actor, now)
  const boxed = permit.content.points.find(({ tag }) => tag === row.tag)?.boxed ?? false
  const mayClear = may(actor, 'permit:clear-lock')
  const judged = { tag: row.tag, lockNumber: row.lockNumber, row }
  if (step.act === 'verify') {
    const by = await lockPersonOf(db, step.by, actor, now)
    refuseFor(verifyRefusals({ ...facts, by, signer, lock }))
    return { ...judged, doers: { by, signer }, to: null }
  }
  if (step.act === 'transfer') {
    const to = await permitOf(db, step.to)
    const toPoints = to.content.points
    refuseFor(
      transferRefusals({
        ...facts,
        lock,
        boxed,
        to: lockPermitOf(to, now),
        toPoints,
        signer,
        owner,
        mayClear,
      }),
    )
    const point = pointToTakeOver(lock, toPoints)
    if (point === undefined) throw new Error(`${step.to} was found to list the point and does not.`)
    return { ...judged, doers: { by: owner, signer }, to: { permit: to, tag: point.tag } }
  }
  const absent = step.act === 'remove-absent'
  const by = absent ? signer : await lockPersonOf(db, step.by, actor, now)
  const heating = await readHeating(db, permit.content.segments, now)
  const how = absent ? 'owner-absent' : 'owner'
  refuseFor(
    removeRefusals({ ...facts, by, signer, lock, boxed, heating, how, mayClear, ownerName: owner.name }),
  )
  return { ...judged, doers: { by, signer }, to: null }
}

async function countOnBox(db: DbOrTx, permitId: number): Promise<number> {
  return (await listBoxRows(db, permitId)).filter(({ offAt }) => offAt === null).length
}

interface Performance {
  actor: Actor
  now: Date
  permit: PermitRow
  step: PointStep
  found: Judged
  signedActId: number
}

async function perform(inside: DbOrTx, performance: Performance): Promise<string> {
  const { actor, now, permit, step, found, signedActId } = performance
  const { lockNumber, tag, doers, row } = found
  const witness = doers.by.personId === doers.signer.personId ? null : doers.signer.personId
  const record = (what: string, after: object, reason = '') =>
    writeRecord(inside, {
      at: now,
      actor,
      act: what,
      subjectKind: 'permit',
      subjectId: permit.number,
      after: {
        point: tag,
        lock: lockNumber,
        ...(witness === null ? {} : { doneBy: doers.by.name }),
        ...after,
      },
      reason,
      signedActId,
    })
  if (step.act === 'apply') {
    await putOn(inside, performance, witness)
    await record('isolation lock applied', { tagNumber: step.tagNumber }, step.note)
    return `${lockNumber} applied at ${tag}. Somebody else verifies it now.`
  }
  if (row === null) throw new Error(`A step at ${tag} has no lock to be taken on.`)
  if (step.act === 'verify') {
    const { releasedHow, zeroEnergy } = step
    const change = { verifiedBy: doers.by.personId, verifiedAt: now, verifiedWitness: witness }
    await changed(inside, step, { ...change, verifiedSignedActId: signedActId, releasedHow, zeroEnergy })
    await record('isolation lock verified', { releasedHow, zeroEnergy })
    return `${lockNumber} at ${tag} verified.`
  }
  const removal = {
    removedBy: doers.by.personId,
    removedAt: now,
    removedWitness: witness,
    removedSignedActId: signedActId,
  }
  if (step.act === 'transfer') {
    const to = await giveOver(inside, performance, row)
    // Whoever signs a transfer does it; the lock stays its owner's.
    await changed(inside, step, {
      ...removal,
      removedBy: actor.personId,
      removedWitness: null,
      removedHow: 'transferred',
      transferredToId: to.id,
    })
    await record('isolation lock transferred', { to: to.number, toPoint: to.tag }, step.note)
    return `${lockNumber} now hangs for ${to.number} at ${to.tag}, to be verified there.`
  }
  if (step.act === 'remove-absent') {
    const { verifiedAbsent, efforts, informed } = step
    const removalDetail = { verifiedAbsent, efforts, informed }
    await changed(inside, step, { ...removal, removedHow: 'owner-absent', removalDetail })
    await record('isolation lock taken away, owner absent', { owner: row.appliedByName, ...removalDetail })
  } else {
    const note = step.note === '' ? row.note : step.note
    await changed(inside, step, { ...removal, removedHow: 'owner', note })
    await record('isolation lock taken away', {}, step.note)
  }
  if (!(await freeLock(inside, lockNumber))) {
    throw new Error(
      `${lockNumber} hangs at ${tag} of ${permit.number} but was not on the list of locks in use.`,
    )
  }
  return `${lockNumber} taken away from ${tag}.`
}

async function putOn(
  inside: DbOrTx,
  { now, permit, step, found, signedActId }: Performance,
  appliedWitness: number | null,
): Promise<void> {
  const point = permit.content.points.find(({ tag }) => tag === found.tag)
  if (point === undefined || step.act !== 'apply') throw new Error(`${found.tag} is no point to be locked.`)
  const { lockNumber } = found
  const pointId = await insertPointRow(inside, {
    permitId: permit.id,
    tag: point.tag,
    isolates: point.isolates,
    required: point.required,
    purpose: point.purpose,
    lockNumber,
    tagNumber: step.tagNumber,
    appliedBy: found.doers.by.personId,
    appliedAt: now,
    appliedWitness,
    appliedSignedActId: signedActId,
    note: step.note,
  })
  if (await claimLock(inside, { lockNumber, permitId: permit.id, pointId, since: now })) return
  // Somebody hung the same lock elsewhere between the look and the claim.
  const inUse = await lockUseOf(inside, lockNumber)
  const refusal = lockInUseRefusal(lockNumber, inUse)
  refuseFor([refusal ?? `${lockNumber} was in use a moment ago. Look again and type its number once more.`])
}

async function giveOver(
  inside: DbOrTx,
  { found }: Performance,
  row: PointRow,
): Promise<{ id: number; number: string; tag: string }> {
  const { to } = found
  const point = to?.permit.content.points.find(({ tag }) => tag === to.tag)
  if (to === null || point === undefined) throw new Error(`${row.lockNumber} has nowhere to go.`)
  const id = await insertPointRow(inside, {
    permitId: to.permit.id,
    tag: point.tag,
    isolates: point.isolates,
    required: point.required,
    purpose: point.purpose,
    lockNumber: row.lockNumber,
    tagNumber: row.tagNumber,
    // It hangs as it hung: the same owner, since the same time.
    appliedBy: row.appliedBy,
    appliedAt: row.appliedAt,
    appliedWitness: row.appliedWitness,
    appliedSignedActId: row.appliedSignedActId,
    transferredToId: row.id,
    note: `Taken over from ${row.permitNumber}, ${row.tag}`,
  })
  if (!(await moveLock(inside, row.lockNumber, { permitId: to.permit.id, pointId: id }))) {
    throw new Error(`${row.lockNumber} hangs but was not on the list of locks in use.`)
  }
  return { id, number: to.permit.number, tag: point.tag }
}

async function changed(
  inside: DbOrTx,
  step: { pointId: number; revision: number },
  change: Parameters<typeof updatePointRow>[2],
): Promise<void> {
  if (await updatePointRow(inside, { id: step.pointId, revision: step.revision }, change)) return
  throw new DomainError('conflict', 'This lock has changed since the page was loaded. Look at it again.')
}

function overtaken(row: PointRow): DomainError {
  const said =
    row.removedAt !== null
      ? `${row.removedHow === 'transferred' ? 'was transferred' : 'was taken away'} by ${row.removedByName}`
      : `was verified by ${row.verifiedByName}`
  return new DomainError(
    'conflict',
    `${row.lockNumber} at ${row.tag} ${said} since this page was loaded. Look at it again before you sign.`,
  )
}
