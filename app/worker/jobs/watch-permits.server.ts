import { log } from '../../log.server.ts'
import { productNow } from '../../services/clock.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'
import { carryOutDue } from '../../services/permit-watch.server.ts'
import { finishRetentions } from '../../services/retention.server.ts'
import { watchDangers } from '../../services/safety-events.server.ts'

/** Looks through the permits once a minute for dangers; what is due by time is done by the loop at the second. */
export async function watchPermits({ db }: JobContext<'watch-permits'>): Promise<void> {
  const now = await productNow(db)
  const { done } = await carryOutDue(db, now)
  const watched = await watchDangers(db, now)
  // Only one that was broken off is still open here.
  const resumed = await finishRetentions(db, now)
  log.debug('looked through the permits', { done, watched, resumed })
}
