import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SegmentStatePage } from '#app/components/segment/segment-state-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { segmentStateSchema } from '#app/domain/schemas/segment-state.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { readSegmentStates } from '#app/services/segment-page.server.ts'
import { setSegmentState } from '#app/services/segment-states.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/state'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `State of ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  permitted(context, request, 'segment-state:set')
  const now = nowOf(context)
  const [segment, site] = await Promise.all([
    orRefuse(readSegmentStates(getDb(), params.tag, now)),
    getSite(getDb()),
  ])
  return { ...segment, now, zone: site.timeZone }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'segment-state:set')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const change = parseValues(segmentStateSchema(site.timeZone), typed)
    await setSegmentState(getDb(), actor, nowOf(context), { tag: params.tag, ...change })
    return redirectWithNotice(`/segments/${params.tag}`, `State of ${params.tag} set.`)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SegmentStateRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SegmentStatePage {...loaderData} failure={actionData} />
}
