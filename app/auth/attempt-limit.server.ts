/**
 * How often somebody may get a password wrong. Counted in this process's memory by the machine's clock: the product
 * runs one web process, and a restart that forgets a few failures gives a guesser nothing worth having.
 */
import { DomainError } from '../domain/errors.ts'

/** Above this many keys the ones that have run out are dropped. */
const SWEEP_ABOVE = 5_000

export interface AttemptLimit {
  /** Counts one attempt before it is judged, so that many at once are no way round. @throws DomainError rate-limited */
  begin(key: string, machine: Date): void
  /** Forgets a key's attempts after one that succeeded. */
  succeed(key: string): void
}

/** Allows `max` attempts within `windowMs` of the first, then refuses until the window has passed. */
export function createAttemptLimit(max: number, windowMs: number): AttemptLimit {
  const attempts = new Map<string, { count: number; until: number }>()

  function sweep(at: number): void {
    if (attempts.size <= SWEEP_ABOVE) return
    for (const [key, entry] of attempts) if (entry.until <= at) attempts.delete(key)
  }

  return {
    begin(key, machine) {
      const at = machine.getTime()
      sweep(at)
      const entry = attempts.get(key)
      if (entry === undefined || entry.until <= at) {
        attempts.set(key, { count: 1, until: at + windowMs })
        return
      }
      if (entry.count >= max) {
        const minutes = Math.ceil((entry.until - at) / 60_000)
        throw new DomainError(
          'rate-limited',
          `Too many wrong passwords. Wait ${minutes} ${minutes === 1 ? 'minute' : 'minutes'} and try again.`,
        )
      }
      entry.count += 1
    },
    succeed(key) {
      attempts.delete(key)
    },
  }
}
