import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { WaitingPage } from '#app/components/people/waiting-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { DecideGrantSchema } from '#app/domain/schemas/people.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { decideGrant } from '#app/services/grants.server.ts'
import { readWaiting } from '#app/services/people.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/waiting'

export function meta() {
  return [{ title: 'Roles that wait · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'grant:confirm')
  return { grants: await readWaiting(getDb(), actor) }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'grant:confirm')
  const typed = typedOf(await request.formData())
  try {
    const decision = parseValues(DecideGrantSchema, typed)
    await decideGrant(getDb(), actor, nowOf(context), decision)
    return redirectWithNotice(
      '/people/waiting',
      decision.decision === 'confirm' ? 'Role confirmed.' : 'Role refused.',
    )
  } catch (error) {
    return refused(error, typed)
  }
}

export default function WaitingRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <WaitingPage {...loaderData} failure={actionData} />
}
