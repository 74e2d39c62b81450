import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { ClockPage } from '#app/components/clock-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { clockMoveSchema } from '#app/domain/schemas/clock.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { advanceClock, readClock } from '#app/services/clock.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/clock'

export function meta() {
  return [{ title: 'Demo clock · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  permitted(context, request, 'clock:advance')
  const [clock, site] = await Promise.all([readClock(getDb()), getSite(getDb())])
  return { demo: clock.demo, now: nowOf(context), zone: site.timeZone }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'clock:advance')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const { to, reason } = parseValues(clockMoveSchema(site.timeZone), typed)
    await advanceClock(getDb(), actor, to, reason)
    return redirectWithNotice('/', 'The demo clock has been moved forward.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function Clock({ loaderData, actionData }: Route.ComponentProps) {
  return <ClockPage {...loaderData} failure={actionData} />
}
