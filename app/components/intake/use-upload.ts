/**
 * Sends files, one after the other, and says how far each is: small ones in one request, larger ones in pieces. Without a
 * script the form does the work.
 */
import { useEffect, useRef, useState } from 'react'
import type { UploadFailure } from '#app/domain/imports.ts'
import { PIECES_FROM_BYTES, sendInPieces } from './send-in-pieces.ts'
import { addressIn, type FileToSend, failureIn, LOST, type UploadState } from './upload-state.ts'

const STOPPED: UploadFailure = { ...LOST, message: 'Stopped. Nothing of this file has been saved.' }

export interface Uploads {
  /** By the keys of the files; empty before the first is sent. */
  states: ReadonlyMap<string, UploadState>
  busy: boolean
  /** Sends files; resolves when the last has been answered, with what became of each. */
  send: (files: readonly FileToSend[]) => Promise<ReadonlyMap<string, UploadState>>
  /** Breaks off the one being sent and leaves out those that wait. */
  stop: () => void
  clear: () => void
}

/** States of the uploads, and how to begin and to stop them. */
export function useUploads(): Uploads {
  const [states, setStates] = useState<ReadonlyMap<string, UploadState>>(new Map())
  const [busy, setBusy] = useState(false)
  const running = useRef<{ abort: () => void } | null>(null)
  const stopped = useRef(false)
  useEffect(
    () => () => {
      stopped.current = true
      running.current?.abort()
    },
    [],
  )

  async function send(files: readonly FileToSend[]): Promise<ReadonlyMap<string, UploadState>> {
    stopped.current = false
    let current = new Map<string, UploadState>(states)
    for (const { key } of files) current.set(key, { kind: 'waiting' })
    const put = (key: string, state: UploadState) => {
      current = new Map(current).set(key, state)
      setStates(current)
    }
    setStates(current)
    setBusy(true)
    for (const one of files) {
      if (stopped.current) put(one.key, { kind: 'failed', failure: STOPPED })
      else {
        const sending = one.file.size < PIECES_FROM_BYTES ? sendOne : sendInPieces
        put(one.key, await sending(one, running, (state) => put(one.key, state)))
      }
    }
    setBusy(false)
    return current
  }

  function stop(): void {
    stopped.current = true
    running.current?.abort()
  }

  return { states, busy, send, stop, clear: () => setStates(new Map()) }
}

function sendOne(
  { source, file }: FileToSend,
  running: { current: { abort: () => void } | null },
  onState: (state: UploadState) => void,
): Promise<UploadState> {
  return new Promise((resolve) => {
    const request = new XMLHttpRequest()
    running.current = request
    onState({ kind: 'sending', sent: 0, total: file.size })
    request.upload.addEventListener('progress', ({ loaded }) => {
      onState(loaded < file.size ? { kind: 'sending', sent: loaded, total: file.size } : { kind: 'reading' })
    })
    request.addEventListener('load', () => {
      const href = addressIn(request.response)
      resolve(
        href === null ? { kind: 'failed', failure: failureIn(request.response) } : { kind: 'received', href },
      )
    })
    request.addEventListener('error', () => resolve({ kind: 'failed', failure: LOST }))
    request.addEventListener('abort', () => resolve({ kind: 'failed', failure: STOPPED }))
    const address = new URLSearchParams({ source, name: file.name })
    request.open('PUT', `/intake/upload?${address}`)
    request.responseType = 'json'
    request.setRequestHeader('Content-Type', 'application/octet-stream')
    request.send(file)
  })
}
