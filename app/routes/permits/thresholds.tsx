import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { ThresholdsPage } from '#app/components/permits/thresholds-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { isThresholdKey } from '#app/domain/hazard-thresholds.ts'
import { thresholdActSchema } from '#app/domain/schemas/threshold.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { getSite } from '#app/services/site.server.ts'
import {
  adoptThreshold,
  endThreshold,
  readThresholdsPage,
  setBayVolume,
} from '#app/services/thresholds.server.ts'
import type { Route } from './+types/thresholds'

export function meta() {
  return [{ title: 'Thresholds · Ebbline' }]
}

export async function loader({ context, request, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const page = await orRefuse(readThresholdsPage(getDb(), actor))
  const asked = url.searchParams.get('key') ?? undefined
  return { ...page, chosen: isThresholdKey(asked) ? asked : null }
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'threshold:adopt')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  try {
    const { timeZone } = await getSite(getDb())
    const form = parseValues(thresholdActSchema(timeZone, typed.key), typed)
    if (form.act === 'bay-volume') {
      await setBayVolume(getDb(), actor, now, form)
      return redirectWithNotice('/permits/thresholds', 'Size of the bay set and signed.')
    }
    const here = `/permits/thresholds?key=${form.key}`
    if (form.act === 'adopt') {
      await adoptThreshold(getDb(), actor, now, form)
      return redirectWithNotice(here, 'Value adopted and signed.')
    }
    await endThreshold(getDb(), actor, now, form)
    return redirectWithNotice(here, 'Ended and signed: this threshold is not set now.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function ThresholdsRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <ThresholdsPage {...loaderData} failure={actionData} />
}
