/**
 * Sends a file in pieces over the tus protocol. What has arrived stays, so a connection that breaks is taken up again
 * by itself, and the same file chosen again within a day goes on where it was, also after the page was loaded anew.
 */
import type { DetailedError } from 'tus-js-client'
import type { UploadFailure } from '#app/domain/imports.ts'
import { addressIn, type FileToSend, failureIn, LOST, type UploadState } from './upload-state.ts'

/** From this size on it is worth three requests. */
export const PIECES_FROM_BYTES = 4 * 1024 * 1024

/** A proxy that keeps a request until it is whole passes this much on at a time. */
const REQUEST_BYTES = 8 * 1024 * 1024

/** Pauses after a break in milliseconds; counted anew whenever something has arrived. */
const RETRY_MS = [500, 1_000, 2_000, 4_000, 8_000, 15_000, 30_000, 30_000, 60_000, 60_000]

/** Bytes at the beginning that tell a file from another of the same name, size and date. */
const HEAD_BYTES = 65_536

export async function sendInPieces(
  { source, file }: FileToSend,
  running: { current: { abort: () => void } | null },
  onState: (state: UploadState) => void,
): Promise<UploadState> {
  onState({ kind: 'sending', sent: 0, total: file.size })
  const stopping = new AbortController()
  running.current = stopping
  const { Upload, defaultOptions } = await import('tus-js-client')
  const fingerprint = await fingerprintOf(source, file)
  let last = 0
  const arriving = new Promise<{ url: string } | UploadFailure>((resolve) => {
    const upload = new Upload(file, {
      endpoint: '/intake/uploads',
      metadata: { source, filename: file.name },
      chunkSize: REQUEST_BYTES,
      retryDelays: RETRY_MS,
      fingerprint: async () => fingerprint,
      onProgress: (sent) => {
        last = sent
        onState({ kind: 'sending', sent, total: file.size })
      },
      onShouldRetry: (error) => {
        const again = isPassing(error)
        if (again) onState({ kind: 'broken', sent: last, total: file.size })
        return again
      },
      onError: (error) => resolve(failureOf(error, percent(last, file.size))),
      onSuccess: () => resolve(upload.url === null ? LOST : { url: upload.url }),
    })
    stopping.signal.addEventListener('abort', () => {
      void upload.abort()
      resolve(keptFailure(`Stopped at ${percent(last, file.size)}.`))
    })
    void upload.findPreviousUploads().then(([previous]) => {
      if (stopping.signal.aborted) return
      if (previous !== undefined) upload.resumeFromPreviousUpload(previous)
      upload.start()
    })
  })
  const end = await arriving
  if (!('url' in end)) return { kind: 'failed', failure: end }
  onState({ kind: 'reading' })
  const answer = await finish(end.url, stopping.signal)
  if (answer === null)
    return { kind: 'failed', failure: keptFailure('All bytes have arrived; no answer came.') }
  // Answered: what the browser has noted of it is of no more use.
  for (const { urlStorageKey } of await defaultOptions.urlStorage.findUploadsByFingerprint(fingerprint))
    await defaultOptions.urlStorage.removeUpload(urlStorageKey)
  const href = addressIn(answer)
  return href === null ? { kind: 'failed', failure: failureIn(answer) } : { kind: 'received', href }
}

/** Asks for the import until there is an answer; asking twice makes no second one. */
async function finish(url: string, signal: AbortSignal): Promise<unknown> {
  for (const pause of [...RETRY_MS, null]) {
    try {
      const response = await fetch(url, { method: 'POST', signal })
      if (response.status < 500) return await response.json().catch(() => ({}))
    } catch {
      if (signal.aborted) return null
      // The connection broke: asked again after the pause.
    }
    if (pause !== null) await new Promise((resolve) => setTimeout(resolve, pause))
  }
  return null
}

/** Whether trying again can help: no answer, a fault of the server, or bytes that are there already. */
function isPassing(error: DetailedError): boolean {
  const status = error.originalResponse?.getStatus() ?? 0
  return status === 0 || status === 409 || status === 423 || status >= 500
}

function failureOf(error: Error | DetailedError, share: string): UploadFailure {
  const response = 'originalResponse' in error ? error.originalResponse : null
  if (response === null || response.getStatus() >= 500)
    return keptFailure(`The connection broke at ${share}.`)
  try {
    return failureIn(JSON.parse(response.getBody()))
  } catch {
    return failureIn(null)
  }
}

function keptFailure(what: string): UploadFailure {
  return {
    ...LOST,
    message: `${what} What has arrived is kept for a day: send the same file again to go on from there.`,
  }
}

function percent(sent: number, total: number): string {
  return `${Math.floor((sent / Math.max(1, total)) * 100)} %`
}

/** The same for the same file alone: an edited one has another date, another night's another beginning. */
async function fingerprintOf(source: string, file: File): Promise<string> {
  // FNV-1a: Web Crypto is not there on a site without TLS, and nobody needs to be kept out here.
  let hash = 0x811c9dc5
  for (const byte of new Uint8Array(await file.slice(0, HEAD_BYTES).arrayBuffer()))
    hash = Math.imul(hash ^ byte, 0x01000193)
  return `ebbline-${[source, file.name, file.size, file.lastModified, hash >>> 0].join('-')}`
}
