import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { BakeRunPage } from '#app/components/bakes/run-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { rolesHave } from '#app/domain/roles.ts'
import { bakeDeviationSchema } from '#app/domain/schemas/bake-deviation.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { acceptOutgassing } from '#app/services/bake-afterwards.server.ts'
import { noteDeviation } from '#app/services/bake-deviations.server.ts'
import { readBakeRunPage } from '#app/services/bake-runs.server.ts'
import { getSite } from '#app/services/site.server.ts'
import { refused } from '../register/refused.server.ts'
import type { Route } from './+types/run'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `Bake of ${params.tag} · Ebbline` }]
}

/** The bake that the address names by its start; null for the newest. */
function sinceOf(url: URL): number | null {
  const text = url.searchParams.get('since')
  return text !== null && /^\d{1,15}$/.test(text) ? Number(text) : null
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const now = nowOf(context)
  const [page, site] = await Promise.all([
    orRefuse(readBakeRunPage(getDb(), params.tag, now, sinceOf(url))),
    getSite(getDb()),
  ])
  return {
    ...page,
    now,
    zone: site.timeZone,
    may: {
      note: rolesHave(actor.roles, 'bake:note'),
      accept: rolesHave(actor.roles, 'bake:plan') && rolesHave(actor.roles, 'register:edit'),
    },
  }
}

export async function action({ context, request, params, url }: Route.ActionArgs) {
  const actor = permitted(context, request, 'bake:note')
  const typed = typedOf(await request.formData())
  const now = nowOf(context)
  const back = `/bakes/runs/${params.tag}${url.search}`
  try {
    if (typed.intent === 'accept') {
      const revision = Number(typed.revision)
      await acceptOutgassing(getDb(), actor, now, params.tag, sinceOf(url), revision)
      return redirectWithNotice(back, `The register of ${params.tag} now has the fitted figure.`)
    }
    const site = await getSite(getDb())
    const noted = parseValues(bakeDeviationSchema(site.timeZone), typed)
    await noteDeviation(getDb(), actor, now, params.tag, sinceOf(url), noted)
    return redirectWithNotice(back, 'Deviation noted.')
  } catch (error) {
    return refused(error, typed)
  }
}

export default function BakeRunRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <BakeRunPage {...loaderData} failure={actionData} />
}
