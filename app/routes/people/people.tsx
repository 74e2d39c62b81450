import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PeoplePage } from '#app/components/people/people-pages.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readPeople } from '#app/services/people.server.ts'
import type { Route } from './+types/people'

export function meta() {
  return [{ title: 'People · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'people:view')
  return readPeople(getDb(), actor, nowOf(context))
}

export default function PeopleRoute({ loaderData }: Route.ComponentProps) {
  return <PeoplePage {...loaderData} />
}
