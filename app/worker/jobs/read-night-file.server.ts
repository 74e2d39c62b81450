import { productNow } from '../../services/clock.server.ts'
import { readLargeFile, takeInLargeFile } from '../../services/intake-large.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'

/** Reads a file that was too large to be read while its sender waited. */
export async function readNightFile({ db, payload, signal }: JobContext<'read-night-file'>): Promise<void> {
  await readLargeFile(db, payload, await productNow(db), signal)
}

/** Takes such a file in. */
export async function takeInNightFile({ db, payload }: JobContext<'take-in-night-file'>): Promise<void> {
  await takeInLargeFile(db, payload.importId, payload.actor, await productNow(db))
}
