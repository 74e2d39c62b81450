/**
 * Night files that arrive in pieces, so that a connection that breaks costs at most one of them. Each piece is one
 * transaction on the row of its upload: whoever comes second with the same piece finds that it has moved on. Only the
 * person who began may go on. The file becomes an import when all of it is there, and once.
 */
import { createHash, randomBytes } from 'node:crypto'
import type { Db } from '../db/client.server.ts'
import { deleteIncomplete } from '../db/queries/attachments.server.ts'
import { beginOriginal, findImport, findSource, readOriginal } from '../db/queries/imports.server.ts'
import {
  claimUpload,
  deleteUpload,
  dropPieces,
  findUpload,
  insertUpload,
  listIdleUploads,
  listUnfinished,
  lockUpload,
  noteReceived,
  putPiece,
  readPiece,
  type UploadRow,
} from '../db/queries/uploads.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { LARGE_FILE_BYTES } from '../domain/imports.ts'
import { createNightFileReader } from '../domain/night-files/reader.ts'
import { machineNow } from '../machine-time.server.ts'
import {
  heldAlready,
  plainFileName,
  type Staged,
  settleArrived,
  tooLarge,
  unknownSource,
} from './intake.server.ts'
import { readingRules, storedReport } from './intake-reading.server.ts'
import { getSite } from './site.server.ts'

const PIECE_BYTES = 1_048_576
/** How long an upload that does not move is kept. */
const IDLE_MS = 86_400_000

export interface UploadState {
  token: string
  byteSize: number
  receivedBytes: number
}

/**
 * Begins an upload; no byte has come yet. `now` is the product's time.
 *
 * @throws DomainError forbidden, bad-input (no such source, no size), too-large
 */
export async function beginUpload(
  db: Db,
  actor: Actor,
  now: Date,
  file: { sourceCode: string; fileName: string; byteSize: number; limitBytes: number },
): Promise<UploadState> {
  demand(actor, 'intake:take-in')
  if ((await findSource(db, file.sourceCode)) === null) throw unknownSource(file.sourceCode)
  if (!Number.isSafeInteger(file.byteSize) || file.byteSize < 0)
    throw new DomainError('bad-input', 'The size of the file was not said. Choose the file again.')
  if (file.byteSize > file.limitBytes) throw tooLarge(file.limitBytes)
  const token = randomBytes(24).toString('base64url')
  const fileName = plainFileName(file.fileName)
  const begun = machineNow()
  await tx(db, async (inside) => {
    const attachmentId = await beginOriginal(inside, { fileName, createdBy: actor.personId, createdAt: now })
    await insertUpload(inside, {
      token,
      personId: actor.personId,
      sourceCode: file.sourceCode,
      fileName,
      byteSize: file.byteSize,
      attachmentId,
      createdAt: begun,
      lastAt: begun,
    })
  })
  return { token, byteSize: file.byteSize, receivedBytes: 0 }
}

/** How far an upload is. @throws DomainError forbidden, not-found (also: somebody else's) */
export async function readUpload(db: Db, actor: Actor, token: string): Promise<UploadState> {
  const { byteSize, receivedBytes } = await ownUpload(db, actor, token)
  return { token, byteSize, receivedBytes }
}

async function ownUpload(db: Db, actor: Actor, token: string): Promise<UploadRow> {
  demand(actor, 'intake:take-in')
  const found = await findUpload(db, token)
  if (found === null || found.personId !== actor.personId) throw gone()
  return found
}

function gone(): DomainError {
  return new DomainError(
    'not-found',
    'What had arrived of this file is not here any more: it is kept for a day, for the person who sent it. Send the file again.',
  )
}

/**
 * Keeps what comes, one transaction for each piece of 1 MiB. Holds one piece in memory. When the stream breaks off,
 * the pieces that came whole stay.
 *
 * @param offset how many bytes the sender believes are here
 * @returns how many are here afterwards
 * @throws DomainError forbidden, not-found, conflict (another number of bytes is here), too-large (more than was said)
 */
export async function receivePieces(
  db: Db,
  actor: Actor,
  token: string,
  offset: number,
  stream: AsyncIterable<Uint8Array>,
): Promise<number> {
  const found = await ownUpload(db, actor, token)
  if (found.receivedBytes !== offset) throw movedOn(found.receivedBytes)
  let at = offset
  const buffer = new Uint8Array(PIECE_BYTES)
  const begun = at % PIECE_BYTES
  if (begun > 0) {
    const kept = await readPiece(db, found.attachmentId, Math.floor(at / PIECE_BYTES))
    if (kept.length !== begun) throw movedOn(at)
    buffer.set(kept)
  }
  let filled = begun
  let pending = 0
  const keep = async () => {
    await keepPiece(db, found.id, at, buffer.subarray(0, filled), pending)
    at += pending
    pending = 0
    if (filled === PIECE_BYTES) filled = 0
  }
  for await (const part of stream) {
    if (at + pending + part.length > found.byteSize) throw moreThanSaid(found.byteSize)
    for (let taken = 0; taken < part.length; ) {
      const share = part.subarray(taken, taken + PIECE_BYTES - filled)
      buffer.set(share, filled)
      filled += share.length
      pending += share.length
      taken += share.length
      if (filled === PIECE_BYTES) await keep()
    }
  }
  if (pending > 0) await keep()
  return at
}

function keepPiece(db: Db, uploadId: number, offset: number, piece: Uint8Array, added: number) {
  return tx(db, async (inside) => {
    const row = await lockUpload(inside, uploadId)
    if (row === null) throw gone()
    if (row.receivedBytes !== offset || row.importId !== null) throw movedOn(row.receivedBytes)
    await putPiece(inside, row.attachmentId, Math.floor(offset / PIECE_BYTES), piece)
    await noteReceived(inside, uploadId, offset + added, machineNow())
  })
}

function movedOn(receivedBytes: number): DomainError {
  return new DomainError(
    'conflict',
    `${receivedBytes} bytes of this file are here already. Ask how far it is and go on from there.`,
  )
}

function moreThanSaid(byteSize: number): DomainError {
  return new DomainError(
    'too-large',
    `More bytes came than the ${byteSize} that were said before. Has the file grown meanwhile? Choose it again.`,
  )
}

/** Another request made the import of this upload first. */
class MadeMeanwhile extends Error {}

/**
 * Makes an import of a file that is all here; asked again, it says what became of it. A file that is not large is read
 * here; a large one is only gone through once for its checksum, and the worker reads it.
 *
 * @throws DomainError forbidden, not-found; conflict, when bytes are missing or have been taken in before
 */
export async function finishUpload(db: Db, actor: Actor, now: Date, token: string): Promise<Staged> {
  const found = await ownUpload(db, actor, token)
  if (found.importId !== null) return whatBecame(db, found, found.importId)
  if (found.receivedBytes !== found.byteSize) {
    const here = `${found.receivedBytes} of ${found.byteSize} bytes`
    throw new DomainError('conflict', `Only ${here} of ${found.fileName} are here. Send the rest first.`)
  }
  const source = await findSource(db, found.sourceCode)
  if (source === null) throw unknownSource(found.sourceCode)
  const rules = await readingRules(db, source, {
    uploadedAt: now,
    fileName: found.fileName,
    statedBytes: found.byteSize,
    answers: [],
    history: true,
  })
  const reader =
    found.byteSize > LARGE_FILE_BYTES ? null : createNightFileReader(rules.profile, rules.context, () => {})
  const hash = createHash('sha256')
  let bytes = 0
  for await (const piece of readOriginal(db, found.attachmentId)) {
    hash.update(piece)
    bytes += piece.length
    reader?.push(piece)
  }
  // Somebody's second request may have settled it while this one read, and the pieces are gone then.
  if (bytes !== found.byteSize) return settledMeanwhile(db, actor, found, bytes)
  try {
    const staged = await settleArrived(
      db,
      actor,
      now,
      {
        source,
        fileName: found.fileName,
        zone: rules.zone,
        attachmentId: found.attachmentId,
        byteSize: bytes,
        sha256: hash.digest('hex'),
        readOut: reader?.end() ?? null,
        sentWith: undefined,
      },
      async (inside, importId) => {
        if (!(await claimUpload(inside, found.id, importId))) throw new MadeMeanwhile()
      },
    )
    if (staged.again) await pointTo(db, found, staged.importId)
    return staged
  } catch (error) {
    if (error instanceof MadeMeanwhile) return settledMeanwhile(db, actor, found, bytes)
    if (error instanceof DomainError && typeof error.details.importId === 'number')
      await pointTo(db, found, error.details.importId)
    throw error
  }
}

async function settledMeanwhile(db: Db, actor: Actor, before: UploadRow, bytes: number): Promise<Staged> {
  const { importId } = await ownUpload(db, actor, before.token)
  if (importId !== null) return whatBecame(db, before, importId)
  throw new Error(`Upload ${before.id}: ${bytes} bytes are kept of ${before.byteSize}`)
}

/** The bytes were here before: the upload points to that import, and its own copy goes. */
async function pointTo(db: Db, found: UploadRow, importId: number): Promise<void> {
  await tx(db, async (inside) => {
    if (await claimUpload(inside, found.id, importId)) await dropPieces(inside, found.attachmentId)
  })
}

async function whatBecame(db: Db, found: UploadRow, importId: number): Promise<Staged> {
  const made = await findImport(db, importId)
  if (made === null) throw gone()
  const own = made.attachmentId === found.attachmentId
  if (!own && made.state === 'accepted') throw heldAlready(made, (await getSite(db)).timeZone)
  if (made.state === 'refused') {
    const refusal = storedReport(made.readOut)?.refusal ?? null
    return { importId, state: 'refused', refusal, again: true }
  }
  return { importId, state: made.state === 'reading' ? 'reading' : 'read', refusal: null, again: true }
}

export interface UnfinishedUpload {
  token: string
  fileName: string
  byteSize: number
  receivedBytes: number
}

/** What a person has begun to send, can still go on with, and has not finished. */
export async function readUnfinished(db: Db, actor: Actor): Promise<UnfinishedUpload[]> {
  const rows = await listUnfinished(db, actor.personId, new Date(machineNow().getTime() - IDLE_MS))
  return rows.map(({ token, fileName, byteSize, receivedBytes }) => ({
    token,
    fileName,
    byteSize,
    receivedBytes,
  }))
}

/**
 * Forgets uploads that have not moved for a day, by the machine's time, with the bytes of those that became no import.
 * Returns how many.
 */
export async function purgeUploads(db: Db): Promise<number> {
  const before = new Date(machineNow().getTime() - IDLE_MS)
  let purged = 0
  for (const id of await listIdleUploads(db, before)) {
    purged += await tx(db, async (inside) => {
      const row = await lockUpload(inside, id)
      if (row === null || row.lastAt >= before) return 0
      await deleteUpload(inside, id)
      await deleteIncomplete(inside, row.attachmentId)
      return 1
    })
  }
  return purged
}
