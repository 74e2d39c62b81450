/** What the ways of sending a file share: how far it is, and what an answer says. */
import type { UploadFailure } from '#app/domain/imports.ts'

export type UploadState =
  | { kind: 'waiting' }
  | { kind: 'sending'; sent: number; total: number }
  /** The connection broke; it goes on by itself with what has arrived. */
  | { kind: 'broken'; sent: number; total: number }
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

export const LOST: UploadFailure = {
  ok: false,
  message: 'The connection broke while the file was being sent. Nothing has been saved; send it again.',
  fields: {},
  importId: null,
  source: '',
}

/** The address of the import that an answer names, or null. */
export function addressIn(response: unknown): string | null {
  if (typeof response !== 'object' || response === null || !('href' in response)) return null
  return typeof response.href === 'string' ? response.href : null
}

/** What an answer says stands in the way. */
export function failureIn(response: unknown): UploadFailure {
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
