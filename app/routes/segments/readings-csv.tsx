import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { segmentReadingsCsv } from '#app/services/segment-csv.server.ts'
import type { Route } from './+types/readings-csv'

/** Readings of a segment's gauges as CSV, streamed: every value with its quality, file and line. */
export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  const body = await orRefuse(segmentReadingsCsv(getDb(), params.tag, nowOf(context), url.searchParams))
  return new Response(body, {
    headers: {
      'Content-Type': 'text/csv; charset=utf-8',
      'Content-Disposition': `attachment; filename="${params.tag}-readings.csv"`,
    },
  })
}
