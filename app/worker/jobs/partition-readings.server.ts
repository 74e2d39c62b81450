import { log } from '../../log.server.ts'
import { productNow } from '../../services/clock.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'
import { createReadingPartitions } from '../../services/partitions.server.ts'

/** Makes the months ahead of the product's time. */
export async function partitionReadings({ db }: JobContext<'partition-readings'>): Promise<void> {
  const made = await createReadingPartitions(db, await productNow(db))
  if (made.length > 0) log.info('made months of readings', { partitions: made })
}
