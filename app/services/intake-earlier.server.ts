/** Whether a file came before under the same name, whole or cut. */
import type { DbOrTx } from '../db/client.server.ts'
import { findSameName, type ImportRow, readOriginal } from '../db/queries/imports.server.ts'
import { type ImportState, LARGE_FILE_BYTES } from '../domain/imports.ts'

export interface EarlierFile {
  importId: number
  state: ImportState
  byteSize: number
  uploadedAt: Date
  /**
   * `begins`: the earlier file is the beginning of this one, so it was cut; `whole`: this one is the beginning of the
   * earlier, so this one was cut; `other`: same name, other content.
   */
  relation: 'begins' | 'whole' | 'other'
}

/** The last other file of the same source and name whose bytes are kept; null when there is none, or one is large. */
export async function findEarlierFile(db: DbOrTx, file: ImportRow): Promise<EarlierFile | null> {
  const earlier = await findSameName(db, file)
  if (earlier === null || Math.max(earlier.byteSize, file.byteSize) > LARGE_FILE_BYTES) return null
  const { id, state, byteSize, uploadedAt, attachmentId } = earlier
  const begins = await isBeginning(readOriginal(db, attachmentId), readOriginal(db, file.attachmentId))
  const relation = !begins ? 'other' : byteSize < file.byteSize ? 'begins' : 'whole'
  return { importId: id, state, byteSize, uploadedAt, relation }
}

/** Whether the shorter of two files is the beginning of the longer. Both come in pieces that begin at the same places. */
async function isBeginning(a: AsyncGenerator<Uint8Array>, b: AsyncGenerator<Uint8Array>): Promise<boolean> {
  for (;;) {
    const [one, other] = [await a.next(), await b.next()]
    if (one.done === true || other.done === true) return true
    const length = Math.min(one.value.length, other.value.length)
    if (!Buffer.from(one.value.subarray(0, length)).equals(other.value.subarray(0, length))) return false
  }
}
