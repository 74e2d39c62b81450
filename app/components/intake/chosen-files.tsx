/** Several files that have been chosen: the logger of each, how far it is, and what became of it. */
import { Link } from 'react-router'
import type { UnfinishedUpload } from '#app/services/uploads.server.ts'
import { sizeText } from './file-words.ts'
import type { FileToSend, UploadState } from './upload-state.ts'

export interface SourceChoice {
  code: string
  name: string
}

/** The logger whose name a file's name begins with; empty where none does. */
export function sourceOfName(fileName: string, sources: readonly SourceChoice[]): string {
  return sources.find(({ code }) => fileName.startsWith(`${code}_`))?.code ?? ''
}

export function ChosenFiles({
  files,
  sources,
  states,
  busy,
  onSource,
}: {
  files: readonly FileToSend[]
  sources: readonly SourceChoice[]
  states: ReadonlyMap<string, UploadState>
  busy: boolean
  onSource: (key: string, source: string) => void
}) {
  return (
    <ul aria-label="Chosen files" className="mb-4">
      {files.map(({ key, file, source }) => (
        <li
          key={key}
          className="grid items-center gap-x-4 gap-y-1 border-b py-2 sm:grid-cols-[1fr_14rem_1fr]"
        >
          <span className="min-w-0 break-words">
            {file.name} <span className="text-ink-3">{sizeText(file.size)}</span>
          </span>
          <select
            aria-label={`Source of ${file.name}`}
            value={source}
            required
            disabled={busy}
            onChange={(event) => onSource(key, event.target.value)}
            className="min-h-9 w-full rounded-sm border border-edge bg-sheet px-2 pointer-coarse:min-h-11"
          >
            <option value="">Choose the logger</option>
            {sources.map(({ code, name }) => (
              <option key={code} value={code}>
                {code}, {name}
              </option>
            ))}
          </select>
          <span className="min-w-0 text-sm" role="status">
            <FileOutcome state={states.get(key)} busy={busy} />
          </span>
        </li>
      ))}
    </ul>
  )
}

function FileOutcome({ state, busy }: { state: UploadState | undefined; busy: boolean }) {
  if (state === undefined) return null
  if (state.kind === 'waiting') return 'waits its turn'
  if (state.kind === 'received') {
    // Leaving the page would break off the files that are still on their way.
    if (busy) return 'received'
    return (
      <Link to={state.href} className="link inline-block py-0.5">
        Received; look through it
      </Link>
    )
  }
  if (state.kind === 'failed') {
    const { message, fields, importId } = state.failure
    return (
      <span className="text-bad">
        {[message, ...Object.values(fields).flat()].join(' ')}{' '}
        {importId !== null && (
          <Link to={`/intake/${importId}`} className="link inline-block py-0.5">
            Look at import {importId}
          </Link>
        )}
      </span>
    )
  }
  return <SendingBar state={state} />
}

/** How much of a file has been sent. */
export function SendingBar({
  state,
}: {
  state: Extract<UploadState, { kind: 'sending' | 'broken' | 'reading' }>
}) {
  const share = state.kind === 'reading' ? 1 : state.sent / Math.max(1, state.total)
  const percent = Math.floor(share * 100)
  return (
    <span className="block max-w-md">
      <progress value={share} max={1} aria-label="Sent" className="block h-2 w-full accent-vac" />
      <span className="mt-1 block text-sm text-ink-2">
        {state.kind === 'reading'
          ? 'All bytes have arrived; the last lines are being read.'
          : state.kind === 'broken'
            ? `Broken off at ${percent} %, going on as soon as the connection is back.`
            : `${percent} % of ${sizeText(state.total)} sent`}
      </span>
    </span>
  )
}

/** Files that somebody began to send and that have not arrived whole. */
export function UnfinishedFiles({ uploads }: { uploads: readonly UnfinishedUpload[] }) {
  if (uploads.length === 0) return null
  return (
    <div className="mb-4 text-sm">
      <p>
        Broken off on the way. Choose the same file again, in the browser that it was begun in, to go on from
        there; what has arrived is kept for a day.
      </p>
      <ul aria-label="Files that broke off">
        {uploads.map(({ token, fileName, byteSize, receivedBytes }) => (
          <li key={token} className="break-words">
            {fileName}: {Math.floor((receivedBytes / Math.max(1, byteSize)) * 100)} % of {sizeText(byteSize)}{' '}
            has arrived
          </li>
        ))}
      </ul>
    </div>
  )
}
