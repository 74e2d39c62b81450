import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { scheduleCalendar } from '#app/services/schedule-of-bakes-page.server.ts'
import type { Route } from './+types/schedule-ics'

/** The bakes of a schedule as a calendar. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const body = await orRefuse(scheduleCalendar(getDb(), Number(params.scheduleId), nowOf(context)))
  return new Response(body, {
    headers: {
      'Content-Type': 'text/calendar; charset=utf-8',
      'Content-Disposition': `attachment; filename="bake-schedule-${params.scheduleId}.ics"`,
    },
  })
}
