import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SiteLocks } from '#app/components/permits/site-locks.tsx'
import { getDb } from '#app/db/client.server.ts'
import { LockStepSchema } from '#app/domain/schemas/lock-step.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { takePointStep } from '#app/services/isolation-point-steps.server.ts'
import { takeBoxStep } from '#app/services/lock-box.server.ts'
import { readSiteLocks } from '#app/services/permit-site.server.ts'
import type { Route } from './+types/site-locks'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Locks of ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readSiteLocks(getDb(), actor, nowOf(context), params.number))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  // Each step asks for its own permission in the service: an absent owner's lock is an officer's matter.
  const actor = permitted(context, request, 'facility:view')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    const step = parseValues(LockStepSchema, typed)
    const said =
      step.act === 'box-on' || step.act === 'box-off' || step.act === 'box-off-absent'
        ? await takeBoxStep(getDb(), actor, now, params.number, step)
        : await takePointStep(getDb(), actor, now, params.number, step)
    return redirectWithNotice(`/permits/${params.number}/site/locks`, said)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SiteLocksRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SiteLocks page={loaderData} failure={actionData} />
}
