import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { SiteHub } from '#app/components/permits/site-hub.tsx'
import { getDb } from '#app/db/client.server.ts'
import { permitActSchema } from '#app/domain/schemas/permit-act.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { photoFromForm } from '#app/server/photo-form.server.ts'
import { failure, orRefuse } from '#app/server/respond.server.ts'
import { addPermitPhoto, PHOTO_MIB } from '#app/services/permit-photos.server.ts'
import { readSiteHub } from '#app/services/permit-site.server.ts'
import { actOnPermit } from '#app/services/permits.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/site'

export function meta({ params }: Route.MetaArgs) {
  return [{ title: `${params.number} at the segment · Ebbline` }]
}

export async function loader({ context, request, params }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const page = await orRefuse(readSiteHub(getDb(), actor, nowOf(context), params.number))
  return { page, photoMib: PHOTO_MIB }
}

export async function action({ context, request, params, url }: Route.ActionArgs) {
  const actor = permitted(context, request, 'facility:view')
  const here = `/permits/${params.number}/site`
  const now = nowOf(context)
  if (url.searchParams.has('photo')) {
    const typed: Record<string, string> = { act: 'photo' }
    try {
      const photo = await photoFromForm(request)
      typed.caption = photo.caption
      return redirectWithNotice(here, await addPermitPhoto(getDb(), actor, now, params.number, photo))
    } catch (error) {
      return failure(error, typed)
    }
  }
  const typed = typedOf(await request.formData())
  try {
    const { timeZone } = await getSite(getDb())
    // Only what is done at the segment without a signature; the rest has its forms on the permit's own page.
    const form = parseValues(permitActSchema(timeZone), {
      ...typed,
      act: typed.act === 'site-check' ? typed.act : '',
    })
    await actOnPermit(getDb(), actor, now, params.number, form)
    return redirectWithNotice(here, 'Site check written down.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SiteRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <SiteHub {...loaderData} failure={actionData} />
}
