/** Sends a file as bare bytes and says how far it is. Without a script the form around it does the work. */
import { useEffect, useRef, useState } from 'react'
import { useNavigate } from 'react-router'
import type { UploadFailure } from '#app/domain/imports.ts'

export type UploadState =
  | { kind: 'idle' }
  | { kind: 'sending'; sent: number; total: number }
  /** All bytes are there; the server reads the last of them. */
  | { kind: 'reading' }
  | { kind: 'failed'; failure: UploadFailure }

const LOST: UploadFailure = {
  ok: false,
  message: 'The connection broke while the file was being sent. Nothing has been saved; send it again.',
  fields: {},
  importId: null,
  source: '',
}

/** State of the upload, and how to begin and to stop it. */
export function useUpload(): {
  state: UploadState
  send: (source: string, file: File) => void
  stop: () => void
} {
  const [state, setState] = useState<UploadState>({ kind: 'idle' })
  const running = useRef<XMLHttpRequest | null>(null)
  const navigate = useNavigate()
  useEffect(() => () => running.current?.abort(), [])

  function send(source: string, file: File): void {
    const request = new XMLHttpRequest()
    running.current = request
    setState({ kind: 'sending', sent: 0, total: file.size })
    request.upload.addEventListener('progress', ({ loaded }) => {
      setState(loaded < file.size ? { kind: 'sending', sent: loaded, total: file.size } : { kind: 'reading' })
    })
    request.addEventListener('load', () => {
      const href = addressIn(request.response)
      if (href !== null) void navigate(href)
      else setState({ kind: 'failed', failure: failureIn(request.response) })
    })
    request.addEventListener('error', () => setState({ kind: 'failed', failure: LOST }))
    request.addEventListener('abort', () => setState({ kind: 'idle' }))
    const address = new URLSearchParams({ source, name: file.name })
    request.open('PUT', `/intake/upload?${address}`)
    request.responseType = 'json'
    request.setRequestHeader('Content-Type', 'application/octet-stream')
    request.send(file)
  }

  return { state, send, stop: () => running.current?.abort() }
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
