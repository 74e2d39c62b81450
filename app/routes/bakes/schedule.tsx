import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SchedulePage } from '#app/components/bakes/schedule-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { newScheduleSchema, scheduleActSchema } from '#app/domain/schedule/forms.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { actOnSchedule, createSchedule } from '#app/services/schedule-of-bakes.server.ts'
import { readSchedulePage } from '#app/services/schedule-of-bakes-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/schedule'

export function meta() {
  return [{ title: 'Schedule of bakes · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const id = url.searchParams.get('id')
  return orRefuse(readSchedulePage(getDb(), actor, nowOf(context), id === null ? null : Number(id)))
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'bake:plan')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    const { timeZone } = await getSite(getDb())
    if (typed.act === 'create') {
      const id = await createSchedule(getDb(), actor, now, parseValues(newScheduleSchema(timeZone), typed))
      return redirectWithNotice(
        `/bakes/schedule?id=${id}`,
        'Schedule made. Propose places, or move bakes yourself.',
      )
    }
    const act = parseValues(scheduleActSchema(timeZone), typed)
    const done = await actOnSchedule(getDb(), actor, now, act)
    return redirectWithNotice(`/bakes/schedule?id=${act.scheduleId}`, done)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function ScheduleRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SchedulePage {...loaderData} failure={actionData} />
}
