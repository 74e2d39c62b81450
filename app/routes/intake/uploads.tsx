import { fromHere, nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { env } from '#app/env.server.ts'
import { answerTus } from '#app/server/tus.server.ts'
import type { Route } from './+types/uploads'

/** Begins an upload in pieces (tus: POST with Upload-Length and Upload-Metadata); answers with its address. */
export function action({ context, request }: Route.ActionArgs) {
  fromHere(request)
  const actor = permitted(context, request, 'intake:take-in')
  return answerTus(getDb(), actor, nowOf(context), request, env().MAX_NIGHT_FILE_MIB)
}
