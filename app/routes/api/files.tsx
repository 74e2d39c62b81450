import { nowOf } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import type { FileAnswer } from '#app/domain/schemas/api-answers.ts'
import { env } from '#app/env.server.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { fileFromPut } from '#app/server/upload.server.ts'
import { receiveSentFile } from '#app/services/api-files.server.ts'
import { tokenFor } from '#app/services/api-tokens.server.ts'
import type { Route } from './+types/files'
import { problem, problemOf } from './problem.server.ts'
import { countPost } from './rate-limit.server.ts'

/**
 * Takes a night file of a source: `PUT` with a bearer token and the bare bytes as the body, streamed. A cookie opens
 * nothing here. The file waits in the log intake for a person; the same bytes again change nothing.
 */
export async function action({ context, request, params }: Route.ActionArgs) {
  if (request.method !== 'PUT') return onlyPut(request.method)
  try {
    const now = nowOf(context)
    const token = await tokenFor(getDb(), request.headers.get('Authorization'), params.code, now)
    countPost(token.id, machineNow())
    const file = fileFromPut(request, {
      sourceCode: params.code,
      fileName: params.name,
      limitMib: env().MAX_NIGHT_FILE_MIB,
    })
    const { importId, state, again } = await receiveSentFile(getDb(), token, now, file)
    const href = `/intake/${importId}`
    const answer: FileAnswer = { importId, state, again, href }
    return Response.json(answer, { status: again ? 200 : 201, headers: { Location: href } })
  } catch (error) {
    return problemOf(error)
  }
}

/** Files are read elsewhere. */
export function loader({ request }: Route.LoaderArgs) {
  return onlyPut(request.method)
}

function onlyPut(method: string): Response {
  return problem(405, 'method', `Found ${method}; this address takes PUT only.`, {
    headers: { Allow: 'PUT' },
  })
}
