import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { planCalendar } from '#app/services/bake-plans-export.server.ts'
import type { Route } from './+types/plan-ics'

/** The steps of a plan as a calendar. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const body = await orRefuse(planCalendar(getDb(), Number(params.planId), nowOf(context)))
  return new Response(body, {
    headers: {
      'Content-Type': 'text/calendar; charset=utf-8',
      'Content-Disposition': `attachment; filename="bake-plan-${params.planId}.ics"`,
    },
  })
}
