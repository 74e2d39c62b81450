/** What loaders and actions ask before they do anything. A layout's loader is no wall: every route asks for itself. */
import { data, type RouterContextProvider, redirect } from 'react-router'
import { actorContext, nowContext } from '../context.ts'
import { type Actor, demand } from '../domain/actor.ts'
import { DomainError } from '../domain/errors.ts'
import type { Permission } from '../domain/roles.ts'

type Context = Readonly<RouterContextProvider>

/** The signed-in person; otherwise off to the sign-in page, which comes back here afterwards. */
export function signedIn(context: Context, request: Request): Actor {
  const actor = context.get(actorContext)
  if (actor !== null) return actor
  const url = new URL(request.url)
  const here = url.pathname.replace(/(\/_root|\/_)?\.data$/, '') || '/'
  const next = request.method === 'GET' ? `?next=${encodeURIComponent(here)}` : ''
  throw redirect(`/sign-in${next}`)
}

/** The signed-in person, if they may do this; otherwise a plain 403 that says who may. */
export function permitted(context: Context, request: Request, permission: Permission): Actor {
  const actor = signedIn(context, request)
  try {
    demand(actor, permission)
  } catch (error) {
    if (error instanceof DomainError) throw data({ message: error.message }, { status: error.status })
    throw error
  }
  return actor
}

/**
 * Refuses what another site had the browser send. The framework looks at posts to pages; addresses that answer with bare
 * data ask here. A request without an Origin comes from no page.
 */
export function fromHere(request: Request): void {
  const origin = request.headers.get('Origin')
  if (origin === null || origin === new URL(request.url).origin) return
  throw data(
    { message: 'This was sent from another site. Open the page here and send it again.' },
    { status: 403 },
  )
}

/** The product's time for this request. */
export function nowOf(context: Context): Date {
  return context.get(nowContext)
}
