/** Night files that a machine sends with a token. They wait for a person like any other; nothing is taken in by itself. */
import type { Db } from '../db/client.server.ts'
import { type TokenRow, updateToken } from '../db/queries/api.server.ts'
import { findSource } from '../db/queries/imports.server.ts'
import { DomainError } from '../domain/errors.ts'
import type { ImportState } from '../domain/imports.ts'
import type { Refusal } from '../domain/night-files/types.ts'
import { refusalErrorCode, stageFile, type Upload } from './intake.server.ts'

export interface SentFile {
  importId: number
  state: ImportState
  /** The same bytes had come before; nothing was added. */
  again: boolean
}

/** A file that was kept and from which nothing can be taken. */
export class FileRefused extends DomainError {
  readonly importId: number
  readonly refusal: Refusal

  constructor(importId: number, refusal: Refusal) {
    super(
      refusalErrorCode(refusal),
      `The file could not be read. Found: ${refusal.found}. Expected: ${refusal.expected}. ${refusal.mend}`,
    )
    this.importId = importId
    this.refusal = refusal
  }
}

/**
 * Keeps and reads a file. Sending the same bytes again, under whatever name, adds nothing and is answered with the
 * import that holds them.
 *
 * @param token good for the source (`tokenFor`)
 * @throws DomainError not-found (no such source), too-large; FileRefused
 */
export async function receiveSentFile(
  db: Db,
  token: TokenRow,
  now: Date,
  upload: Omit<Upload, 'sentWith' | 'onProgress'>,
): Promise<SentFile> {
  if ((await findSource(db, upload.sourceCode)) === null)
    throw new DomainError('not-found', `The register has no source ${upload.sourceCode}.`)
  await updateToken(db, token.id, { lastUsedAt: now })
  let staged: Awaited<ReturnType<typeof stageFile>>
  try {
    staged = await stageFile(db, null, now, { ...upload, sentWith: token.name })
  } catch (error) {
    // Taken in already: for a machine that repeats itself that is the answer, and no fault.
    const importId = error instanceof DomainError ? error.details.importId : undefined
    if (typeof importId !== 'number') throw error
    return { importId, state: 'accepted', again: true }
  }
  if (staged.refusal !== null) throw new FileRefused(staged.importId, staged.refusal)
  return { importId: staged.importId, state: staged.state, again: staged.again }
}
