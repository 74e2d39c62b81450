import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { scheduleCsv } from '#app/services/schedule-of-bakes-page.server.ts'
import type { Route } from './+types/schedule-csv'

/** The bakes of a schedule as CSV. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const body = await orRefuse(scheduleCsv(getDb(), Number(params.scheduleId)))
  return new Response(body, {
    headers: {
      'Content-Type': 'text/csv; charset=utf-8',
      'Content-Disposition': `attachment; filename="bake-schedule-${params.scheduleId}.csv"`,
    },
  })
}
