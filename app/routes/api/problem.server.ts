/** Errors of the API as RFC 9457 problem details, with what was found, expected and how to mend it. */
import { DomainError } from '#app/domain/errors.ts'
import type { Problem } from '#app/domain/schemas/api-answers.ts'
import { FileRefused } from '#app/services/api-files.server.ts'
import { PostRefused } from '#app/services/live-readings.server.ts'

/** Reason phrases of RFC 9110 (429: RFC 6585) for the statuses that domain errors have. */
const TITLES: Record<number, string> = {
  400: 'Bad Request',
  401: 'Unauthorized',
  403: 'Forbidden',
  404: 'Not Found',
  405: 'Method Not Allowed',
  409: 'Conflict',
  413: 'Content Too Large',
  415: 'Unsupported Media Type',
  422: 'Unprocessable Content',
  429: 'Too Many Requests',
  503: 'Service Unavailable',
}

/** An answer of the type application/problem+json. */
export function problem(
  status: number,
  code: string,
  detail: string,
  extra: { headers?: Record<string, string>; members?: Record<string, unknown> } = {},
): Response {
  const plain: Problem = { type: 'about:blank', title: TITLES[status] ?? 'Error', status, code, detail }
  const body = { ...plain, ...extra.members }
  return new Response(JSON.stringify(body), {
    status,
    headers: { 'Content-Type': 'application/problem+json', ...extra.headers },
  })
}

/** The answer to what a service threw; anything but a domain error is thrown on. */
export function problemOf(error: unknown): Response {
  if (!(error instanceof DomainError)) throw error
  const headers: Record<string, string> = {}
  if (error.status === 401) headers['WWW-Authenticate'] = 'Bearer realm="Ebbline"'
  const { retryAfterSeconds } = error.details
  if (typeof retryAfterSeconds === 'number') headers['Retry-After'] = String(retryAfterSeconds)
  return problem(error.status, error.code, error.message, { headers, members: membersOf(error) })
}

/** What a program is told beyond the sentence: which readings, or which line of which file. */
function membersOf(error: DomainError): Record<string, unknown> | undefined {
  if (error instanceof PostRefused) return { errorTotal: error.total, errors: error.faults }
  if (!(error instanceof FileRefused)) return undefined
  const { code, line, column, found, expected, mend } = error.refusal
  return { importId: error.importId, errors: [{ code, line, column, found, expected, mend }] }
}
