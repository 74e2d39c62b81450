import { permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { planCsv } from '#app/services/bake-plans-export.server.ts'
import type { Route } from './+types/plan-csv'

/** The predicted curves of a plan as CSV. */
export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const body = await orRefuse(planCsv(getDb(), Number(params.planId)))
  return new Response(body, {
    headers: {
      'Content-Type': 'text/csv; charset=utf-8',
      'Content-Disposition': `attachment; filename="bake-plan-${params.planId}.csv"`,
    },
  })
}
