import { purgeSessions } from '../../auth/session.server.ts'
import { log } from '../../log.server.ts'
import type { JobContext } from '../../services/jobs.server.ts'

/** Deletes the sessions that have ended. */
export async function purgeEndedSessions({ db }: JobContext<'purge-sessions'>): Promise<void> {
  const count = await purgeSessions(db)
  if (count > 0) log.info('deleted ended sessions', { count })
}
