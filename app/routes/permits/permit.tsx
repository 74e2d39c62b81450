import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { PermitPage } from '#app/components/permits/permit-page.tsx'
import { StopPage } from '#app/components/permits/stop-card.tsx'
import { getDb } from '#app/db/client.server.ts'
import { isOfferedAct } from '#app/domain/permit-offers.ts'
import { rolesHave } from '#app/domain/roles.ts'
import { type FormAct, permitActSchema } from '#app/domain/schemas/permit-act.ts'
import { PermitRulingSchema } from '#app/domain/schemas/permit-ruling.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { ruleOnConflict } from '#app/services/permit-conflicts.server.ts'
import { readPermitPage, readStopPage } from '#app/services/permit-page.server.ts'
import { actOnPermit } from '#app/services/permits.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/permit'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `${params.number} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'permit:stop')
  const now = nowOf(context)
  // Whoever may stop work and see nothing else of the facility gets the stop card and nothing else.
  if (!rolesHave(actor.roles, 'facility:view')) {
    return { kind: 'stop' as const, ...(await orRefuse(readStopPage(getDb(), now, params.number))) }
  }
  const act = url.searchParams.get('act')
  const page = await orRefuse(readPermitPage(getDb(), actor, now, params.number))
  return { kind: 'page' as const, ...page, asked: isOfferedAct(act) ? act : null }
}

const DONE: Record<FormAct, string> = {
  request: 'Asked for. It waits for a safety officer.',
  return: 'Sent back.',
  refuse: 'Refused. The permit has ended.',
  approve: 'Approved for its window. It is live once its holder accepts it on site.',
  withdraw: 'Withdrawn.',
  discard: 'Discarded.',
  'site-check': 'Site check written down.',
  accept: 'Accepted. The permit is live.',
  'hand-over': 'You hold the permit now.',
  revalidate: 'Revalidated.',
  extend: 'Extended.',
  suspend: 'Stopped and written down. Now make it safe: this has switched nothing off.',
  'made-safe': 'Written down.',
  resume: 'Live again.',
  'hand-back': 'Handed back. An officer inspects the site.',
  'return-to-holder': 'Given back to the holder. The permit is suspended.',
  cancel: 'Cancelled. Take the posted copies down.',
}

export async function action({ context, request, params }: Route.ActionArgs) {
  // Each act asks for its own permission in the service; whoever sees the page may press.
  const actor = permitted(context, request, 'permit:stop')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    if (typed.act === 'rule') {
      await ruleOnConflict(getDb(), actor, now, params.number, parseValues(PermitRulingSchema, typed))
      return redirectWithNotice(`/permits/${params.number}#conflicts`, 'Ruling signed.')
    }
    const { timeZone } = await getSite(getDb())
    const form = parseValues(permitActSchema(timeZone), typed)
    await actOnPermit(getDb(), actor, now, params.number, form)
    return redirectWithNotice(`/permits/${params.number}`, DONE[form.act])
  } catch (error) {
    return failure(error, typed)
  }
}

export default function PermitRoute({ loaderData, actionData }: Route.ComponentProps) {
  return loaderData.kind === 'stop' ? (
    <StopPage {...loaderData} failure={actionData} />
  ) : (
    <PermitPage {...loaderData} failure={actionData} />
  )
}
