import { redirect } from 'react-router'
import { closeSession } from '#app/auth/session.server.ts'
import { getDb } from '#app/db/client.server.ts'
import type { Route } from './+types/sign-out'

/** Signing out changes something, so it is a POST; opening the address does nothing. */
export function loader() {
  return redirect('/')
}

export async function action({ request }: Route.ActionArgs) {
  return redirect('/sign-in', { headers: { 'Set-Cookie': await closeSession(getDb(), request) } })
}
