/**
 * Files kept in the database, in rows of 1 MiB, so that neither a large file nor a slow reader holds more than one of
 * them in memory. A file is there for others only when all of it has arrived. Who may add or read a file is decided by
 * the service of the thing it belongs to.
 */
import { createHash } from 'node:crypto'
import type { Db } from '../db/client.server.ts'
import {
  type AttachmentRow,
  completeAttachment,
  deleteIncomplete,
  findAttachment,
  insertAttachment,
  insertChunk,
  listIncomplete,
  listSubjectAttachments,
  readChunk,
} from '../db/queries/attachments.server.ts'
import { tx } from '../db/transaction.server.ts'
import type { Actor } from '../domain/actor.ts'
import { CONTENT_TYPES, type ContentType, cleanFileName, contentTypeOf } from '../domain/content-types.ts'
import { DomainError } from '../domain/errors.ts'
import { log } from '../log.server.ts'

const CHUNK_BYTES = 1_048_576

export interface NewAttachment {
  /** Null when the product itself keeps the file (a seed). */
  actor: Actor | null
  now: Date
  fileName: string
  subjectKind: string
  subjectId: string
  /** Most bytes taken; the caller states it to people before they choose a file. */
  maxBytes: number
  /** Types taken, told by content; "any" where the caller judges the content itself. */
  accept: readonly ContentType[] | 'any'
  /** The bytes, in pieces of any size. */
  content: AsyncIterable<Uint8Array>
}

export interface SavedAttachment {
  id: number
  fileName: string
  contentType: string
  byteSize: number
  sha256: string
}

/**
 * Keeps a file. When it fails, or the sender breaks off, nothing of it stays.
 *
 * @throws DomainError bad-input (empty), too-large, wrong-type; whatever `content` throws
 */
export async function saveAttachment(db: Db, file: NewAttachment): Promise<SavedAttachment> {
  const fileName = cleanFileName(file.fileName)
  const hash = createHash('sha256')
  let byteSize = 0
  let chunkNo = 0
  let contentType = ''
  let id: number | null = null
  try {
    for await (const piece of piecesOf(limited(file.content, file.maxBytes, fileName))) {
      if (id === null) {
        contentType = judgeType(piece, file.accept, fileName)
        id = await begin(db, file, fileName, contentType)
      }
      hash.update(piece)
      byteSize += piece.length
      await insertChunk(db, id, chunkNo, piece)
      chunkNo += 1
    }
    if (id === null) {
      throw new DomainError('bad-input', `${fileName} is empty: 0 bytes arrived. Choose the file again.`)
    }
    const sha256 = hash.digest('hex')
    if (!(await completeAttachment(db, id, { byteSize, sha256 }))) {
      throw new DomainError(
        'conflict',
        `${fileName} took so long to arrive that it was given up. Send it again.`,
      )
    }
    return { id, fileName, contentType, byteSize, sha256 }
  } catch (error) {
    if (id !== null) await removeRemains(db, id)
    throw error
  }
}

function begin(db: Db, file: NewAttachment, fileName: string, contentType: string): Promise<number> {
  return insertAttachment(db, {
    fileName,
    contentType,
    byteSize: 0,
    sha256: '',
    subjectKind: file.subjectKind,
    subjectId: file.subjectId,
    createdBy: file.actor?.personId ?? null,
    createdAt: file.now,
  })
}

/** What stays behind here is found and removed by the nightly clean-up; the error that led here matters more. */
async function removeRemains(db: Db, id: number): Promise<void> {
  try {
    await tx(db, (inside) => deleteIncomplete(inside, id))
  } catch (error) {
    log.warn('could not remove the remains of a file that did not arrive', { attachment: id, error })
  }
}

function judgeType(head: Uint8Array, accept: NewAttachment['accept'], fileName: string): string {
  const found = contentTypeOf(head)
  if (accept === 'any') return found ?? 'application/octet-stream'
  if (found !== null && accept.includes(found)) return found
  const what = found === null ? 'none of the known kinds' : `a ${CONTENT_TYPES[found]}`
  const expected = accept.map((type) => CONTENT_TYPES[type]).join(', ')
  throw new DomainError(
    'wrong-type',
    `${fileName} is, by its content, ${what}. Taken here: ${expected}. Save it as one of these and send that.`,
  )
}

async function* limited(
  content: AsyncIterable<Uint8Array>,
  maxBytes: number,
  fileName: string,
): AsyncGenerator<Uint8Array> {
  let total = 0
  for await (const part of content) {
    total += part.length
    if (total > maxBytes) {
      const most = maxBytes >= CHUNK_BYTES ? `${Math.floor(maxBytes / CHUNK_BYTES)} MiB` : `${maxBytes} bytes`
      throw new DomainError(
        'too-large',
        `${fileName} is larger than ${most}, the most that is taken here. Make it smaller or split it, and send it again.`,
      )
    }
    yield part
  }
}

/** The same bytes in pieces of exactly 1 MiB, the last one shorter. */
async function* piecesOf(content: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let piece = new Uint8Array(CHUNK_BYTES)
  let filled = 0
  for await (const part of content) {
    let taken = 0
    while (taken < part.length) {
      const share = part.subarray(taken, taken + CHUNK_BYTES - filled)
      piece.set(share, filled)
      filled += share.length
      taken += share.length
      if (filled === CHUNK_BYTES) {
        yield piece
        piece = new Uint8Array(CHUNK_BYTES)
        filled = 0
      }
    }
  }
  if (filled > 0) yield piece.subarray(0, filled)
}

export interface OpenAttachment extends SavedAttachment {
  subjectKind: string
  subjectId: string
  /** The bytes, 1 MiB at a time. Ends in an error when they are not the ones that were kept. */
  content: AsyncGenerator<Uint8Array>
}

/** Opens a file for reading; nothing is read before the first piece is asked for. @throws DomainError not-found */
export async function openAttachment(db: Db, attachmentId: number): Promise<OpenAttachment> {
  const row = await findAttachment(db, attachmentId)
  if (row === null) throw new DomainError('not-found', `There is no file ${attachmentId}.`)
  return {
    ...factsOf(row),
    subjectKind: row.subjectKind,
    subjectId: row.subjectId,
    content: contentOf(db, row),
  }
}

async function* contentOf(db: Db, row: AttachmentRow): AsyncGenerator<Uint8Array> {
  const hash = createHash('sha256')
  for (let chunkNo = 0; chunkNo * CHUNK_BYTES < row.byteSize; chunkNo += 1) {
    const piece = await readChunk(db, row.id, chunkNo)
    if (piece === null) throw new Error(`File ${row.id} is damaged: its piece ${chunkNo} is missing.`)
    hash.update(piece)
    yield piece
  }
  const sha256 = hash.digest('hex')
  if (sha256 !== row.sha256) {
    throw new Error(`File ${row.id} is damaged: its bytes give SHA-256 ${sha256}, kept was ${row.sha256}.`)
  }
}

/** The files of one thing, oldest first. */
export async function listAttachments(
  db: Db,
  subjectKind: string,
  subjectId: string,
): Promise<SavedAttachment[]> {
  return (await listSubjectAttachments(db, subjectKind, subjectId)).map(factsOf)
}

function factsOf({ id, fileName, contentType, byteSize, sha256 }: AttachmentRow): SavedAttachment {
  return { id, fileName, contentType, byteSize, sha256 }
}

/** Removes files that were begun before an instant and never arrived whole. Returns how many. */
export async function removeIncompleteAttachments(db: Db, before: Date): Promise<number> {
  const ids = await listIncomplete(db, before)
  for (const id of ids) await tx(db, (inside) => deleteIncomplete(inside, id))
  return ids.length
}
