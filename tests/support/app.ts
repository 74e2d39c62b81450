/**
 * The built application without a socket: requests go straight to the handler that the web server would call, so that
 * middleware, guards, headers and data encoding are all in play.
 */
import { existsSync } from 'node:fs'
import { pathToFileURL } from 'node:url'
import { createRequestHandler, RouterContextProvider, type ServerBuild } from 'react-router'
import { openSession } from '#app/auth/session.server.ts'
import { testDb } from './db.ts'

const BUILD = `${process.cwd()}/build/server/index.js`
const ORIGIN = 'http://ebbline.test'

let build: ServerBuild | undefined

/** The built server bundle. */
export async function loadBuild(): Promise<ServerBuild> {
  if (!existsSync(BUILD)) throw new Error(`${BUILD} is not there. Run npm run build first; npm test does.`)
  build ??= (await import(/* @vite-ignore */ pathToFileURL(BUILD).href)) as ServerBuild
  return build
}

export interface AppRequest {
  method?: string
  /** Cookie header, as `signIn` returns it. */
  cookie?: string
  form?: Record<string, string>
  headers?: Record<string, string>
  body?: BodyInit
}

/** Sends one request to the application. */
export async function request(path: string, options: AppRequest = {}): Promise<Response> {
  const handle = createRequestHandler(await loadBuild(), 'production')
  const headers = new Headers(options.headers)
  if (options.cookie !== undefined) headers.set('Cookie', options.cookie)
  const body = options.form === undefined ? options.body : new URLSearchParams(options.form)
  const method = options.method ?? (body === undefined ? 'GET' : 'POST')
  // A stream as a body needs the flag that says that the answer comes after it.
  const init: RequestInit & { duplex?: 'half' } = { method, headers, body: body ?? null, duplex: 'half' }
  return handle(new Request(`${ORIGIN}${path}`, init), new RouterContextProvider())
}

/** Opens a session for a person and returns the Cookie header to send with requests. */
export async function signIn(personId: number): Promise<string> {
  const setCookie = await openSession(testDb(), personId, { userAgent: 'test' })
  return setCookie.split(';')[0] ?? ''
}
