import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PersonPage } from '#app/components/people/person-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readPerson } from '#app/services/people.server.ts'
import { changePerson } from '#app/services/people-change.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/person'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.person.name ?? 'People'} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'people:view')
  const page = await orRefuse(readPerson(getDb(), actor, Number(params.personId), nowOf(context)))
  return { ...page, own: page.person.id === actor.personId }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'people:edit')
  const typed = typedOf(await request.formData())
  try {
    const said = await changePerson(
      getDb(),
      actor,
      nowOf(context),
      Number(params.personId),
      typed,
      parseValues,
    )
    return redirectWithNotice(`/people/${params.personId}`, said)
  } catch (error) {
    return refused(error, typed)
  }
}

export default function PersonRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <PersonPage {...loaderData} failure={actionData} />
}
