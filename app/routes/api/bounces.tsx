import { timingSafeEqual } from 'node:crypto'
import { nowOf } from '#app/auth/guard.server.ts'
import { getDb } from '#app/db/client.server.ts'
import { DomainError } from '#app/domain/errors.ts'
import { env } from '#app/env.server.ts'
import { takeInBounce } from '#app/services/mail-bounces.server.ts'
import { sayUndelivered } from '#app/services/mail-undelivered.server.ts'
import type { Route } from './+types/bounces'
import { problem, problemOf } from './problem.server.ts'

/** A notice quotes at most the mail it is about. */
const MOST_BYTES = 5 * 2 ** 20

/** Takes a delivery-status notification from the mail server: the message as it came, with the token of the settings. */
export async function action({ context, request }: Route.ActionArgs) {
  if (request.method !== 'POST') return onlyPost(request.method)
  try {
    demandToken(request.headers.get('Authorization'))
    const now = nowOf(context)
    const bytes = await messageOf(request)
    const taken = await takeInBounce(
      getDb(),
      now,
      bytes,
      sayUndelivered(async () => now),
    )
    return Response.json(taken)
  } catch (error) {
    return problemOf(error)
  }
}

/** Bounces are read elsewhere. */
export function loader({ request }: Route.LoaderArgs) {
  return onlyPost(request.method)
}

function demandToken(header: string | null): void {
  const wanted = Buffer.from(`Bearer ${env().BOUNCE_TOKEN}`)
  const given = Buffer.from(header ?? '')
  if (env().BOUNCE_TOKEN !== '' && given.length === wanted.length && timingSafeEqual(given, wanted)) return
  throw new DomainError(
    'not-signed-in',
    'Bounces are taken with “Authorization: Bearer” and the token of the setting BOUNCE_TOKEN.',
  )
}

async function messageOf(request: Request): Promise<Uint8Array> {
  const stated = Number(request.headers.get('Content-Length') ?? Number.NaN)
  if (!(stated <= MOST_BYTES))
    throw new DomainError(
      'too-large',
      `Found ${Number.isNaN(stated) ? 'no Content-Length' : `${stated} bytes`}; expected the message as it came, at most ${MOST_BYTES} bytes, with its length.`,
    )
  return new Uint8Array(await request.arrayBuffer())
}

function onlyPost(method: string): Response {
  return problem(405, 'method', `Found ${method}; this address takes POST only.`, {
    headers: { Allow: 'POST' },
  })
}
