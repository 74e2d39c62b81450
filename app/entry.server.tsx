import { PassThrough } from 'node:stream'
import { createReadableStreamFromReadable } from '@react-router/node'
import { isbot } from 'isbot'
import { renderToPipeableStream } from 'react-dom/server'
import {
  type EntryContext,
  type HandleErrorFunction,
  isRouteErrorResponse,
  type RouterContextProvider,
  ServerRouter,
} from 'react-router'
import { nonceContext } from './context.ts'
import { log } from './log.server.ts'

/** Loader promises are cut off before the render is, so that the error still reaches the page. */
export const streamTimeout = 8_000
const RENDER_TIMEOUT_MS = 10_000

export default function handleRequest(
  request: Request,
  status: number,
  headers: Headers,
  entry: EntryContext,
  context: RouterContextProvider,
): Promise<Response> {
  const nonce = context.get(nonceContext)
  const readyEvent = isbot(request.headers.get('user-agent') ?? '') ? 'onAllReady' : 'onShellReady'
  return new Promise((resolve, reject) => {
    let responseStatus = status
    let shellSent = false
    const { pipe, abort } = renderToPipeableStream(
      <ServerRouter context={entry} url={request.url} nonce={nonce} />,
      {
        nonce,
        [readyEvent]() {
          shellSent = true
          const body = new PassThrough()
          headers.set('Content-Type', 'text/html; charset=utf-8')
          resolve(new Response(createReadableStreamFromReadable(body), { headers, status: responseStatus }))
          pipe(body)
        },
        onShellError: (error: unknown) => reject(error),
        onError(error: unknown) {
          responseStatus = 500
          if (shellSent) log.error('Rendering failed', { error, url: request.url })
        },
      },
    )
    setTimeout(abort, RENDER_TIMEOUT_MS).unref()
  })
}

/** Unexpected errors go to the log with the path; a browser that went away is not one. */
export const handleError: HandleErrorFunction = (error, { request }) => {
  if (request.signal.aborted) return
  if (isRouteErrorResponse(error)) return
  log.error('Request failed', { error, method: request.method, path: new URL(request.url).pathname })
}
