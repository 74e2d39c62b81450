/**
 * Sign-in sessions: a random token in a signed, HttpOnly, SameSite=Lax cookie, and a row that holds the token's hash.
 * Deleting the row signs the browser out, whatever the cookie says. Times are the machine's: the demo clock may jump.
 */
import { createHash, randomBytes } from 'node:crypto'
import { type Cookie, createCookie } from 'react-router'
import type { Db } from '../db/client.server.ts'
import {
  deleteEndedSessions,
  deleteSession,
  findSession,
  insertSession,
  type SessionPerson,
  touchSession,
} from '../db/queries/sessions.server.ts'
import { env } from '../env.server.ts'
import { machineNow } from '../machine-time.server.ts'

const SESSION_DAYS = 14
/** A browser that asks for nothing for so long is signed out. */
const IDLE_MS = 12 * 3_600_000
/** The same on a device that several people use, where the next one must not write under the last one's name. */
const SHARED_IDLE_MS = 30 * 60_000
/** A request within this time of the last one does not write to the database again. */
const TOUCH_EVERY_MS = 60_000

let cookie: Cookie | undefined

/** The session cookie. Secure whenever the public address is https; "Lax" is what keeps other sites from posting as the person. */
export function sessionCookie(): Cookie {
  cookie ??= createCookie('ebbline_session', {
    httpOnly: true,
    sameSite: 'lax',
    path: '/',
    secure: env().PUBLIC_URL.startsWith('https:'),
    secrets: [env().SESSION_SECRET],
    maxAge: SESSION_DAYS * 86_400,
  })
  return cookie
}

function hashToken(token: string): string {
  return createHash('sha256').update(token).digest('hex')
}

/**
 * Opens a session and returns the Set-Cookie header value.
 *
 * @param options.shared the device is used by several people: a short idle time, and the cookie goes with the browser
 */
export async function openSession(
  db: Db,
  personId: number,
  { userAgent, shared = false }: { userAgent: string; shared?: boolean },
): Promise<string> {
  const token = randomBytes(32).toString('base64url')
  const now = machineNow()
  await insertSession(db, {
    tokenHash: hashToken(token),
    personId,
    createdAt: now,
    lastSeenAt: now,
    expiresAt: new Date(now.getTime() + SESSION_DAYS * 86_400_000),
    userAgent: userAgent.slice(0, 255),
    shared,
  })
  return sessionCookie().serialize(token, shared ? { maxAge: undefined } : {})
}

async function tokenOf(request: Request): Promise<string | null> {
  const token: unknown = await sessionCookie().parse(request.headers.get('Cookie'))
  return typeof token === 'string' && token.length > 0 ? token : null
}

/** The person behind a request's cookie, or null when there is none, it has ended, or the account has. */
export async function readSession(db: Db, request: Request, productNow: Date): Promise<SessionPerson | null> {
  const token = await tokenOf(request)
  if (token === null) return null
  const now = machineNow()
  const found = await findSession(db, hashToken(token))
  if (found === null) return null
  const idle = now.getTime() - found.lastSeenAt.getTime()
  if (found.expiresAt <= now || idle > (found.shared ? SHARED_IDLE_MS : IDLE_MS)) return null
  if (found.person.endsAt !== null && found.person.endsAt <= productNow) return null
  if (idle > TOUCH_EVERY_MS) await touchSession(db, found.tokenHash, now)
  return found.person
}

/** Ends the session of a request and returns the Set-Cookie header value that clears the cookie. */
export async function closeSession(db: Db, request: Request): Promise<string> {
  const token = await tokenOf(request)
  if (token !== null) await deleteSession(db, hashToken(token))
  return sessionCookie().serialize('', { maxAge: 0 })
}

/** Deletes the rows of sessions that have ended; nobody could have used them any more. Returns how many. */
export function purgeSessions(db: Db): Promise<number> {
  const now = machineNow()
  return deleteEndedSessions(db, now, {
    idleSince: new Date(now.getTime() - IDLE_MS),
    sharedIdleSince: new Date(now.getTime() - SHARED_IDLE_MS),
  })
}
