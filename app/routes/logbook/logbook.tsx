import { permitted } from '#app/auth/guard.server.ts'
import { LogbookPage } from '#app/components/logbook/logbook-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { findLogbookPage } from '#app/services/logbook-page.server.ts'
import type { Route } from './+types/logbook'

export function meta() {
  return [{ title: 'Logbook · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  permitted(context, request, 'entry:view')
  return findLogbookPage(getDb(), url.searchParams)
}

export default function Logbook({ loaderData }: Route.ComponentProps) {
  return <LogbookPage {...loaderData} />
}
