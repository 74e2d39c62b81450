/** Several files that have been chosen: the logger of each, how far it is, and what became of it. */
import { Link } from 'react-router'
import { sizeText } from './file-words.ts'
import type { FileToSend, UploadState } from './use-upload.ts'

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
export function SendingBar({ state }: { state: Extract<UploadState, { kind: 'sending' | 'reading' }> }) {
  const share = state.kind === 'reading' ? 1 : state.sent / Math.max(1, state.total)
  return (
    <span className="block max-w-md">
      <progress value={share} max={1} aria-label="Sent" className="block h-2 w-full accent-vac" />
      <span className="mt-1 block text-sm text-ink-2">
        {state.kind === 'reading'
          ? 'All bytes have arrived; the last lines are being read.'
          : `${Math.floor(share * 100)} % of ${sizeText(state.total)} sent`}
      </span>
    </span>
  )
}
