import { redirect } from 'react-router'
import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { permitOfCode } from '#app/services/permit-paper.server.ts'
import type { Route } from './+types/short-code'

/** From the short code of a printed sheet to the permit as it stands now. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  throw redirect(`/permits/${await orRefuse(permitOfCode(getDb(), params.code))}`)
}

/** Shown only through the error page, when no permit has the code. */
export default function ShortCodeRoute() {
  return null
}
