/** Doing something again and again beside everything else that a process does, until it is told to stop. */
import { setTimeout as sleep } from 'node:timers/promises'
import { isUnreachable } from '../db/errors.server.ts'
import { log } from '../log.server.ts'

/** After an error, so that a database that is away is not hammered. */
const TROUBLE_MS = 5_000

/** Calls `step` again and again, after the pause it asks for, until the signal. An error is logged and waited out. */
export async function repeat(what: string, signal: AbortSignal, step: () => Promise<number>): Promise<void> {
  while (!signal.aborted) {
    let pause: number
    try {
      pause = await step()
    } catch (error) {
      pause = TROUBLE_MS
      if (isUnreachable(error)) log.warn(`could not ${what}: the database does not answer`)
      else log.error(`could not ${what}`, { error })
    }
    await interruptible(pause, signal)
  }
}

async function interruptible(ms: number, signal: AbortSignal): Promise<void> {
  try {
    await sleep(ms, undefined, { signal })
  } catch (error) {
    if (!signal.aborted) throw error
  }
}
