/** What happens to every request before a loader or action sees it, and to every response after. */
import { randomBytes } from 'node:crypto'
import type { MiddlewareFunction } from 'react-router'
import { actorContext, nonceContext, nowContext, type PressureUnit, preferencesContext } from '../context.ts'
import { getDb } from '../db/client.server.ts'
import { rolesAt } from '../domain/roles.ts'
import { productNow } from '../services/clock.server.ts'
import { readSession } from './session.server.ts'

/** Finds out who asks and what the product's time is. */
export const identifyRequest: MiddlewareFunction<Response> = async ({ request, context }, next) => {
  // First of all: the error page needs it too, and the next line fails when the database is away.
  context.set(nonceContext, randomBytes(16).toString('base64'))
  const now = await productNow(getDb())
  context.set(nowContext, now)
  const person = await readSession(getDb(), request, now)
  if (person !== null) {
    context.set(actorContext, { personId: person.id, name: person.name, roles: rolesAt(person.grants, now) })
    context.set(preferencesContext, {
      pressureUnit: person.pressureUnit as PressureUnit,
      theme: person.theme as 'system' | 'light' | 'dark',
    })
  }
  return next()
}

/** Security headers on documents, data and resources alike. */
export const secureResponse: MiddlewareFunction<Response> = async ({ context }, next) => {
  const response = await next()
  const nonce = context.get(nonceContext)
  const headers = response.headers
  if (!headers.has('Content-Security-Policy')) {
    headers.set(
      'Content-Security-Policy',
      [
        "default-src 'self'",
        // React Router's own inline scripts carry the nonce; nothing else runs.
        `script-src 'self' 'nonce-${nonce}'`,
        "style-src 'self'",
        // Positions along the tube are style attributes; uPlot sets its own through the DOM.
        "style-src-attr 'unsafe-inline'",
        "img-src 'self' data: blob:",
        "font-src 'self'",
        "connect-src 'self'",
        "worker-src 'self' blob:",
        "object-src 'none'",
        "base-uri 'none'",
        "form-action 'self'",
        "frame-ancestors 'none'",
      ].join('; '),
    )
  }
  headers.set('X-Content-Type-Options', 'nosniff')
  headers.set('Referrer-Policy', 'same-origin')
  headers.set('X-Frame-Options', 'DENY')
  headers.set('Permissions-Policy', 'geolocation=(), microphone=(), camera=(self)')
  // Pages show readings and permits: a shared tablet must not keep them after sign-out.
  if (!headers.has('Cache-Control')) headers.set('Cache-Control', 'private, no-store')
  return response
}
