/**
 * When a last reading still says something about now. Night files arrive in batches, so "fresh" is measured against the
 * end of the source's newest file: the last good reading must be within three periods of that end, and the file itself
 * younger than 26 hours. A channel that stops inside a file that goes on is therefore unknown, though its last value is
 * only hours old. (Definition of our own; common practice, no source.)
 */

const FILE_MAX_AGE_MS = 26 * 3_600_000
const PERIODS = 3
/** A reading typed by hand has no file around it; it counts for one working shift. */
const TYPED_MAX_AGE_MS = 12 * 3_600_000

export interface FreshnessInput {
  lastGoodAt: Date | null
  /** Last instant in the newest accepted file of the source; null for a source without files (typed readings). */
  sourceEndAt: Date | null
  periodSeconds: number
  now: Date
}

/** Whether the last good reading may stand for the present. */
export function isFresh({ lastGoodAt, sourceEndAt, periodSeconds, now }: FreshnessInput): boolean {
  if (lastGoodAt === null) return false
  if (sourceEndAt === null) return now.getTime() - lastGoodAt.getTime() < TYPED_MAX_AGE_MS
  if (now.getTime() - sourceEndAt.getTime() >= FILE_MAX_AGE_MS) return false
  return sourceEndAt.getTime() - lastGoodAt.getTime() <= PERIODS * periodSeconds * 1000
}
