import { log } from '../../log.server.ts'
import { removeIncompleteAttachments } from '../../services/attachments.server.ts'
import { productNow } from '../../services/clock.server.ts'
import { type JobContext, purgeJobs } from '../../services/jobs.server.ts'
import { purgeUploads } from '../../services/uploads.server.ts'

/** A file sent in one go that has not arrived whole after two days never will. */
const UPLOAD_MS = 2 * 86_400_000

/** Deletes finished jobs, and uploads that broke off. */
export async function purgeLeftovers({ db }: JobContext<'purge-leftovers'>): Promise<void> {
  const now = await productNow(db)
  const inPieces = await purgeUploads(db)
  const whole = await removeIncompleteAttachments(db, new Date(now.getTime() - UPLOAD_MS))
  const uploads = inPieces + whole
  const jobs = await purgeJobs(db)
  if (uploads + jobs > 0) log.info('deleted leftovers', { uploads, jobs })
}
