import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SegmentPage } from '#app/components/segment/segment-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { rolesHave } from '#app/domain/roles.ts'
import { readAskedPressure } from '#app/domain/schemas/asked-pressure.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readCrossedFindings } from '#app/services/crossed-suggestions.server.ts'
import { readSafetyNotices } from '#app/services/safety-notices.server.ts'
import { readSegmentPage } from '#app/services/segment-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/segment'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const now = nowOf(context)
  const asked = readAskedPressure(url.searchParams.get('to'))
  const [page, site, safety] = await Promise.all([
    orRefuse(readSegmentPage(getDb(), params.tag, now, asked.pa)),
    getSite(getDb()),
    readSafetyNotices(getDb(), params.tag),
  ])
  // Comparing reads six weeks of three segments: where a reading is questioned already, or when asked for.
  const compare = page.standing.questions.length > 0 || url.searchParams.has('compare')
  return {
    ...page,
    crossed: compare ? await readCrossedFindings(getDb(), now, params.tag) : null,
    now,
    zone: site.timeZone,
    asked,
    safety,
    may: {
      setState: rolesHave(actor.roles, 'segment-state:set'),
      takeIn: rolesHave(actor.roles, 'intake:take-in'),
      typeReading: rolesHave(actor.roles, 'reading:type'),
      writeEntry: rolesHave(actor.roles, 'entry:write'),
      recordTest: rolesHave(actor.roles, 'isolation-test:record'),
      draftPermit: rolesHave(actor.roles, 'permit:draft'),
      stateHeating: rolesHave(actor.roles, 'heating:state'),
      editRegister: rolesHave(actor.roles, 'register:edit'),
      tolerate: rolesHave(actor.roles, 'permit:approve'),
    },
  }
}

export default function Segment({ loaderData }: Route.ComponentProps) {
  return <SegmentPage {...loaderData} />
}
