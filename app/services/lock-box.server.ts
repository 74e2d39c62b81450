/** Personal locks on a permit's lock box: one a person, the primary's first and last. Every step is signed and kept. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  type BoxRow,
  claimLock,
  freeLock,
  insertBoxRow,
  listBoxRows,
  listPointRows,
  updateBoxOff,
} from '../db/queries/isolation-points.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand, may } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { type Doers, lockInUseRefusal } from '../domain/isolation-locks.ts'
import { type BoxLock, boxOffRefusals, boxOnRefusals } from '../domain/lock-box.ts'
import type { LockStep } from '../domain/schemas/lock-step.ts'
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
export type BoxStep = Of<'box-on'> | Of<'box-off'> | Of<'box-off-absent'>

/**
 * Puts a personal lock on the box or takes one off.
 *
 * @returns one sentence for the person
 * @throws DomainError forbidden, not-found, not-acceptable-now (every reason in `fields.form`), conflict,
 *   signature-refused
 */
export async function takeBoxStep(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  step: BoxStep,
): Promise<string> {
  demand(actor, step.act === 'box-off-absent' ? 'permit:clear-lock' : 'permit:lock')
  const judged = await judgeBox(db, actor, now, await permitOf(db, number), step)
  const subject: SignedSubject = {
    meaning: `${step.act === 'box-on' ? 'put personal lock on' : 'take personal lock off'} the lock box: ${judged.lockNumber}`,
    subjectKind: 'lock-box',
    subjectId: number,
  }
  const signed = await signAct(db, { actor, password: step.password, now, ...subject })
  return tx(db, async (inside) => {
    const permit = await lockedPermit(inside, number)
    const found = await judgeBox(inside, actor, now, permit, step)
    const { id: signedActId } = await useSignedAct(inside, signed, { actor, now, ...subject })
    const witness =
      found.doers.by.personId === found.doers.signer.personId ? null : found.doers.signer.personId
    const detail =
      step.act === 'box-off-absent'
        ? { verifiedAbsent: step.verifiedAbsent, efforts: step.efforts, informed: step.informed }
        : null
    if (step.act === 'box-on') {
      await putOnBox(inside, { permit, step, now, found, witness, signedActId })
    } else {
      await takeOffBox(inside, { now, found, witness, signedActId, detail })
    }
    await writeRecord(inside, {
      at: now,
      actor,
      act: step.act === 'box-on' ? 'personal lock on the box' : 'personal lock off the box',
      subjectKind: 'permit',
      subjectId: number,
      after: { lock: found.lockNumber, owner: found.ownerName, box: found.boxCode, ...detail },
      signedActId,
    })
    return step.act === 'box-on'
      ? `${found.lockNumber} of ${found.ownerName} is on box ${found.boxCode}.`
      : `${found.lockNumber} of ${found.ownerName} is off the box.`
  })
}

interface Judged {
  lockNumber: string
  boxCode: string
  ownerName: string
  doers: Doers
  row: BoxRow | null
}

async function judgeBox(
  db: DbOrTx,
  actor: Actor,
  now: Date,
  permit: PermitRow,
  step: BoxStep,
): Promise<Judged> {
  const rows = await listBoxRows(db, permit.id)
  const box = rows.map(asBoxLock)
  const facts = { permit: lockPermitOf(permit, now), box }
  const signer = signerOf(actor)
  if (step.act === 'box-on') {
    const by = await lockPersonOf(db, step.by, actor, now)
    const { boxCode, lockNumber, primary } = step
    const locks = (await listPointRows(db, permit.id)).map(asLock)
    const inUse = await lockUseOf(db, lockNumber)
    const { points } = permit.content
    refuseFor(boxOnRefusals({ ...facts, by, signer, boxCode, lockNumber, primary, points, locks, inUse }))
    return { lockNumber, boxCode, ownerName: by.name, doers: { by, signer }, row: null }
  }
  const row = rows.find(({ id }) => id === step.boxLockId)
  if (row === undefined) {
    throw new DomainError('not-found', `${permit.number} has no such personal lock. Load the page again.`)
  }
  const absent = step.act === 'box-off-absent'
  const by = absent ? signer : await lockPersonOf(db, step.by, actor, now)
  const how = absent ? 'owner-absent' : 'owner'
  const mayClear = may(actor, 'permit:clear-lock')
  refuseFor(
    boxOffRefusals({ ...facts, by, signer, lock: asBoxLock(row), how, mayClear, ownerName: row.ownerName }),
  )
  const { lockNumber, boxCode, ownerName } = row
  return { lockNumber, boxCode, ownerName, doers: { by, signer }, row }
}

function asBoxLock(row: BoxRow): BoxLock {
  return { ...row, off: row.offAt !== null }
}

async function putOnBox(
  inside: DbOrTx,
  one: {
    permit: PermitRow
    step: Of<'box-on'>
    now: Date
    found: Judged
    witness: number | null
    signedActId: number
  },
): Promise<void> {
  const { permit, step, now, found } = one
  const { lockNumber } = found
  const boxLockId = await insertBoxRow(inside, {
    permitId: permit.id,
    boxCode: found.boxCode,
    lockNumber,
    ownerId: found.doers.by.personId,
    primary: step.primary,
    onAt: now,
    onWitness: one.witness,
    onSignedActId: one.signedActId,
  })
  if (await claimLock(inside, { lockNumber, permitId: permit.id, boxLockId, since: now })) return
  // Somebody hung the same lock elsewhere between the look and the claim.
  const refusal = lockInUseRefusal(lockNumber, await lockUseOf(inside, lockNumber))
  refuseFor([refusal ?? `${lockNumber} was in use a moment ago. Look again and type its number once more.`])
}

async function takeOffBox(
  inside: DbOrTx,
  one: { now: Date; found: Judged; witness: number | null; signedActId: number; detail: object | null },
): Promise<void> {
  const { row, lockNumber, doers } = one.found
  if (row === null) throw new Error(`${lockNumber} has no row to be taken off.`)
  const off = await updateBoxOff(inside, row.id, {
    offAt: one.now,
    offBy: doers.by.personId,
    offWitness: one.witness,
    offHow: one.detail === null ? 'owner' : 'owner-absent',
    offSignedActId: one.signedActId,
    removalDetail: one.detail,
  })
  if (!off)
    throw new DomainError('conflict', `${lockNumber} came off the box meanwhile. Load the page again.`)
  if (!(await freeLock(inside, lockNumber))) {
    throw new Error(`${lockNumber} was on the box but not on the list of locks in use.`)
  }
}
