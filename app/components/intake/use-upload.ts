/** Sends files as bare bytes, one after the other, and says how far each is. Without a script the form does the work. */
import { useEffect, useRef, useState } from 'react'
import type { UploadFailure } from '#app/domain/imports.ts'

export type UploadState =
  | { kind: 'waiting' }
  | { kind: 'sending'; sent: number; total: number }
  /** All bytes are there; the server reads the last of them. */
  | { kind: 'reading' }
  | { kind: 'received'; href: string }
  | { kind: 'failed'; failure: UploadFailure }

export interface FileToSend {
  /** Tells it from the others. */
  key: string
  source: string
  file: File
}

const LOST: UploadFailure = {
  ok: false,
  message: 'The connection broke while the file was being sent. Nothing has been saved; send it again.',
  fields: {},
  importId: null,
  source: '',
}

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
  const running = useRef<XMLHttpRequest | null>(null)
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
      else put(one.key, await sendOne(one, running, (state) => put(one.key, state)))
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
  running: { current: XMLHttpRequest | null },
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

function addressIn(response: unknown): string | null {
  if (typeof response !== 'object' || response === null || !('href' in response)) return null
  return typeof response.href === 'string' ? response.href : null
}

function failureIn(response: unknown): UploadFailure {
  if (
    typeof response !== 'object' ||
    response === null ||
    !('message' in response) ||
    !('fields' in response)
  ) {
    return {
      ...LOST,
      message: 'The server gave no answer that can be read. Look at the list of files, then send it again.',
    }
  }
  return response as UploadFailure
}
