import { fromHere, nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { env } from '#app/env.server.ts'
import { answerReceived, fileFromBody, receiveFile } from '#app/server/upload.server.ts'
import type { Route } from './+types/upload'

/** Takes the bare bytes of one night file (`?source=…&name=…`), streamed; answers with the import's address as JSON. */
export async function action({ context, request }: Route.ActionArgs) {
  fromHere(request)
  const actor = permitted(context, request, 'intake:take-in')
  const answer = await receiveFile(getDb(), actor, nowOf(context), () =>
    fileFromBody(request, env().MAX_NIGHT_FILE_MIB),
  )
  return answerReceived(answer)
}
