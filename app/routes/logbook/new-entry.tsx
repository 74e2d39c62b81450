import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewEntryPage } from '#app/components/logbook/new-entry-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { newEntrySchema } from '#app/domain/schemas/logbook.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { writeEntry } from '#app/services/logbook.server.ts'
import { readSegmentChoices } from '#app/services/logbook-page.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/new-entry'

export function meta() {
  return [{ title: 'Write a log entry · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  permitted(context, request, 'entry:write')
  const [segments, site] = await Promise.all([readSegmentChoices(getDb()), getSite(getDb())])
  return {
    segments,
    segment: url.searchParams.get('segment') ?? '',
    now: nowOf(context),
    zone: site.timeZone,
  }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'entry:write')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const entry = parseValues(newEntrySchema(site.timeZone), typed)
    await writeEntry(getDb(), actor, nowOf(context), entry)
    return redirectWithNotice(
      entry.segment === '' ? '/logbook' : `/segments/${entry.segment}`,
      'Entry written and signed.',
    )
  } catch (error) {
    return failure(error, typed)
  }
}

export default function NewEntry({ loaderData, actionData }: Route.ComponentProps) {
  return <NewEntryPage {...loaderData} failure={actionData} />
}
