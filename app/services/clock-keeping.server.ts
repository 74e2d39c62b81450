/**
 * Keeping the product clock while a process runs. The web server and the worker both do it: either may be gone for a
 * while, and the clock must not go back when it returns to find that the other one ran on.
 */
import type { Db } from '../db/client.server.ts'
import { log } from '../log.server.ts'
import { keepClock, resumeClock } from './clock.server.ts'
import { repeat } from './repeat.server.ts'

const EVERY_MS = 2_000

/**
 * Tries until the clock has been resumed. To be called before a process keeps the clock or asks for the time: keeping a
 * clock that has not been resumed would jump it ahead.
 *
 * @returns false when told to stop before the database answered
 */
export async function resumeClockWhenAble(db: Db, signal: AbortSignal): Promise<boolean> {
  const resumed = new AbortController()
  await repeat('resume the clock', AbortSignal.any([signal, resumed.signal]), async () => {
    await resumeClock(db)
    resumed.abort()
    return 0
  })
  return resumed.signal.aborted
}

/** Notes the time until the signal, and once more then. The clock must have been resumed. */
export async function keepClockGoing(db: Db, signal: AbortSignal): Promise<void> {
  await repeat('keep the clock', signal, async () => {
    await keepClock(db)
    return EVERY_MS
  })
  try {
    await keepClock(db)
  } catch (error) {
    log.warn('the last moment of the clock could not be noted', { error })
  }
}
