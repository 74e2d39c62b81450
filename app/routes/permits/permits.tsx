import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PermitsPage } from '#app/components/permits/permits-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readPermitRegister } from '#app/services/permit-register.server.ts'
import type { Route } from './+types/permits'

export function meta() {
  return [{ title: 'Permits · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return readPermitRegister(getDb(), actor, nowOf(context), url.searchParams)
}

export default function PermitsRoute({ loaderData }: Route.ComponentProps) {
  return <PermitsPage {...loaderData} />
}
