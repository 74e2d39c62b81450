import { log } from '../../log.server.ts'
import { noteOwnDeviations } from '../../services/bake-deviations.server.ts'
import { productNow } from '../../services/clock.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'

/** Looks through the bakes under way for what left its plan or its limits; the same readings leave the same notes. */
export async function noteDeviations({ db }: JobContext<'note-deviations'>): Promise<void> {
  const standing = await noteOwnDeviations(db, await productNow(db))
  log.debug('looked for deviations of bakes', { standing })
}
