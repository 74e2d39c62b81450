import { env } from '#app/env.server.ts'

/** Address of the site as it is printed: the one that people use, or the one that this request came to. */
export function printOrigin(request: Request): string {
  const { PUBLIC_URL } = env()
  return PUBLIC_URL === '' ? new URL(request.url).origin : PUBLIC_URL
}
