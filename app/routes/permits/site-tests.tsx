import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SiteTests } from '#app/components/permits/site-tests.tsx'
import { getDb } from '#app/db/client.server.ts'
import { permitTestSchema } from '#app/domain/schemas/permit-site.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { readSiteTests } from '#app/services/permit-site.server.ts'
import { recordPermitTest } from '#app/services/permit-test-steps.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/site-tests'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Tests of ${params.number} · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  return orRefuse(readSiteTests(getDb(), actor, nowOf(context), params.number))
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'permit:test')
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    const form = parseValues(permitTestSchema(timeZone), typed)
    const { text } = await recordPermitTest(getDb(), actor, nowOf(context), params.number, form)
    return redirectWithNotice(`/permits/${params.number}/site/tests`, text)
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SiteTestsRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SiteTests page={loaderData} failure={actionData} />
}
