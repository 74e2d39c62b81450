/** Receiving a night file: its bytes are kept as they came, read, and the report is put in front of a person. */
import { createHash } from 'node:crypto'
import type { Db, DbOrTx } from '../db/client.server.ts'
import {
  beginOriginal,
  dropOriginal,
  findImport,
  findSameBytes,
  findSource,
  finishOriginal,
  type ImportListRow,
  insertImport,
  writeOriginalChunk,
} from '../db/queries/imports.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError, type ErrorCode } from '../domain/errors.ts'
import { LARGE_FILE_BYTES } from '../domain/imports.ts'
import { createNightFileReader } from '../domain/night-files/reader.ts'
import type { Answer, NightFileReader, ReadOut, Refusal } from '../domain/night-files/types.ts'
import { readingRules, siteMinute, storedReport } from './intake-reading.server.ts'
import { enqueue } from './jobs.server.ts'
import { writeRecord } from './record.server.ts'

const PIECE_BYTES = 1024 * 1024
const DAY_MS = 86_400_000
/** A stop of the product counts as an attempt, so more of them than other jobs have. */
const READ_ATTEMPTS = 20

export interface Upload {
  sourceCode: string
  fileName: string
  stream: AsyncIterable<Uint8Array>
  /** Size the sender announced, when it did. */
  statedBytes: number | null
  /** Largest file taken, in bytes. */
  limitBytes: number
  onProgress?: (seen: { bytes: number; lines: number }) => void
  /** Name of the token that a machine sent it with, for the record. */
  sentWith?: string
  /** From this size on the file is kept now and read by the worker. */
  largeBytes?: number
}

export interface Staged {
  importId: number
  /**
   * The report is there and waits for a person; or the file was refused (and kept, without readings); or it is large
   * and the worker will read it.
   */
  state: 'read' | 'refused' | 'reading'
  refusal: Refusal | null
  /** Whether the same bytes were waiting already, or were refused for the same reason; nothing was added then. */
  again: boolean
}

/**
 * Takes a file's bytes in 1 MiB pieces, reads them on the way, and stores bytes and report. No reading is stored. A
 * large file is only kept, and the worker reads it.
 *
 * @throws DomainError forbidden; bad-input (no such source, nothing sent); too-large; conflict, when the same bytes
 *   have been taken in before (nothing is kept then, and the message names that import)
 */
export async function stageUpload(db: Db, actor: Actor, now: Date, upload: Upload): Promise<Staged> {
  demand(actor, 'intake:take-in')
  return stageFile(db, actor, now, upload)
}

/**
 * The same for a sender that has been let in otherwise: a machine with a token (`actor` is null then).
 *
 * @throws as stageUpload, but for forbidden
 */
export async function stageFile(db: Db, actor: Actor | null, now: Date, upload: Upload): Promise<Staged> {
  const fileName = plainFileName(upload.fileName)
  const source = await findSource(db, upload.sourceCode)
  if (source === null) throw unknownSource(upload.sourceCode)
  const statedBytes = upload.statedBytes
  if (statedBytes !== null && statedBytes > upload.limitBytes) throw tooLarge(upload.limitBytes)
  const rules = await readingRules(db, source, {
    uploadedAt: now,
    fileName,
    statedBytes,
    answers: [],
    history: true,
  })
  const attachmentId = await beginOriginal(db, {
    fileName,
    createdBy: actor?.personId ?? null,
    createdAt: now,
  })
  try {
    const largeBytes = upload.largeBytes ?? LARGE_FILE_BYTES
    let reader: NightFileReader | null =
      statedBytes !== null && statedBytes > largeBytes
        ? null
        : createNightFileReader(rules.profile, rules.context, () => {})
    let bytes = 0
    const { byteSize, sha256 } = await keepBytes(db, attachmentId, upload, (piece) => {
      bytes += piece.length
      if (bytes > largeBytes) reader = null
      reader?.push(piece)
      upload.onProgress?.({ bytes, lines: reader?.linesSeen ?? 0 })
    })
    const staged = await settleArrived(db, actor, now, {
      source,
      fileName,
      zone: rules.zone,
      attachmentId,
      byteSize,
      sha256,
      readOut: reader?.end() ?? null,
      sentWith: upload.sentWith,
    })
    if (staged.again) await dropOriginal(db, attachmentId)
    return staged
  } catch (error) {
    await dropOriginal(db, attachmentId)
    throw error
  }
}

interface Arrived {
  source: { id: number; code: string }
  fileName: string
  zone: string
  attachmentId: number
  byteSize: number
  sha256: string
  /** Null for a large file, which the worker has yet to read. */
  readOut: ReadOut | null
  sentWith: string | undefined
}

/**
 * What becomes of a file whose bytes are all kept: an import, or, where `again` is set, one that was there before; the
 * kept bytes are then of no more use.
 *
 * @param alongside done in the transaction that makes the import
 * @throws DomainError conflict, when the same bytes have been taken in before; its details name that import
 */
export async function settleArrived(
  db: Db,
  actor: Actor | null,
  now: Date,
  arrived: Arrived,
  alongside: (inside: DbOrTx, importId: number) => Promise<void> = async () => {},
): Promise<Staged> {
  const { source, sha256, readOut } = arrived
  const held = await findSameBytes(db, sha256, ['accepted'])
  if (held !== null) throw heldAlready(held, arrived.zone)
  const waiting = await findSameBytes(db, sha256, ['read', 'reading'])
  if (waiting !== null && waiting.sourceId === source.id) {
    const state = waiting.state === 'reading' ? 'reading' : 'read'
    return { importId: waiting.id, state, refusal: null, again: true }
  }
  const refused = await sameRefusal(db, now, source.id, sha256, readOut)
  if (refused !== null)
    return { importId: refused.importId, state: 'refused', refusal: refused.refusal, again: true }
  const importId = await tx(db, async (inside) => {
    const made = await storeReport(inside, actor, now, arrived)
    await alongside(inside, made)
    return made
  })
  const state = readOut === null ? 'reading' : readState(readOut)
  return { importId, state, refusal: readOut?.refusal ?? null, again: false }
}

/**
 * The import that refused these bytes for the same reason within the last day. What is refused for another reason, or
 * a night later, is something new: the register has changed, or the logger has.
 */
async function sameRefusal(
  db: Db,
  now: Date,
  sourceId: number,
  sha256: string,
  readOut: ReadOut | null,
): Promise<{ importId: number; refusal: Refusal } | null> {
  const refusal = readOut?.refusal ?? null
  if (refusal === null) return null
  const held = await findSameBytes(db, sha256, ['refused'])
  if (held === null || held.sourceId !== sourceId || held.uploadedAt.getTime() <= now.getTime() - DAY_MS)
    return null
  const before = storedReport((await findImport(db, held.id))?.readOut)?.refusal
  return before?.code === refusal.code && before.found === refusal.found
    ? { importId: held.id, refusal }
    : null
}

/** Status of a refused file: the wrong kind of file, or one that nothing can be taken from. */
export function refusalErrorCode(refusal: Refusal): ErrorCode {
  const wrongKind = ['binary-file', 'archive', 'spreadsheet-file', 'not-a-log'].includes(refusal.code)
  return wrongKind ? 'wrong-type' : 'not-acceptable-now'
}

/** The message for bytes that have been taken in before. */
export function heldAlready(held: ImportListRow, zone: string): DomainError {
  const when = held.decidedAt === null ? '' : ` on ${siteMinute(held.decidedAt, zone)}`
  return new DomainError(
    'conflict',
    `This file has been taken in already: import ${held.id} (${held.fileName}), by ${held.decidedBy ?? 'the product'}${when}. Nothing was added.`,
    { details: { importId: held.id } },
  )
}

/** The message for a source that the register does not have. */
export function unknownSource(code: string): DomainError {
  return new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
    fields: { source: [`The register has no source “${code}”. Choose one from the list.`] },
  })
}

/** The message for a file over the limit. */
export function tooLarge(limitBytes: number): DomainError {
  return new DomainError(
    'too-large',
    `The file is larger than ${Math.floor(limitBytes / PIECE_BYTES)} MiB, the most that is taken here. Split it at a line end and send the parts.`,
  )
}

/** A name fit for showing: no folders, no control characters, at most 200 characters. */
export function plainFileName(raw: string): string {
  const base = raw.split(/[/\\]/).at(-1) ?? ''
  const plain = Array.from(base.normalize('NFC'))
    .filter((letter) => letter >= ' ' && letter !== '\u007f')
    .join('')
    .trim()
  return plain === '' ? 'unnamed' : plain.slice(0, 200)
}

async function keepBytes(
  db: Db,
  attachmentId: number,
  upload: Upload,
  onPiece: (piece: Uint8Array) => void,
): Promise<{ byteSize: number; sha256: string }> {
  const hash = createHash('sha256')
  let byteSize = 0
  let chunkNo = 0
  // One for all pieces: it is free again when the database has its copy.
  const buffer = new Uint8Array(PIECE_BYTES)
  let filled = 0
  for await (const piece of upload.stream) {
    byteSize += piece.length
    if (byteSize > upload.limitBytes) throw tooLarge(upload.limitBytes)
    hash.update(piece)
    onPiece(piece)
    for (let at = 0; at < piece.length; ) {
      const part = piece.subarray(at, at + PIECE_BYTES - filled)
      buffer.set(part, filled)
      filled += part.length
      at += part.length
      if (filled < PIECE_BYTES) continue
      await writeOriginalChunk(db, attachmentId, chunkNo, buffer)
      chunkNo += 1
      filled = 0
    }
  }
  if (filled > 0) await writeOriginalChunk(db, attachmentId, chunkNo, buffer.subarray(0, filled))
  return { byteSize, sha256: hash.digest('hex') }
}

/** State of a file that has been read. */
function readState(readOut: ReadOut): 'read' | 'refused' {
  return readOut.state === 'refused' ? 'refused' : 'read'
}

/** What the row of an import says of its report. */
export function reportColumns(readOut: ReadOut) {
  return {
    state: readState(readOut),
    readOut,
    profileVersion: readOut.profileVersion,
    lineCount: readOut.lines.total,
    readingCount: readOut.readings.total,
    firstAt: readOut.firstMs === null ? null : new Date(readOut.firstMs),
    lastAt: readOut.lastMs === null ? null : new Date(readOut.lastMs),
  }
}

async function storeReport(
  inside: DbOrTx,
  actor: Actor | null,
  now: Date,
  arrived: Arrived,
): Promise<number> {
  const { source, fileName, byteSize, sha256, attachmentId, readOut, sentWith } = arrived
  const importId = await insertImport(inside, {
    state: 'reading',
    sourceId: source.id,
    fileName,
    byteSize,
    sha256,
    attachmentId,
    uploadedBy: actor?.personId ?? null,
    uploadedAt: now,
    ...(readOut === null ? {} : reportColumns(readOut)),
  })
  await finishOriginal(inside, attachmentId, { byteSize, sha256, subjectId: String(importId) })
  await writeRecord(inside, {
    at: now,
    actor,
    act: readOut?.state === 'refused' ? 'night file refused' : 'night file received',
    subjectKind: 'import',
    subjectId: String(importId),
    after: {
      source: source.code,
      fileName,
      byteSize,
      sha256,
      lines: readOut?.lines.total ?? null,
      refusal: readOut?.refusal?.code ?? null,
      ...(sentWith === undefined ? {} : { token: sentWith }),
    },
  })
  if (readOut === null) await askToRead(inside, importId, [])
  return importId
}

/** Has the worker read a kept file, inside the transaction that sets its state to `reading`. */
export async function askToRead(inside: DbOrTx, importId: number, answers: readonly Answer[]): Promise<void> {
  await enqueue(inside, {
    kind: 'read-night-file',
    payload: { importId, answers: [...answers] },
    maxAttempts: READ_ATTEMPTS,
  })
}
