import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { BaysPage } from '#app/components/permits/bays-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { BayReleaseSchema, oxygenReadingSchema } from '#app/domain/schemas/bay.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { readBaysPage, releaseBay, typeOxygen } from '#app/services/bays.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/bays'

export function meta() {
  return [{ title: 'Closed bays and oxygen · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const now = nowOf(context)
  const [page, { timeZone }] = await Promise.all([readBaysPage(getDb(), actor, now), getSite(getDb())])
  return {
    ...page,
    mayType: may(actor, 'permit:test'),
    mayRelease: may(actor, 'bay:release'),
    asked: url.searchParams.get('segment') ?? '',
    now,
    zone: timeZone,
  }
}

export async function action({ context, request }: Route.ActionArgs) {
  // Typing and releasing ask for permissions of their own in the service.
  const actor = permitted(context, request, 'permit:test')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    if (typed.intent === 'release') {
      const said = await releaseBay(getDb(), actor, now, parseValues(BayReleaseSchema, typed))
      return redirectWithNotice('/permits/bays', said)
    }
    const { timeZone } = await getSite(getDb())
    const { text } = await typeOxygen(getDb(), actor, now, parseValues(oxygenReadingSchema(timeZone), typed))
    return redirectWithNotice('/permits/bays', text)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function BaysRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <BaysPage {...loaderData} failure={actionData} />
}
