import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { OptionsPage } from '#app/components/bakes/options-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { readOptionsQuery } from '#app/domain/bake-options-query.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readBakeOptions } from '#app/services/bake-options.server.ts'
import type { Route } from './+types/options'

export function meta() {
  return [{ title: 'Options for a bake · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const query = readOptionsQuery(url.searchParams)
  const page = await orRefuse(readBakeOptions(getDb(), query, nowOf(context)))
  return { ...page, mayPlan: may(actor, 'bake:plan') }
}

export default function BakeOptionsRoute({ loaderData }: Route.ComponentProps) {
  return <OptionsPage {...loaderData} />
}
