import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { EntryPage } from '#app/components/logbook/entry-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { AmendmentSchema } from '#app/domain/schemas/logbook.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { amendEntry, readEntry } from '#app/services/logbook.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/entry'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Log entry ${params.entryId} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'entry:view')
  const [entry, site] = await Promise.all([
    orRefuse(readEntry(getDb(), actor, Number(params.entryId))),
    getSite(getDb()),
  ])
  return { entry, zone: site.timeZone, own: entry.authorId === actor.personId }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'entry:write')
  const typed = typedOf(await request.formData())
  try {
    const amendment = parseValues(AmendmentSchema, typed)
    await amendEntry(getDb(), actor, nowOf(context), Number(params.entryId), amendment)
    return redirectWithNotice(`/logbook/${params.entryId}`, 'Amendment written and signed.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function EntryRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <EntryPage {...loaderData} failure={actionData} />
}
