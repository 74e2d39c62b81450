import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { HeatingPage } from '#app/components/permits/heating-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { heatingSchema } from '#app/domain/schemas/heating.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { readHeatingPanel } from '#app/services/heating.server.ts'
import { knownSegment, stateHeating } from '#app/services/heating-statements.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/heating'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Heating of ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const now = nowOf(context)
  const segments = [await orRefuse(knownSegment(getDb(), params.tag))]
  const [panel, { timeZone }] = await Promise.all([
    readHeatingPanel(getDb(), segments, now),
    getSite(getDb()),
  ])
  return {
    ...panel,
    segments,
    back: { to: `/segments/${params.tag}`, name: params.tag },
    mayState: may(actor, 'heating:state'),
    now,
    zone: timeZone,
  }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'heating:state')
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    const form = parseValues(heatingSchema(timeZone), typed)
    const fact = await stateHeating(getDb(), actor, nowOf(context), [params.tag], form)
    return redirectWithNotice(`/segments/${params.tag}/heating`, `Written down. ${fact.text}`)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function HeatingRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <HeatingPage {...loaderData} failure={actionData} />
}
