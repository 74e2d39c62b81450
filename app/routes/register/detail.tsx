import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { ThingPage } from '#app/components/register/thing-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { may } from '#app/domain/actor.ts'
import { KIND_FACTS } from '#app/domain/schemas/register.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { orRefuse } from '#app/server/respond.server.ts'
import { readChannelFindings } from '#app/services/crossed-suggestions.server.ts'
import { changeThing } from '#app/services/register-change.server.ts'
import { readRegisterDetail } from '#app/services/register-page.server.ts'
import { readProfilePart } from '#app/services/source-profile.server.ts'
import type { Route } from './+types/detail'
import { kindOf, refused } from './refused.server.ts'

export function meta({ loaderData }: Route.MetaArgs) {
  return [{ title: `${loaderData?.tag ?? 'Register'} · Ebbline` }]
}

export async function loader({ context, request, params, url }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'facility:view')
  const kind = kindOf(params.kind)
  const now = nowOf(context)
  const detail = await orRefuse(readRegisterDetail(getDb(), kind, params.key, now))
  const { permission } = KIND_FACTS[kind]
  return {
    ...detail,
    mayEdit: permission !== null && may(actor, permission),
    crossed: kind === 'channels' ? await readChannelFindings(getDb(), now, Number(params.key)) : null,
    profile: kind === 'sources' ? await readProfilePart(getDb(), params.key) : null,
    suggested: kind === 'channels' ? suggestedMap(url.searchParams) : undefined,
  }
}

/** Fields of a channel map that the address fills in, for a person to look at and send. */
function suggestedMap(query: URLSearchParams): Record<string, string> | undefined {
  const fields = ['position', 'other', 'startsAt', 'reason'].flatMap((name) => {
    const value = query.get(name)
    return value === null ? [] : [[name, value.slice(0, 500)] as const]
  })
  return fields.length === 0 ? undefined : Object.fromEntries(fields)
}

export async function action({ context, request, params }: Route.ActionArgs) {
  const kind = kindOf(params.kind)
  const actor = permitted(context, request, KIND_FACTS[kind].permission ?? 'register:edit')
  const typed = typedOf(await request.formData())
  try {
    await changeThing(getDb(), actor, nowOf(context), { kind, key: params.key }, typed, parseValues)
    return redirectWithNotice(
      `/register/${kind}/${encodeURIComponent(params.key)}`,
      'Saved, and put on record.',
    )
  } catch (error) {
    return refused(error, typed)
  }
}

export default function ThingRoute({ loaderData, actionData }: Route.ComponentProps) {
  return <ThingPage {...loaderData} failure={actionData} />
}
