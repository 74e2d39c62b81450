/**
 * What the product does to permits when a time has passed: a validity or a window that ends, an approval that nobody
 * took up. Done by the product's clock, at the second; what fell due while the product stood still, or was jumped over
 * by the demo clock, is done as of the time it was due and says when it was noticed.
 */
import type { Db } from '../db/client.server.ts'
import { listPermitTimes } from '../db/queries/permit-times.server.ts'
import { DomainError } from '../domain/errors.ts'
import { dueAct, nextDue } from '../domain/permit-clock.ts'
import { log } from '../log.server.ts'
import { productAct } from './permits.server.ts'

export interface Watched {
  /** Permits that have been expired or lapsed by this look. */
  done: number
  /** When, by the product's clock, the next time passes; null where none is waited for. */
  nextAt: Date | null
}

/**
 * Does what is due. Any number may look at once: each act is done by one of them.
 *
 * @throws the first error there was, after the other permits have been seen to
 */
export async function carryOutDue(db: Db, now: Date): Promise<Watched> {
  let done = 0
  let nextMs: number | null = null
  const errors: unknown[] = []
  for (const permit of await listPermitTimes(db)) {
    const due = dueAct(permit, now)
    if (due === null) {
      const at = nextDue(permit)?.at.getTime() ?? null
      if (at !== null && (nextMs === null || at < nextMs)) nextMs = at
      continue
    }
    try {
      await productAct(db, now, permit.number, due.act, { at: due.at })
      log.info('a permit has run out of time', { permit: permit.number, act: due.act, at: due.at })
      done += 1
    } catch (error) {
      // Somebody was first: another worker, or a person whose act took the permit out of that state.
      if (error instanceof DomainError && error.code === 'conflict') continue
      errors.push(error)
    }
  }
  if (errors.length > 0) throw errors[0]
  return { done, nextAt: nextMs === null ? null : new Date(nextMs) }
}
