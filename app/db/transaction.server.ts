import type { Db, DbOrTx } from './client.server.ts'
import { isRetryable } from './errors.server.ts'

const ATTEMPTS = 6

/**
 * Runs work in one transaction and tries the whole of it again when the database asks for that (deadlock, lock wait,
 * changed since read), also when only COMMIT says so. The work must therefore have no effect outside the database.
 */
export async function tx<Result>(db: Db, work: (tx: DbOrTx) => Promise<Result>): Promise<Result> {
  for (let attempt = 1; ; attempt += 1) {
    try {
      return await db.transaction(work)
    } catch (error) {
      if (attempt >= ATTEMPTS || !isRetryable(error)) throw error
      // Growing pause with jitter, so that two losers do not meet again at once.
      const pause = 2 ** attempt * 5 * (0.5 + Math.random())
      await new Promise((resolve) => setTimeout(resolve, pause))
    }
  }
}
