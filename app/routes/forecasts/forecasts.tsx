import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { ForecastsPage } from '#app/components/forecasts/forecasts-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readForecastsPage } from '#app/services/forecasts-page.server.ts'
import type { Route } from './+types/forecasts'

export function meta() {
  return [{ title: 'Forecasts · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  permitted(context, request, 'forecast:run')
  return readForecastsPage(getDb(), nowOf(context))
}

export default function ForecastsRoute({ loaderData }: Route.ComponentProps) {
  return <ForecastsPage {...loaderData} />
}
