import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewPersonPage } from '#app/components/people/people-pages.tsx'
import { getDb } from '#app/db/client.server.ts'
import { newPersonSchema } from '#app/domain/schemas/people.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { addPerson } from '#app/services/people.server.ts'
import { getSite } from '#app/services/site.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/new-person'

export function meta() {
  return [{ title: 'Make an account · Ebbline' }]
}

export function loader({ context, request }: Route.LoaderArgs) {
  permitted(context, request, 'people:edit')
  return null
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'people:edit')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const form = parseValues(newPersonSchema(site.timeZone), typed)
    const personId = await addPerson(getDb(), actor, nowOf(context), form)
    return redirectWithNotice(`/people/${personId}`, `Account of ${form.name} made.`)
  } catch (error) {
    return refused(error, typed)
  }
}

export default function NewPersonRoute({ actionData }: Route.ComponentProps) {
  return <NewPersonPage failure={actionData} />
}
