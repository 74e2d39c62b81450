/**
 * Errors that a person can mend. Each carries a stable code, a sentence for the reader, and the HTTP status that
 * both the pages and the API answer with.
 */
export const ERROR_STATUS = {
  'bad-input': 400,
  'not-signed-in': 401,
  forbidden: 403,
  'not-found': 404,
  conflict: 409,
  'too-large': 413,
  'wrong-type': 415,
  'not-acceptable-now': 422,
  'signature-refused': 422,
  'rate-limited': 429,
  unavailable: 503,
} as const

export type ErrorCode = keyof typeof ERROR_STATUS

/** Messages per form field, in the order they were found. */
export type FieldErrors = Record<string, string[]>

export class DomainError extends Error {
  readonly code: ErrorCode
  readonly status: number
  readonly fields: FieldErrors
  /** Facts for the log or the API; never shown raw to a person. */
  readonly details: Record<string, unknown>

  constructor(
    code: ErrorCode,
    message: string,
    options: { fields?: FieldErrors; details?: Record<string, unknown>; cause?: unknown } = {},
  ) {
    super(message, options.cause === undefined ? undefined : { cause: options.cause })
    this.name = 'DomainError'
    this.code = code
    this.status = ERROR_STATUS[code]
    this.fields = options.fields ?? {}
    this.details = options.details ?? {}
  }
}
