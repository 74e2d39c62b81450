import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewPermitPage } from '#app/components/permits/new-permit-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { NewPermitSchema } from '#app/domain/schemas/permit-form.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { prefillFromPlan, prefillFromSegments, readNewPermit } from '#app/services/permit-prefill.server.ts'
import { createPermit } from '#app/services/permits.server.ts'
import type { Route } from './+types/new-permit'

export function meta() {
  return [{ title: 'New permit · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'permit:draft')
  return orRefuse(readNewPermit(getDb(), actor, nowOf(context), url.searchParams.get('plan')))
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'permit:draft')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  const db = getDb()
  try {
    const form = parseValues(NewPermitSchema, typed)
    const content =
      form.from === 'plan'
        ? await prefillFromPlan(db, actor, now, form.link.planId, form.link.number)
        : await prefillFromSegments(db, actor, now, {
            segments: [form.segment, form.second].filter((tag) => tag !== ''),
            celsius: form.celsius,
            supply: form.supply,
          })
    const number = await createPermit(db, actor, now, { content })
    return redirectWithNotice(`/permits/${number}/edit`, `Draft ${number} made. Nothing is requested yet.`)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function NewPermitRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <NewPermitPage {...loaderData} failure={actionData} />
}
