/**
 * The machine's own time, for what is about the machine and not about the facility: sessions, leases, retries,
 * rate limits. Everything about the facility asks the product clock (`clock.server.ts`).
 */

/** Now, by the machine. */
export function machineNow(): Date {
  return new Date()
}

/** Milliseconds that only go forward, for measuring how long something took. */
export function elapsedMs(since: number): number {
  return performance.now() - since
}
