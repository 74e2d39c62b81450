/** Photos taken at a heated segment: barriers, signs, what a round found. Kept with the permit, never changed. */
import type { Db, DbOrTx } from '../db/client.server.ts'
import { listPhotoRows, type PhotoRow } from '../db/queries/permit-tests.server.ts'
import { tx } from '../db/transaction.server.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import { notTakenText } from '../domain/permit-tests.ts'
import { openAttachment, saveAttachment } from './attachments.server.ts'
import { lockPermitOf, permitOf } from './isolation-points.server.ts'
import { writeRecord } from './record.server.ts'

export type { PhotoRow }

/** Largest photo taken, in MiB; what a tablet's camera makes is a few. */
export const PHOTO_MIB = 12
const MOST_PHOTOS = 100
const KIND = 'permit-photo'

/**
 * Keeps a photo. A caption goes before the file's own name, by which lists tell photos apart.
 *
 * @throws DomainError forbidden, not-found, not-acceptable-now, bad-input (empty), too-large, wrong-type (no picture)
 */
export async function addPermitPhoto(
  db: Db,
  actor: Actor,
  now: Date,
  number: string,
  photo: { caption: string; fileName: string; content: AsyncIterable<Uint8Array> },
): Promise<string> {
  demand(actor, 'permit:test')
  const permit = await permitOf(db, number)
  const refusal = notTakenText(number, lockPermitOf(permit, now).state)
  if (refusal !== null) throw new DomainError('not-acceptable-now', refusal)
  if ((await listPhotoRows(db, KIND, number)).length >= MOST_PHOTOS) {
    throw new DomainError('not-acceptable-now', `${number} has ${MOST_PHOTOS} photos, as many as are kept.`)
  }
  const caption = photo.caption.trim().replaceAll(/[\\/]/g, '-').slice(0, 120)
  const saved = await saveAttachment(db, {
    actor,
    now,
    fileName: caption === '' ? photo.fileName : `${caption} – ${photo.fileName.split(/[\\/]/).at(-1) ?? ''}`,
    subjectKind: KIND,
    subjectId: number,
    maxBytes: PHOTO_MIB * 1024 * 1024,
    accept: ['image/jpeg', 'image/png', 'image/webp'],
    content: photo.content,
  })
  await tx(db, (inside) =>
    writeRecord(inside, {
      at: now,
      actor,
      act: 'permit photo added',
      subjectKind: 'permit',
      subjectId: number,
      after: { photo: saved.id, fileName: saved.fileName, sha256: saved.sha256 },
    }),
  )
  return `${saved.fileName} is kept with ${number}.`
}

/** Photos of a permit, oldest first. */
export function listPermitPhotos(db: DbOrTx, number: string): Promise<PhotoRow[]> {
  return listPhotoRows(db, KIND, number)
}

/** Opens one photo of a permit. @throws DomainError forbidden, not-found */
export async function openPermitPhoto(db: Db, actor: Actor, number: string, photoId: number) {
  demand(actor, 'facility:view')
  const known = Number.isSafeInteger(photoId) && photoId > 0
  const photo = known && (await listPhotoRows(db, KIND, number)).find(({ id }) => id === photoId)
  if (!photo) throw new DomainError('not-found', `${number} has no photo of this number.`)
  const { content } = await openAttachment(db, photoId)
  return { ...photo, body: streamOf(content) }
}

function streamOf(content: AsyncGenerator<Uint8Array>): ReadableStream<Uint8Array> {
  return new ReadableStream({
    async pull(controller) {
      const { value, done } = await content.next()
      if (done) controller.close()
      else controller.enqueue(value)
    },
    async cancel() {
      await content.return(undefined)
    },
  })
}
