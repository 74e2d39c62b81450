import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { BakesPage } from '#app/components/bakes/bakes-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readBakesPage } from '#app/services/bake-plans-page.server.ts'
import type { Route } from './+types/bakes'

export function meta() {
  return [{ title: 'Bakes · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return readBakesPage(getDb(), actor, nowOf(context))
}

export default function Bakes({ loaderData }: Route.ComponentProps) {
  return <BakesPage {...loaderData} />
}
