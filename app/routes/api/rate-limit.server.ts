/**
 * How often one token may post. Counted in this process's memory by the machine's clock: the product runs one web
 * process, and a restart that forgets a minute's count harms nobody.
 */
import { DomainError } from '#app/domain/errors.ts'

const WINDOW_MS = 60_000
/** A logger with rows every second that posts each by itself needs sixty; the rest is room for what was held back. */
export const POSTS_PER_MINUTE = 120

const windows = new Map<number, { count: number; until: number }>()

/**
 * Counts a post of a token.
 *
 * @throws DomainError rate-limited, with `retryAfterSeconds` among its details
 */
export function countPost(tokenId: number, machine: Date): void {
  const at = machine.getTime()
  const open = windows.get(tokenId)
  if (open === undefined || open.until <= at) {
    windows.set(tokenId, { count: 1, until: at + WINDOW_MS })
    return
  }
  if (open.count >= POSTS_PER_MINUTE) {
    const retryAfterSeconds = Math.ceil((open.until - at) / 1000)
    throw new DomainError(
      'rate-limited',
      `This token has posted ${POSTS_PER_MINUTE} times within a minute, the most that is taken. Wait ${retryAfterSeconds} s, and send more readings in each post.`,
      { details: { retryAfterSeconds } },
    )
  }
  open.count += 1
}
