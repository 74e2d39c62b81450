import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewThingPage } from '#app/components/register/thing-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { editedSchema, KIND_FACTS } from '#app/domain/schemas/register.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { addThing } from '#app/services/register-edit.server.ts'
import { readNewThing } from '#app/services/register-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/new'
import { kindOf, refused } from './refused.server.ts'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `Add ${loaderData === undefined ? '' : KIND_FACTS[loaderData.kind].one} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'register:edit')
  return orRefuse(readNewThing(getDb(), kindOf(params.kind)))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'register:edit')
  const { kind } = await orRefuse(readNewThing(getDb(), kindOf(params.kind)))
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const form = parseValues(editedSchema(kind, site.timeZone, true), typed)
    await addThing(getDb(), actor, nowOf(context), kind, form)
    return redirectWithNotice(
      `/register/${kind}/${encodeURIComponent(form.tag)}`,
      `${form.tag} added to the register.`,
    )
  } catch (error) {
    return refused(error, typed)
  }
}

export default function NewThingRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <NewThingPage {...loaderData} failure={actionData} />
}
