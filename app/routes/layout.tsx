import { data, Outlet } from 'react-router'
import { nowOf, signedIn } from '#app/auth/guard.server.ts'
import { Shell } from '#app/components/shell.tsx'
import { preferencesContext } from '#app/context.ts'
import { getDb } from '#app/db/client.server.ts'
import { rolesHave } from '#app/domain/roles.ts'
import { takeNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readClock } from '#app/services/clock.server.ts'
import { countWaitingFor } from '#app/services/people.server.ts'
import { listWaitingPermits } from '#app/services/permit-register.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/layout'

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = signedIn(context, request)
  const [site, clock, waiting, permits, { notice, clear }] = await Promise.all([
    orRefuse(getSite(getDb())),
    readClock(getDb()),
    countWaitingFor(getDb(), actor),
    listWaitingPermits(getDb(), actor, nowOf(context)),
    takeNotice(request),
  ])
  return data(
    {
      person: { name: actor.name, roles: actor.roles, waiting },
      site: { name: site.name, zone: site.timeZone },
      clock: { at: nowOf(context), demo: clock.demo },
      unit: context.get(preferencesContext).pressureUnit,
      // Contributors write entries and nothing else; the People place is the administrator's.
      places: {
        facility: rolesHave(actor.roles, 'facility:view'),
        people: rolesHave(actor.roles, 'people:view'),
        permits: permits.length,
      },
      mayAdvanceClock: clock.demo && rolesHave(actor.roles, 'clock:advance'),
      notice,
    },
    clear === null ? undefined : { headers: { 'Set-Cookie': clear } },
  )
}

export default function LayoutRoute({ loaderData }: Route.ComponentProps) {
  return (
    <Shell {...loaderData}>
      <Outlet />
    </Shell>
  )
}
