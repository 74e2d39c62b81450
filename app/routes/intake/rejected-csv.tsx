import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { rejectedLinesCsv } from '#app/services/intake-pages.server.ts'
import type { Route } from './+types/rejected-csv'

/** The lines of a file that were turned away, each with what was found, what was expected and how to mend it. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const { text } = await orRefuse(rejectedLinesCsv(getDb(), actor, Number(params.importId)))
  return new Response(text, {
    headers: {
      'Content-Type': 'text/csv; charset=utf-8',
      'Content-Disposition': `attachment; filename="import-${Number(params.importId)}-rejected.csv"`,
    },
  })
}
