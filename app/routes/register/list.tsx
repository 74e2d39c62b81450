import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { RegisterListPage } from '#app/components/register/register-pages.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { KIND_FACTS } from '#app/domain/schemas/register.ts'
import { readRegisterList } from '#app/services/register-page.server.ts'
import type { Route } from './+types/list'
import { kindOf } from './refused.server.ts'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData === undefined ? 'Register' : KIND_FACTS[loaderData.kind].title} · Ebbline` }]
}

export async function loader({ context, request, url, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const list = await readRegisterList(getDb(), kindOf(params.kind), nowOf(context), url.searchParams)
  return { ...list, mayEdit: may(actor, 'register:edit') }
}

export default function RegisterListRoute({ loaderData }: Route.ComponentProps) {
  return <RegisterListPage {...loaderData} />
}
