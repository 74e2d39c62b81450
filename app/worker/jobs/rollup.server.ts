import { log } from '../../log.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'
import { makeShareOfRollups } from '../../services/rollups.server.ts'

/** Makes the rollups of readings that have come, gone or changed. What is left when it is stopped stays due. */
export async function rollUp({ db, signal }: JobContext<'roll-up'>): Promise<void> {
  const turns = await makeShareOfRollups(db, signal)
  if (turns > 0) log.debug('made rollups', { turns })
}
