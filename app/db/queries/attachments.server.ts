import { and, asc, eq, lt, notExists } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'
import { attachment, attachmentChunk, upload } from '../schema/index.ts'

export type AttachmentRow = typeof attachment.$inferSelect

export async function insertAttachment(
  db: DbOrTx,
  row: Omit<typeof attachment.$inferInsert, 'id' | 'complete'>,
): Promise<number> {
  const [result] = await db.insert(attachment).values(row)
  return result.insertId
}

export async function insertChunk(
  db: DbOrTx,
  attachmentId: number,
  chunkNo: number,
  data: Uint8Array,
): Promise<void> {
  await db.insert(attachmentChunk).values({ attachmentId, chunkNo, data })
}

/** Declares a file complete; false when its row has gone meanwhile. */
export async function completeAttachment(
  db: DbOrTx,
  attachmentId: number,
  facts: { byteSize: number; sha256: string },
): Promise<boolean> {
  const [result] = await db
    .update(attachment)
    .set({ ...facts, complete: true })
    .where(eq(attachment.id, attachmentId))
  return result.affectedRows === 1
}

/** A complete file's facts, or null. */
export async function findAttachment(db: DbOrTx, attachmentId: number): Promise<AttachmentRow | null> {
  const rows = await db
    .select()
    .from(attachment)
    .where(and(eq(attachment.id, attachmentId), eq(attachment.complete, true)))
  return rows[0] ?? null
}

/** One piece of a file, or null after the last. */
export async function readChunk(
  db: DbOrTx,
  attachmentId: number,
  chunkNo: number,
): Promise<Uint8Array | null> {
  const rows = await db
    .select({ data: attachmentChunk.data })
    .from(attachmentChunk)
    .where(and(eq(attachmentChunk.attachmentId, attachmentId), eq(attachmentChunk.chunkNo, chunkNo)))
  return rows[0]?.data ?? null
}

/** Complete files of one thing, oldest first. */
export async function listSubjectAttachments(
  db: DbOrTx,
  subjectKind: string,
  subjectId: string,
): Promise<AttachmentRow[]> {
  return db
    .select()
    .from(attachment)
    .where(
      and(
        eq(attachment.subjectKind, subjectKind),
        eq(attachment.subjectId, subjectId),
        eq(attachment.complete, true),
      ),
    )
    .orderBy(asc(attachment.id))
}

/** Deletes a file that is not complete, pieces and all; also pieces that outlived their file's row. */
export async function deleteIncomplete(tx: DbOrTx, attachmentId: number): Promise<void> {
  const rows = await tx
    .select({ complete: attachment.complete })
    .from(attachment)
    .where(eq(attachment.id, attachmentId))
    .for('update')
  if (rows[0]?.complete === true) return
  await tx.delete(attachmentChunk).where(eq(attachmentChunk.attachmentId, attachmentId))
  await tx.delete(attachment).where(eq(attachment.id, attachmentId))
}

/** Files begun before an instant and never completed. Those that come in pieces have a rule of their own. */
export async function listIncomplete(db: DbOrTx, before: Date): Promise<number[]> {
  const rows = await db
    .select({ id: attachment.id })
    .from(attachment)
    .where(
      and(
        eq(attachment.complete, false),
        lt(attachment.createdAt, before),
        notExists(db.select({ id: upload.id }).from(upload).where(eq(upload.attachmentId, attachment.id))),
      ),
    )
  return rows.map(({ id }) => id)
}
