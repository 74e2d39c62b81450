import { signedIn } from '#app/auth/guard.server.ts'
import { AccountPage } from '#app/components/account-page.tsx'
import { preferencesContext } from '#app/context.ts'
import { getDb } from '#app/db/client.server.ts'
import { PreferencesSchema } from '#app/domain/schemas/preferences.ts'
import { parseValues, typedOf } from '#app/server/form.server.ts'
import { redirectWithNotice } from '#app/server/notice.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { savePreferences } from '#app/services/preferences.server.ts'
import type { Route } from './+types/account'

export function meta() {
  return [{ title: 'Your settings · Ebbline' }]
}

export function loader({ context, request }: Route.LoaderArgs) {
  const actor = signedIn(context, request)
  return { name: actor.name, roles: actor.roles, preferences: context.get(preferencesContext) }
}

/** Unit and theme are each a small form of their own, here and in the rail; the answer leads back to where it was sent from. */
export async function action({ context, request }: Route.ActionArgs) {
  const actor = signedIn(context, request)
  const typed = typedOf(await request.formData())
  try {
    const { from, ...preferences } = parseValues(PreferencesSchema, typed)
    await savePreferences(getDb(), actor, preferences)
    return redirectWithNotice(from, 'Settings saved.')
  } catch (error) {
    return failure(error, typed)
  }
}

export default function Account({ loaderData, actionData }: Route.ComponentProps) {
  return <AccountPage {...loaderData} failure={actionData} />
}
