/** How the long-running processes learn that they are to end. */

/**
 * Resolves when this process is told to end: by SIGTERM or SIGINT, or because the start command that spawned it is
 * gone, which shows as the end of the channel between them. Later signals are ignored, because both may come at once.
 */
export function untilStopped(): Promise<string> {
  return new Promise((resolve) => {
    process.on('SIGTERM', () => resolve('SIGTERM'))
    process.on('SIGINT', () => resolve('SIGINT'))
    if (process.connected) process.on('disconnect', () => resolve('the start command ended'))
  })
}

/** Tells the start command, if there is one, that this process is at work. */
export function reportReady(facts: Record<string, unknown> = {}): void {
  process.send?.({ ready: true, ...facts })
}

/** Ends this process with status 1 when an orderly end has not come about in time. */
export function endWithin(ms: number): void {
  setTimeout(() => process.exit(1), ms).unref()
}
