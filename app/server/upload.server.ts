/** Uploads of night files: a plain form, or the bare bytes of one file. Both end in the same answer. */
import {
  FormDataParseError,
  MaxFileSizeExceededError,
  MaxTotalSizeExceededError,
  parseFormData,
} from '@remix-run/form-data-parser'
import type { Db } from '../db/client.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError, ERROR_STATUS } from '../domain/errors.ts'
import type { UploadFailure } from '../domain/imports.ts'
import { findingText } from '../domain/night-files/refusal-text.ts'
import { refusalErrorCode, type Staged, stageUpload } from '../services/intake.server.ts'
import { finishUpload } from '../services/uploads.server.ts'

const MIB = 1024 * 1024
/** The parser of forms holds a file in memory as a whole, so larger ones come as bare bytes. */
export const FORM_LIMIT_MIB = 64

export type UploadAnswer =
  | { ok: true; importId: number; again: boolean; reading: boolean }
  | { ok: false; status: number; failure: UploadFailure }

export interface FileToReceive {
  sourceCode: string
  fileName: string
  stream: AsyncIterable<Uint8Array>
  statedBytes: number | null
  limitBytes: number
}

/** Reads the form of the intake page: a source and one file. */
export async function fileFromForm(request: Request, limitMib: number): Promise<FileToReceive> {
  const limitBytes = Math.min(limitMib, FORM_LIMIT_MIB) * MIB
  let form: FormData
  try {
    form = await parseFormData(request, { maxFiles: 1, maxFileSize: limitBytes })
  } catch (error) {
    if (error instanceof MaxFileSizeExceededError || error instanceof MaxTotalSizeExceededError) {
      throw new DomainError(
        'too-large',
        `The file is larger than ${limitBytes / MIB} MiB, the most that this form takes. With scripts switched on files up to ${limitMib} MiB can be sent.`,
      )
    }
    if (error instanceof FormDataParseError)
      throw new DomainError('bad-input', 'The form arrived incomplete. Choose the file and send it again.')
    throw error
  }
  const file = form.get('file')
  const sourceCode = String(form.get('source') ?? '')
  if (!(file instanceof Blob) || (file.size === 0 && nameOf(file) === '')) throw noFile(sourceCode)
  return {
    sourceCode,
    fileName: nameOf(file),
    stream: piecesOf(file.stream()),
    statedBytes: null,
    limitBytes,
  }
}

function nameOf(file: Blob): string {
  return file instanceof File ? file.name : ''
}

function noFile(source: string): DomainError {
  return new DomainError('bad-input', 'One field needs another look; nothing has been saved.', {
    fields: { file: ['No file came with the form. Choose the file that the logger wrote.'] },
    details: { source },
  })
}

/** Takes a request whose body is the file; source and name stand in the address. */
export function fileFromBody(request: Request, limitMib: number): FileToReceive {
  const url = new URL(request.url)
  const body = request.body
  const sourceCode = url.searchParams.get('source') ?? ''
  if (body === null) throw noFile(sourceCode)
  return {
    sourceCode,
    fileName: url.searchParams.get('name') ?? '',
    stream: piecesOf(body),
    statedBytes: statedLength(request.headers),
    limitBytes: limitMib * MIB,
  }
}

/**
 * A file that a machine sends: source and name stand in the path.
 *
 * @throws DomainError bad-input (no body), wrong-type (compressed)
 */
export function fileFromPut(
  request: Request,
  sent: { sourceCode: string; fileName: string; limitMib: number },
): FileToReceive {
  const coding = request.headers.get('Content-Encoding') ?? 'identity'
  if (coding !== 'identity') {
    throw new DomainError(
      'wrong-type',
      `Found the content coding “${coding.slice(0, 80)}”. Send the file's bytes as the logger wrote them.`,
    )
  }
  if (request.body === null)
    throw new DomainError('bad-input', 'The request has no body. Send the bytes of the file as its body.')
  return {
    sourceCode: sent.sourceCode,
    fileName: sent.fileName,
    stream: piecesOf(request.body),
    statedBytes: statedLength(request.headers),
    limitBytes: sent.limitMib * MIB,
  }
}

function statedLength(headers: Headers): number | null {
  const stated = headers.get('Content-Length')
  return stated !== null && /^\d+$/.test(stated) ? Number(stated) : null
}

async function* piecesOf(stream: ReadableStream<Uint8Array>): AsyncGenerator<Uint8Array> {
  const reader = stream.getReader()
  try {
    for (;;) {
      const { value, done } = await reader.read()
      if (done) return
      yield value
    }
  } finally {
    reader.releaseLock()
  }
}

/** Hands a file to the intake and turns what comes back into an answer with its status. */
export function receiveFile(
  db: Db,
  actor: Actor,
  now: Date,
  take: () => FileToReceive | Promise<FileToReceive>,
): Promise<UploadAnswer> {
  return answerOf(async (onSource) => {
    const file = await take()
    onSource(file.sourceCode)
    return stageUpload(db, actor, now, file)
  })
}

/** The same for a file that came in pieces and is all here. */
export function finishReceived(db: Db, actor: Actor, now: Date, token: string): Promise<UploadAnswer> {
  return answerOf(() => finishUpload(db, actor, now, token))
}

async function answerOf(work: (onSource: (code: string) => void) => Promise<Staged>): Promise<UploadAnswer> {
  let source = ''
  try {
    const staged = await work((code) => {
      source = code
    })
    if (staged.refusal === null)
      return { ok: true, importId: staged.importId, again: staged.again, reading: staged.state === 'reading' }
    return {
      ok: false,
      status: ERROR_STATUS[refusalErrorCode(staged.refusal)],
      failure: {
        ok: false,
        message: `The file could not be read. ${findingText(staged.refusal)}`,
        fields: {},
        importId: staged.importId,
        source,
      },
    }
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    const { importId, source: stated } = error.details
    return {
      ok: false,
      status: error.status,
      failure: {
        ok: false,
        message: error.message,
        fields: error.fields,
        importId: typeof importId === 'number' ? importId : null,
        source: typeof stated === 'string' ? stated : source,
      },
    }
  }
}

/** The answer to a script: the address of the import, or what stands in the way. */
export function answerReceived(answer: UploadAnswer): Response {
  if (!answer.ok) return Response.json(answer.failure, { status: answer.status })
  const href = `/intake/${answer.importId}`
  return Response.json(
    { importId: answer.importId, href },
    { status: answer.again ? 200 : 201, headers: { Location: href } },
  )
}
