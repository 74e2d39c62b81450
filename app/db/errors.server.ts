/** What a database error means, told by its number: drizzle wraps the driver's error, and names differ between servers. */

function errnoOf(error: unknown): number | undefined {
  let current: unknown = error
  for (let depth = 0; depth < 5 && current instanceof Error; depth += 1) {
    const errno = (current as { errno?: unknown }).errno
    if (typeof errno === 'number' && errno > 0) return errno
    current = current.cause
  }
  return undefined
}

/** A unique key already holds this value. */
export function isDuplicate(error: unknown): boolean {
  return errnoOf(error) === 1062
}

/** A row that something else refers to, or a reference to a row that is not there. */
export function isForeignKey(error: unknown): boolean {
  const errno = errnoOf(error)
  return errno === 1451 || errno === 1452
}

/** A CHECK constraint refused the row. */
export function isCheck(error: unknown): boolean {
  return errnoOf(error) === 4025
}

/** Deadlock, lock wait timeout, or "changed since last read": the whole transaction may be tried again. */
export function isRetryable(error: unknown): boolean {
  const errno = errnoOf(error)
  return errno === 1213 || errno === 1205 || errno === 1020
}

/** The server cannot be reached or went away. */
export function isUnreachable(error: unknown): boolean {
  let current: unknown = error
  for (let depth = 0; depth < 5 && current instanceof Error; depth += 1) {
    const code = (current as { code?: unknown }).code
    if (
      typeof code === 'string' &&
      /^(ECONNREFUSED|ECONNRESET|EPIPE|ETIMEDOUT|PROTOCOL_CONNECTION_LOST)$/.test(code)
    ) {
      return true
    }
    current = current.cause
  }
  return false
}
