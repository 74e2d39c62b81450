import { data } from 'react-router'
import { nowOf, permitted } from '#app/auth/guard.server.ts'
import { TokensPage } from '#app/components/api/tokens-page.tsx'
import { getDb } from '#app/db/client.server.ts'
import { DomainError } from '#app/domain/errors.ts'
import { newTokenSchema, RevokeTokenSchema } from '#app/domain/schemas/api-token.ts'
import { parseValues } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { addToken, readTokens, revokeToken } from '#app/services/api-tokens.server.ts'
import { getSite } from '#app/services/site.server.ts'
import type { Route } from './+types/tokens'

export function meta() {
  return [{ title: 'Tokens · Ebbline' }]
}

export async function loader({ context, request }: Route.LoaderArgs) {
  const actor = permitted(context, request, 'people:view')
  return readTokens(getDb(), actor, nowOf(context))
}

export async function action({ context, request }: Route.ActionArgs) {
  const actor = permitted(context, request, 'people:edit')
  const now = nowOf(context)
  const form = await request.formData()
  const chosen = form.getAll('sources').map(String)
  const typed = Object.fromEntries([...form].map(([name, value]) => [name, String(value)]))
  try {
    if (typed.intent === 'revoke') {
      const name = await revokeToken(getDb(), actor, now, parseValues(RevokeTokenSchema, typed))
      return redirectWithNotice('/people/tokens', `Token for ${name} revoked.`)
    }
    const site = await getSite(getDb())
    const wanted = parseValues(newTokenSchema(site.timeZone), { ...typed, sources: chosen })
    // Not by way of a redirect: the token is in this one answer, and in no cookie and no history.
    return { ok: true as const, name: wanted.name, token: await addToken(getDb(), actor, now, wanted) }
  } catch (error) {
    if (!(error instanceof DomainError)) throw error
    const { message, fields, status } = error
    const intent = typed.intent ?? ''
    return data({ ok: false as const, message, fields, intent, typed, chosen }, { status })
  }
}

export default function TokensRoute({ loaderData, actionData }: Route.ComponentProps) {
  const failure = actionData?.ok === false ? actionData : undefined
  const made = actionData?.ok === true ? actionData : undefined
  return <TokensPage {...loaderData} failure={failure} made={made} />
}
