/** A table of the register, and the history of one thing. */
import type { RegisterTable } from '#app/services/register-cells.server.ts'
import type { HistoryLine } from '#app/services/register-history.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { CellView } from './cell-view.tsx'

type Row = RegisterTable['rows'][number]

export function RegisterTableView({ table }: { table: RegisterTable }) {
  const columns = table.columns.map(
    ({ name, right }, index): Column<Row> => ({
      key: name,
      head: name,
      align: right ? 'right' : 'left',
      rowHead: index === 0,
      cell: ({ cells }) => <CellView cell={cells[index] ?? { kind: 'none' }} />,
    }),
  )
  return (
    <DataTable
      caption={table.title}
      columns={columns}
      rows={table.rows}
      rowKey={({ key }) => key}
      empty={table.empty}
      // A replaced row says so in its last column; the colour only quietens it.
      rowClass={({ replaced }) => (replaced ? 'text-ink-3' : '')}
    />
  )
}

const HISTORY: readonly Column<HistoryLine>[] = [
  { key: 'at', head: 'Written', cell: ({ at }) => <Instant at={at} />, rowHead: true },
  { key: 'person', head: 'By', cell: ({ person }) => person ?? 'the product', nowrap: true },
  { key: 'act', head: 'What', cell: ({ act }) => act },
  {
    key: 'effective',
    head: 'Holds since',
    cell: ({ effectiveAt }) =>
      effectiveAt === null ? <CellView cell={{ kind: 'none' }} /> : <Instant at={effectiveAt} />,
  },
  { key: 'changes', head: 'Change', cell: (line) => <Changes changes={line.changes} /> },
  { key: 'reason', head: 'Reason', cell: ({ reason }) => reason },
]

export function HistoryTable({ history }: { history: readonly HistoryLine[] }) {
  return (
    <DataTable
      caption="Changes, newest first"
      columns={HISTORY}
      rows={history}
      rowKey={({ id }) => id}
      empty="Nothing has been changed since this was put in."
    />
  )
}

function Changes({ changes }: { changes: HistoryLine['changes'] }) {
  return (
    <ul>
      {changes.map(({ name, before, after }, index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: the lines of one record never change or move
        <li key={index}>
          {name}: {before.kind !== 'none' && <CellView cell={before} />}
          {before.kind !== 'none' && after.kind !== 'none' && ' → '}
          {after.kind !== 'none' && <CellView cell={after} />}
          {name !== 'Was' && after.kind === 'none' && ' → none'}
        </li>
      ))}
    </ul>
  )
}
