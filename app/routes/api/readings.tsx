import { nowOf } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { tokenFor } from '#app/services/api-tokens.server.ts'
import { takeInPost } from '#app/services/live-readings.server.ts'
import type { Route } from './+types/readings'
import { bytesOf, requestKeyOf } from './body.server.ts'
import { problem, problemOf } from './problem.server.ts'
import { countPost } from './rate-limit.server.ts'

/**
 * Takes live readings of a source: `POST` with a bearer token, an Idempotency-Key and JSON. Who is signed in does not
 * matter: a browser's cookie opens nothing here, so no other site can make a browser post.
 */
export async function action({ context, request, params }: Route.ActionArgs) {
  if (request.method !== 'POST') return onlyPost(request.method)
  try {
    const now = nowOf(context)
    const token = await tokenFor(getDb(), request.headers.get('Authorization'), params.code, now)
    countPost(token.id, machineNow())
    const requestKey = requestKeyOf(request.headers)
    const bytes = await bytesOf(request)
    const { answer } = await takeInPost(getDb(), token, now, { sourceCode: params.code, requestKey, bytes })
    return Response.json(answer)
  } catch (error) {
    return problemOf(error)
  }
}

/** Readings are read elsewhere. */
export function loader({ request }: Route.LoaderArgs) {
  return onlyPost(request.method)
}

function onlyPost(method: string): Response {
  return problem(405, 'method', `Found ${method}; this address takes POST only.`, {
    headers: { Allow: 'POST' },
  })
}
