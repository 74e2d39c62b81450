/** The web server around the router: proxies, compression, static files, request ids, and bodies that stop half-way. */
import { randomUUID } from 'node:crypto'
import { createServer, type Server, type ServerResponse } from 'node:http'
import { join } from 'node:path'
import { createRequestHandler } from '@react-router/express'
import compression from 'compression'
import express, { type ErrorRequestHandler, type Express, type Request, type RequestHandler } from 'express'
import { RouterContextProvider, type ServerBuild } from 'react-router'
import { log } from '../log.server.ts'

/** How long what nobody reads may still flow in before the answer is ended regardless. */
const DRAIN_MS = 30_000

export interface AppOptions {
  /** The router's built code. */
  build: ServerBuild
  /** Proxies in front. With too few, a form sent over TLS looks as if it came from another site and is refused. */
  trustProxy: number
  /** Folder of the built files for browsers. */
  clientFolder: string
}

/** The express application: everything between the socket and the router. */
export function createApp({ build, trustProxy, clientFolder }: AppOptions): Express {
  const app = express()
  app.disable('x-powered-by')
  // "0 proxies" must switch it off: as a number it would still read the headers that any client can write.
  app.set('trust proxy', trustProxy === 0 ? false : trustProxy)
  app.use(identify, drainUnread, compression())
  // Their names carry a hash of what is in them, so a browser never has to ask again.
  app.use(
    '/assets',
    express.static(join(clientFolder, 'assets'), { ...STATIC, immutable: true, maxAge: '1y' }),
  )
  app.use('/assets', (_request, response) => {
    asNamed(response)
    response.status(404).type('text').send('There is no such file.\n')
  })
  app.use(express.static(clientFolder, { ...STATIC, maxAge: '1h' }))
  app.use('/__manifest', (_request, response, next) => {
    // The router answers this one itself, past its middleware.
    asNamed(response)
    next()
  })
  app.use(createRequestHandler({ build, getLoadContext: () => new RouterContextProvider() }))
  app.use(answerFault)
  return app
}

/** What the router answers has this header from the router's own middleware; set here too, it would be sent twice. */
function asNamed(response: ServerResponse): void {
  response.setHeader('X-Content-Type-Options', 'nosniff')
}

const STATIC = { index: false, redirect: false, setHeaders: asNamed }

export interface ListenOptions {
  host: string
  /** 0 takes any free one. */
  port: number
  /** A connection on which nothing moves for so long is ended; uploads may take as long as they move. */
  idleMs?: number
  headersMs?: number
}

/** Listens, and resolves when it does. Rejects when the port cannot be had. */
export function listen(
  app: Express,
  { host, port, idleMs = 120_000, headersMs = 20_000 }: ListenOptions,
): Promise<Server> {
  const server = createServer(app)
  server.headersTimeout = headersMs
  // Not bounded as a whole: a night file of some GiB over a slow line is honest work. Silence is bounded instead.
  server.requestTimeout = 0
  server.timeout = idleMs
  // Longer than the minute that proxies keep a connection, so that they never reuse one we are closing.
  server.keepAliveTimeout = Math.min(65_000, idleMs)
  return new Promise((resolve, reject) => {
    server.once('error', reject)
    server.listen(port, host, () => {
      server.off('error', reject)
      resolve(server)
    })
  })
}

/** Stops taking requests, lets those under way finish within `graceMs`, and ends the rest. */
export async function close(server: Server, graceMs: number): Promise<void> {
  const closed = new Promise<void>((resolve) => server.close(() => resolve()))
  // A browser keeps its connection after the answer; those count as idle only then, so it is asked again and again.
  const sweep = setInterval(() => server.closeIdleConnections(), 50)
  const impatient = setTimeout(() => server.closeAllConnections(), graceMs)
  await closed
  clearInterval(sweep)
  clearTimeout(impatient)
}

/** Gives the request an id, sent back and logged, so that a report of a fault can be matched with the log. */
const identify: RequestHandler = (request, response, next) => {
  const id = randomUUID()
  const started = performance.now()
  response.locals.requestId = id
  response.setHeader('X-Request-Id', id)
  response.on('close', () => {
    const facts = {
      id,
      method: request.method,
      path: request.path,
      status: response.writableFinished ? response.statusCode : 'cut off',
      ms: Math.round(performance.now() - started),
    }
    if (response.statusCode >= 500) log.warn('Request answered with a fault', facts)
    else log.debug('Request', facts)
  })
  next()
}

/**
 * An action may answer before it has read the body (a file over the limit). The answer is then not ended until the
 * rest has come in, for a while: Node would close the connection under a browser that is still writing, and the
 * browser would report a broken connection and not the answer.
 */
const drainUnread: RequestHandler = (request, response, next) => {
  // An upload that breaks off raises an error here as well; the reader of the body has been told already.
  request.on('error', (error) => log.debug('Request body broke off', { error, path: request.path }))
  const end = response.end.bind(response) as (...args: unknown[]) => typeof response
  response.end = ((...args: unknown[]) => {
    if (request.complete || request.destroyed || !hasBody(request)) return end(...args)
    request.removeAllListeners('data')
    const finish = () => {
      clearTimeout(late)
      request.off('end', finish).off('close', finish)
      end(...args)
    }
    const late = setTimeout(finish, DRAIN_MS)
    request.once('end', finish).once('close', finish).resume()
    return response
  }) as typeof response.end
  next()
}

function hasBody(request: Request): boolean {
  return (
    request.headers['transfer-encoding'] !== undefined || Number(request.headers['content-length'] ?? 0) > 0
  )
}

/** What neither the router nor a static file could answer. The sentence says nothing of the inside. */
const answerFault: ErrorRequestHandler = (error: unknown, request, response, _next) => {
  const status = statusOf(error)
  const id: unknown = response.locals.requestId
  if (status >= 500) log.error('Request failed', { error, id, method: request.method, path: request.path })
  if (response.headersSent || response.destroyed) {
    response.destroy()
    return
  }
  const sentence =
    status >= 500
      ? `Something went wrong on our side. Tell your administrator this number: ${String(id)}.`
      : 'The host name or address of this request cannot be read. Type it again without stray characters.'
  asNamed(response)
  response.status(status).type('text').send(`${sentence}\n`)
}

function statusOf(error: unknown): number {
  if (typeof error !== 'object' || error === null) return 500
  if ('code' in error && error.code === 'ERR_INVALID_URL') return 400
  const status = 'status' in error ? error.status : undefined
  return typeof status === 'number' && status >= 400 && status < 600 ? status : 500
}
