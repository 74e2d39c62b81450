import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { NewTestPage } from '#app/components/isolation/new-test-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { DomainError } from '#app/domain/errors.ts'
import { isolationWindowSchema, newIsolationTestSchema } from '#app/domain/schemas/isolation-test.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { readIsolationDraft, recordIsolationTest } from '#app/services/isolation-tests.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/isolation-test-new'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Isolation test of ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'isolation-test:record')
  const { timeZone: zone } = await getSite(getDb())
  const typed = Object.fromEntries(url.searchParams)
  const asked = readAsked(typed, zone)
  const draft = await orRefuse(readIsolationDraft(getDb(), actor, nowOf(context), params.tag, asked.window))
  return { draft, asked: { typed, fields: asked.fields }, zone }
}

/** The window in the address; one that cannot be read is named beside its fields and the usual one shown. */
function readAsked(typed: Record<string, string>, zone: string) {
  if (Object.keys(typed).length === 0) return { window: null, fields: {} }
  try {
    return { window: parseValues(isolationWindowSchema(zone), typed), fields: {} }
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    return { window: null, fields: error.fields }
  }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'isolation-test:record')
  const typed = typedOf(await request.formData())
  try {
    const site = await getSite(getDb())
    const form = parseValues(newIsolationTestSchema(site.timeZone), typed)
    const id = await recordIsolationTest(getDb(), actor, nowOf(context), params.tag, form)
    return redirectWithNotice(`/segments/${params.tag}/isolation-tests/${id}`, 'Isolation test recorded.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function NewIsolationTestRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <NewTestPage {...loaderData} failure={actionData} />
}
