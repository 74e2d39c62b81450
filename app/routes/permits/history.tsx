import { permitted } from '#app/auth/guard.server.ts'
import { PermitHistoryPage } from '#app/components/permits/history-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readPermitHistory } from '#app/services/permit-story.server.ts'
import type { Route } from './+types/history'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Story of ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  return orRefuse(readPermitHistory(getDb(), params.number))
}

export default function PermitHistoryRoute({ loaderData }: Route.ComponentProps) {
  return <PermitHistoryPage {...loaderData} />
}
