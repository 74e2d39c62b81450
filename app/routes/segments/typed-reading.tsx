import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { TypedReadingPage } from '#app/components/segment/typed-reading-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { typedReadingSchema } from '#app/domain/schemas/typed-reading.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { getSite } from '#app/services/site.server.ts'
import { readTypedReadingPage, typeReading } from '#app/services/typed-readings.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/typed-reading'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Type a reading at ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'reading:type')
  const now = nowOf(context)
  const [page, site] = await Promise.all([
    orRefuse(readTypedReadingPage(getDb(), actor, now, params.tag)),
    getSite(getDb()),
  ])
  return { ...page, asked: url.searchParams.get('position') ?? '', now, zone: site.timeZone }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'reading:type')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const form = parseValues(typedReadingSchema(site.timeZone), typed)
    const said = await typeReading(getDb(), actor, nowOf(context), params.tag, form)
    // Back to the form: bellows are read ten at a time.
    return redirectWithNotice(`/segments/${params.tag}/typed-reading`, said)
  } catch (error) {
    return refused(error, typed)
  }
}

export default function TypedReadingRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <TypedReadingPage {...loaderData} failure={actionData} />
}
