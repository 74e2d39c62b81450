import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { WorkPage } from '#app/components/permits/work-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { ChangeWorkSchema, plannedWorkSchema, WorkActSchema } from '#app/domain/schemas/planned-work.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { actOnWork, changeWork } from '#app/services/planned-work.server.ts'
import { readWork, readWorkPlaces } from '#app/services/planned-work-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/work'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.work.title ?? 'Work'} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const page = await orRefuse(readWork(getDb(), actor, nowOf(context), Number(params.workId)))
  return { ...page, places: page.may.plan ? await readWorkPlaces(getDb(), actor, nowOf(context)) : null }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  // Each act asks for its own permission in the service: an officer rules, whoever plans work begins and ends it.
  const actor = permitted(context, request, 'work:plan')
  const typed = typedOf(await request.formData())
  const id = Number(params.workId)
  const now = nowOf(context)
  const here = `/permits/works/${params.workId}`
  try {
    if (typed.act === 'change') {
      const { timeZone } = await getSite(getDb())
      const form = parseValues(plannedWorkSchema(timeZone).and(ChangeWorkSchema), typed)
      const { wasLimited } = await changeWork(getDb(), actor, now, id, form)
      return redirectWithNotice(
        here,
        wasLimited ? 'Changed. The officer’s ruling was on the other and no longer holds.' : 'Changed.',
      )
    }
    return redirectWithNotice(
      here,
      await actOnWork(getDb(), actor, now, id, parseValues(WorkActSchema, typed)),
    )
  } catch (error) {
    return failure(error, typed)
  }
}

export default function WorkRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <WorkPage {...loaderData} failure={actionData} />
}
