import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { DangersPage } from '#app/components/permits/dangers-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { TolerateSchema } from '#app/domain/schemas/safety-event.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { readAllDangers, tolerateDanger } from '#app/services/safety-events.server.ts'
import type { Route } from './+types/dangers'

const SHOWN_MS = 30 * 86_400_000

export function meta() {
  return [{ title: 'Dangers · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const now = nowOf(context)
  const dangers = await readAllDangers(getDb(), new Date(now.getTime() - SHOWN_MS))
  const asked = Number(url.searchParams.get('event'))
  return {
    ...dangers,
    mayTolerate: may(actor, 'permit:approve'),
    mayState: may(actor, 'heating:state'),
    chosen: dangers.open.some(({ id }) => id === asked) ? asked : null,
  }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'permit:approve')
  const typed = typedOf(await request.formData())
  try {
    const { eventId, ...form } = parseValues(TolerateSchema, typed)
    await tolerateDanger(getDb(), actor, nowOf(context), eventId, form)
    return redirectWithNotice('/permits/dangers', 'Signed and written down. The danger stays in sight.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function DangersRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <DangersPage {...loaderData} failure={actionData} />
}
