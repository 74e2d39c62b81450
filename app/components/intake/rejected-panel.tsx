import type { ReadOut, RejectedLine } from '#app/domain/night-files/types.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Panel } from '../ui/panel.tsx'
import { countText } from './file-words.ts'

const SHOWN = 20

const COLUMNS: Column<RejectedLine>[] = [
  { key: 'line', head: 'Line', align: 'right', cell: ({ line }) => line },
  { key: 'column', head: 'Field', align: 'right', cell: ({ column }) => column ?? 'all' },
  { key: 'found', head: 'Found', cell: ({ found }) => found },
  { key: 'expected', head: 'Expected', cell: ({ expected }) => expected },
  { key: 'mend', head: 'What to do', cell: ({ mend }) => mend },
]

/** Lines and cells that were turned away, the first of them; all of them are in the CSV. */
export function RejectedPanel({ readOut, importId }: { readOut: ReadOut; importId: number }) {
  const { rejected, rejectedTotal } = readOut
  if (rejected.length === 0) return null
  return (
    <Panel title="Turned away">
      <DataTable
        caption="Lines and cells that could not be read"
        columns={COLUMNS}
        rows={rejected.slice(0, SHOWN)}
        rowKey={({ line, column, code }) => `${line} ${column} ${code}`}
        empty=""
      />
      {rejectedTotal > SHOWN && (
        <p className="mt-2 text-sm text-ink-2">
          The first {SHOWN} of {countText(rejectedTotal)}.{' '}
          <a href={`/intake/${importId}/rejected.csv`} className="link inline-block py-0.5">
            {rejectedTotal > rejected.length
              ? `The first ${countText(rejected.length)} as CSV`
              : 'All of them as CSV'}
          </a>
        </p>
      )}
    </Panel>
  )
}

/** Notes that stand in the file, as text and never as anything else. */
export function NotesPanel({ readOut }: { readOut: ReadOut }) {
  if (readOut.notes.length === 0) return null
  return (
    <Panel title="Notes in the file">
      <ul className="text-sm">
        {readOut.notes.slice(0, SHOWN).map(({ line, text }) => (
          <li key={line} className="py-0.5">
            <span className="text-ink-3">Line {line}: </span>
            {text}
          </li>
        ))}
      </ul>
    </Panel>
  )
}
