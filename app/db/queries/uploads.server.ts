/** Files on their way in, piece by piece. */
import { and, asc, eq, gte, isNull, lt } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { attachmentChunk, upload } from '../schema/index.ts'

export type UploadRow = typeof upload.$inferSelect

export async function insertUpload(tx: DbOrTx, row: typeof upload.$inferInsert): Promise<void> {
  await tx.insert(upload).values(row)
}

/** An upload by the token that names it in addresses, or null. */
export async function findUpload(db: DbOrTx, token: string): Promise<UploadRow | null> {
  const [row] = await db.select().from(upload).where(eq(upload.token, token))
  return row ?? null
}

/** The same, locked until the transaction ends. */
export async function lockUpload(tx: DbOrTx, uploadId: number): Promise<UploadRow | null> {
  const [row] = await tx.select().from(upload).where(eq(upload.id, uploadId)).for('update')
  return row ?? null
}

/** Bytes that are kept of a piece which is not full yet. */
export async function readPiece(db: DbOrTx, attachmentId: number, chunkNo: number): Promise<Uint8Array> {
  const [row] = await db
    .select({ data: attachmentChunk.data })
    .from(attachmentChunk)
    .where(and(eq(attachmentChunk.attachmentId, attachmentId), eq(attachmentChunk.chunkNo, chunkNo)))
  return row?.data ?? new Uint8Array(0)
}

/** Keeps a piece, in place of what was kept of it before. */
export async function putPiece(
  tx: DbOrTx,
  attachmentId: number,
  chunkNo: number,
  data: Uint8Array,
): Promise<void> {
  await tx
    .insert(attachmentChunk)
    .values({ attachmentId, chunkNo, data })
    .onDuplicateKeyUpdate({ set: { data } })
}

export async function noteReceived(
  tx: DbOrTx,
  uploadId: number,
  receivedBytes: number,
  lastAt: Date,
): Promise<void> {
  await tx.update(upload).set({ receivedBytes, lastAt }).where(eq(upload.id, uploadId))
}

/** Says which import an upload became; false when that has been said before, or the upload is gone. */
export async function claimUpload(tx: DbOrTx, uploadId: number, importId: number): Promise<boolean> {
  const [result] = await tx
    .update(upload)
    .set({ importId })
    .where(and(eq(upload.id, uploadId), isNull(upload.importId)))
  return result.affectedRows === 1
}

/** Throws away the bytes of an upload that are of no use; its row still says what came of it. */
export async function dropPieces(tx: DbOrTx, attachmentId: number): Promise<void> {
  await tx.delete(attachmentChunk).where(eq(attachmentChunk.attachmentId, attachmentId))
}

/** What a person has begun and not finished, the oldest first. */
export function listUnfinished(db: DbOrTx, personId: number, since: Date): Promise<UploadRow[]> {
  return db
    .select()
    .from(upload)
    .where(and(eq(upload.personId, personId), isNull(upload.importId), gte(upload.lastAt, since)))
    .orderBy(asc(upload.id))
}

/** Uploads that have not moved since an instant. */
export async function listIdleUploads(db: DbOrTx, before: Date): Promise<number[]> {
  const rows = await db.select({ id: upload.id }).from(upload).where(lt(upload.lastAt, before))
  return rows.map(({ id }) => id)
}

export async function deleteUpload(tx: DbOrTx, uploadId: number): Promise<void> {
  await tx.delete(upload).where(eq(upload.id, uploadId))
}
