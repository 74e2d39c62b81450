/**
 * Signing: a person gives their own password again for one act on one thing. What comes back is handed to the service
 * that performs the act, which uses it up in its own transaction. Being signed in is not enough, and neither is a
 * signature given for something else.
 */
import { createAttemptLimit } from '../auth/attempt-limit.server.ts'
import { verifyPassword } from '../auth/password.ts'
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  findSignedAct,
  findSigner,
  insertSignedAct,
  type SignedActRow,
  spendSignedAct,
} from '../db/queries/signed-acts.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { machineNow } from '../machine-time.server.ts'

/** A signature is for now: after this long, by the machine's clock, it is asked for again. */
const MAX_AGE_MS = 5 * 60_000

const wrongPasswords = createAttemptLimit(5, 5 * 60_000)

/** What is signed: the same words when the signature is given and when it is used. */
export interface SignedSubject {
  /** What the signature means, in words that stay on record ("amend a log entry"). */
  meaning: string
  subjectKind: string
  subjectId: string
}

/** A signature that has been given and not yet used. */
export interface SignedAct {
  readonly id: number
}

/**
 * Takes a signature.
 *
 * @throws DomainError signature-refused (wrong password, no password, account ended); rate-limited after five wrong
 *   passwords within five minutes
 */
export async function signAct(
  db: Db,
  request: { actor: Actor; password: string; now: Date } & SignedSubject,
): Promise<SignedAct> {
  const { actor, now } = request
  const machine = machineNow()
  const key = String(actor.personId)
  wrongPasswords.begin(key, machine)
  const signer = await findSigner(db, actor.personId)
  if (signer === null || signer.passwordHash === null) {
    throw refusal(`${actor.name} has no password to sign with. Ask the administrator for one.`)
  }
  if (!(await verifyPassword(signer.passwordHash, request.password))) {
    throw refusal('This is not your password. Nothing has been signed or saved; type it again.', true)
  }
  wrongPasswords.succeed(key)
  if (signer.endsAt !== null && signer.endsAt <= now) {
    throw refusal('This account has ended and can no longer sign. Ask the administrator.')
  }
  const id = await insertSignedAct(db, {
    personId: actor.personId,
    meaning: request.meaning,
    subjectKind: request.subjectKind,
    subjectId: request.subjectId,
    at: now,
    machineAt: machine,
  })
  return { id }
}

/**
 * Uses a signature up, in the transaction of the act it was given for: if that rolls back, the signature is free again.
 *
 * @throws DomainError signature-refused when it is somebody else's, for something else, too old or already used
 */
export async function useSignedAct(
  tx: DbOrTx,
  signed: SignedAct,
  use: { actor: Actor; now: Date } & SignedSubject,
): Promise<{ id: number }> {
  const row = await findSignedAct(tx, signed.id)
  if (row === null) throw refusal('There is no such signature. Sign again.')
  if (!isFor(row, use)) {
    throw refusal(`That signature was given for something else ("${row.meaning}"). Sign this act itself.`)
  }
  if (machineNow().getTime() - row.machineAt.getTime() > MAX_AGE_MS) {
    throw refusal('That signature is more than five minutes old. Sign again.')
  }
  // The update and not the row read above decides: of two users at once one finds nothing left to use.
  if (!(await spendSignedAct(tx, row.id, use.now))) {
    throw refusal('That signature has already been used. Sign again.')
  }
  return { id: row.id }
}

function isFor(row: SignedActRow, use: { actor: Actor } & SignedSubject): boolean {
  return (
    row.personId === use.actor.personId &&
    row.meaning === use.meaning &&
    row.subjectKind === use.subjectKind &&
    row.subjectId === use.subjectId
  )
}

function refusal(message: string, atField = false): DomainError {
  return new DomainError('signature-refused', message, atField ? { fields: { password: [message] } } : {})
}
