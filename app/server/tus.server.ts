/** The tus protocol (1.0, creation) over the uploads that the database keeps; nothing is written to the disk. */
import type { Readable } from 'node:stream'
import { DataStore, type Locker, Server, Upload } from '@tus/server'
import type { Db } from '../db/client.server.ts'
import type { Actor } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { UploadFailure } from '../domain/imports.ts'
import { log } from '../log.server.ts'
import { beginUpload, readUpload, receivePieces, type UploadState } from '../services/uploads.server.ts'

const PATH = '/intake/uploads'

/** Each piece locks the row of its upload, which holds between processes too. */
const ROW_LOCKS: Locker = { newLock: () => ({ lock: async () => {}, unlock: async () => {} }) }

class UploadStore extends DataStore {
  readonly #db: Db
  readonly #actor: Actor
  readonly #now: Date
  readonly #limitBytes: number

  constructor(db: Db, actor: Actor, now: Date, limitBytes: number) {
    super()
    this.#db = db
    this.#actor = actor
    this.#now = now
    this.#limitBytes = limitBytes
    this.extensions = ['creation']
  }

  override async create(file: Upload): Promise<Upload> {
    const begun = await beginUpload(this.#db, this.#actor, this.#now, {
      sourceCode: file.metadata?.source ?? '',
      fileName: file.metadata?.filename ?? '',
      byteSize: file.size ?? Number.NaN,
      limitBytes: this.#limitBytes,
    })
    // The protocol's own name for it is let go: ours is the one that cannot be guessed.
    file.id = begun.token
    return file
  }

  override async getUpload(token: string): Promise<Upload> {
    return asUpload(await readUpload(this.#db, this.#actor, token))
  }

  override write(stream: Readable, token: string, offset: number): Promise<number> {
    return receivePieces(this.#db, this.#actor, token, offset, stream as AsyncIterable<Uint8Array>)
  }
}

function asUpload({ token, byteSize, receivedBytes }: UploadState): Upload {
  return new Upload({ id: token, size: byteSize, offset: receivedBytes })
}

/** Answers one request of the protocol on behalf of the person who sends it. */
export function answerTus(
  db: Db,
  actor: Actor,
  now: Date,
  request: Request,
  limitMib: number,
): Promise<Response> {
  const server = new Server({
    path: PATH,
    relativeLocation: true,
    // No other site has any business here.
    allowedOrigins: [],
    locker: ROW_LOCKS,
    datastore: new UploadStore(db, actor, now, limitMib * 1024 * 1024),
    onResponseError: (_request, error) => answerTo(error, request),
  })
  return server.handleWeb(request)
}

/** What a person can mend is answered as the other ways of sending a file answer it; the protocol's own errors stay. */
function answerTo(error: unknown, request: Request): { status_code: number; body: string } | undefined {
  if (error instanceof DomainError) {
    const failure: UploadFailure = {
      ok: false,
      message: error.message,
      fields: error.fields,
      importId: null,
      source: '',
    }
    return { status_code: error.status, body: JSON.stringify(failure) }
  }
  if (typeof error === 'object' && error !== null && 'status_code' in error) return undefined
  log.error('Request failed', { error, method: request.method, path: new URL(request.url).pathname })
  return { status_code: 500, body: 'Something went wrong on our side.\n' }
}
