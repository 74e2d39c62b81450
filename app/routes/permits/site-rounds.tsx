import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SiteRounds } from '#app/components/permits/site-rounds.tsx'
import { getDb } from '#app/db/client.server.ts'
import { permitRoundSchema } from '#app/domain/schemas/permit-site.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { readSiteRounds } from '#app/services/permit-site.server.ts'
import { recordPermitRound } from '#app/services/permit-test-steps.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/site-rounds'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Rounds of ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readSiteRounds(getDb(), actor, nowOf(context), params.number))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'permit:test')
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    const form = parseValues(permitRoundSchema(timeZone), typed)
    const said = await recordPermitRound(getDb(), actor, nowOf(context), params.number, form)
    return redirectWithNotice(`/permits/${params.number}/site/rounds`, said)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SiteRoundsRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SiteRounds page={loaderData} failure={actionData} />
}
