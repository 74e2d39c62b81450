import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewWorkPage } from '#app/components/permits/work-form.tsx'
import { getDb } from '#app/db/client.server.ts'
import { plannedWorkSchema } from '#app/domain/schemas/planned-work.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { planWork } from '#app/services/planned-work.server.ts'
import { readWorkPlaces } from '#app/services/planned-work-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/new-work'

export function meta() {
  return [{ title: 'Plan work · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'work:plan')
  return { places: await readWorkPlaces(getDb(), actor, nowOf(context)) }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'work:plan')
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    const id = await planWork(getDb(), actor, nowOf(context), parseValues(plannedWorkSchema(timeZone), typed))
    return redirectWithNotice(`/permits/works/${id}`, 'Planned. Below is what it would meet.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function NewWorkRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <NewWorkPage {...loaderData} failure={actionData} />
}
