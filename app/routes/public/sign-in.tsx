import { redirect } from 'react-router'
import { openSession } from '#app/auth/session.server.ts'
import { authenticator } from '#app/auth/sign-in.server.ts'
import { SignInPage } from '#app/components/sign-in-page.tsx'
import { actorContext } from '#app/context.ts'
import { getDb } from '#app/db/client.server.ts'
import { safePath } from '#app/domain/safe-path.ts'
import { typedOf } from '#app/server/form.server.ts'
import { failure } from '#app/server/respond.server.ts'
import { listDemoSignIns } from '#app/services/demo-sign-ins.server.ts'
import type { Route } from './+types/sign-in'

export function meta() {
  return [{ title: 'Sign in · Ebbline' }]
}

export async function loader({ context, url }: Route.LoaderArgs) {
  if (context.get(actorContext) !== null) throw redirect(safePath(url.searchParams.get('next')))
  return { demoSignIns: listDemoSignIns() }
}

export async function action({ request, url }: Route.ActionArgs) {
  // The strategy reads the request itself; this copy is for the answer to a refusal.
  const typed = typedOf(await request.clone().formData())
  try {
    const { personId } = await authenticator.authenticate('form', request)
    const cookie = await openSession(getDb(), personId, {
      userAgent: request.headers.get('User-Agent') ?? '',
      shared: typed.shared === 'on',
    })
    return redirect(safePath(url.searchParams.get('next')), { headers: { 'Set-Cookie': cookie } })
  } catch (error) {
    return failure(error, typed)
  }
}

export default function SignIn({ loaderData, actionData }: Route.ComponentProps) {
  return <SignInPage demoSignIns={loaderData.demoSignIns} failure={actionData} />
}
