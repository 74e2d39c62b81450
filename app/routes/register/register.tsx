import { permitted } from '#app/auth/guard.server.ts'
import { RegisterIndexPage } from '#app/components/register/register-pages.tsx'
import { getDb } from '#app/db/client.server.ts'
import { readRegisterIndex } from '#app/services/register-page.server.ts'
import type { Route } from './+types/register'

export function meta() {
  return [{ title: 'Register · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  permitted(context, request, 'facility:view')
  return readRegisterIndex(getDb(), url.searchParams)
}

export default function RegisterRoute({ loaderData }: Route.ComponentProps) {
  return <RegisterIndexPage {...loaderData} />
}
