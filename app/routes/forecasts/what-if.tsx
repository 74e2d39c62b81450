import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { WhatIfPage } from '#app/components/what-if/what-if-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readWhatIfPage } from '#app/services/what-if.server.ts'
import type { Route } from './+types/what-if'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `What if: ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  return await orRefuse(readWhatIfPage(getDb(), params.tag, nowOf(context), url.searchParams))
}

export default function WhatIf({ loaderData }: Route.ComponentProps) {
  return <WhatIfPage key={loaderData.tag} {...loaderData} />
}
