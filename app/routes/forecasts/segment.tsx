import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SegmentForecastPage } from '#app/components/forecasts/segment-forecast-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { DomainError } from '#app/domain/errors.ts'
import { forecastAskSchema, forecastRecordSchema } from '#app/domain/schemas/forecast.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { recordForecast } from '#app/services/forecasts.server.ts'
import { readForecastDetail } from '#app/services/forecasts-detail.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/segment'

const NOTHING_ASKED = { targetPa: null, from: null, to: null }

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Forecast for ${params.tag} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'forecast:run')
  const { timeZone: zone } = await getSite(getDb())
  const typed = Object.fromEntries(url.searchParams)
  const { ask, fields } = readAsk(typed, zone)
  const detail = await orRefuse(readForecastDetail(getDb(), params.tag, nowOf(context), ask))
  return {
    ...detail,
    asked: { typed, fields },
    mayRecord: may(actor, 'forecast:record'),
    mayTest: may(actor, 'isolation-test:record'),
    zone,
  }
}

/** What was asked; what cannot be read is named beside its field, and the question answered without it. */
function readAsk(typed: Record<string, string>, zone: string) {
  try {
    return { ask: parseValues(forecastAskSchema(zone), typed), fields: {} }
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    const { fields } = error
    const readable = Object.fromEntries(Object.entries(typed).filter(([name]) => fields[name] === undefined))
    const again = forecastAskSchema(zone).safeParse(readable)
    return { ask: again.success ? again.data : NOTHING_ASKED, fields }
  }
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const actor = permitted(context, request, 'forecast:record')
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    const ask = parseValues(forecastRecordSchema(timeZone), typed)
    await recordForecast(getDb(), actor, nowOf(context), params.tag, ask)
    return redirectWithNotice(`/forecasts/${params.tag}`, 'Forecast kept on record.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SegmentForecastRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SegmentForecastPage {...loaderData} failure={actionData} />
}
