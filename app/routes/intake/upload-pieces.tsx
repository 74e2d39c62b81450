import { fromHere, nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { env } from '#app/env.server.ts'
import { answerTus } from '#app/server/tus.server.ts'
import { answerReceived, finishReceived } from '#app/server/upload.server.ts'
import type { Route } from './+types/upload-pieces'

/** How far an upload is (tus: HEAD). */
export function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'intake:take-in')
  return answerTus(getDb(), actor, nowOf(context), request, env().MAX_NIGHT_FILE_MIB)
}

/** Takes the next bytes (tus: PATCH); POST makes the import of a file that is all here, and may be asked again. */
export async function action({ context, request, params }: Route.ActionArgs) {
  fromHere(request)
  const actor = permitted(context, request, 'intake:take-in')
  if (request.method !== 'POST')
    return answerTus(getDb(), actor, nowOf(context), request, env().MAX_NIGHT_FILE_MIB)
  return answerReceived(await finishReceived(getDb(), actor, nowOf(context), params.token))
}
