import { permitted } from '#app/auth/guard.server.ts'
import { RecordListPage } from '#app/components/people/record-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readRecordPage } from '#app/services/people-record.server.ts'
import type { Route } from './+types/record'

export function meta() {
  return [{ title: 'Record of who did what · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'people:view')
  return readRecordPage(getDb(), actor, url.searchParams)
}

export default function RecordRoute({ loaderData }: Route.ComponentProps) {
  return <RecordListPage {...loaderData} />
}
