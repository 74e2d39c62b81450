import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { WorksPage } from '#app/components/permits/works-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readWorks } from '#app/services/planned-work-page.server.ts'
import type { Route } from './+types/works'

export function meta() {
  return [{ title: 'Works in the tunnel · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return readWorks(getDb(), actor, nowOf(context))
}

export default function WorksRoute({ loaderData }: Route.ComponentProps) {
  return <WorksPage {...loaderData} />
}
