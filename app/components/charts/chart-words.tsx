/** What a chart says without being looked at: its course in sentences, its events as a list, its figures as a table. */
import { ButtonLink } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { type Aligned, type Cell, extremesOf, tableRows } from './chart-data.ts'

const TABLE_ROWS = 60

interface Texts {
  placeText: (place: number) => string
}

/** A pressure of a curve, or a dash where the curve has none. */
export function Value({ cell }: { cell: Cell }) {
  return cell === null || cell === undefined ? '–' : <Pressure pa={cell} />
}

/** A sentence for each measured curve, and one for what could not be drawn. */
export function ChartWords({
  aligned,
  levels,
  placeText,
}: Texts & { aligned: Aligned; levels: readonly { pa: number; label: string }[] }) {
  const { x, columns, leftOut } = aligned
  return (
    <div className="text-sm text-ink-2">
      {columns.map((column) => {
        const course = column.role === 'measured' ? extremesOf(x, column) : null
        if (course === null) return null
        const { last, least, greatest } = course
        return (
          <p key={column.label}>
            {column.label}: <Pressure pa={last.value} /> at {placeText(last.x)}, lowest{' '}
            <Pressure pa={least.value} /> at {placeText(least.x)}, highest <Pressure pa={greatest.value} /> at{' '}
            {placeText(greatest.x)}.
          </p>
        )
      })}
      {levels.map(({ pa, label }) => (
        <p key={label}>
          Dashed: {label} <Pressure pa={pa} />.
        </p>
      ))}
      {leftOut > 0 && (
        <p>
          {leftOut} {leftOut === 1 ? 'value' : 'values'} of zero or below: a log axis has no place for them,
          and they are in the file.
        </p>
      )}
    </div>
  )
}

/** The events, under the numbers that stand on the drawing. */
export function ChartMarks({
  marks,
  placeText,
}: {
  marks: readonly { x: number; text: string }[]
  placeText: Texts['placeText']
}) {
  if (marks.length === 0) return null
  return (
    <ol aria-label="Events on the chart" className="mb-2 grid gap-x-6 gap-y-0.5 text-sm sm:grid-cols-2">
      {marks.map(({ x, text }, at) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: the number on the drawing is what names an event here
        <li key={at} className="flex gap-2">
          <span className="w-5 shrink-0 text-right text-ink-3">{at + 1}</span>
          <span className="min-w-0">
            <span className="text-ink-3">{placeText(x)}</span> {text}
          </span>
        </li>
      ))}
    </ol>
  )
}

/** The figures behind the drawing: thinned for the page, whole in the file. */
export function ChartTable({
  aligned,
  caption,
  placeHead,
  placeText,
  csvHref,
}: Texts & { aligned: Aligned; caption: string; placeHead: string; csvHref: string | undefined }) {
  const rows = tableRows(aligned, TABLE_ROWS)
  return (
    <div className="mt-2 print:hidden">
      <details className="mb-2">
        <summary className="py-1.5 text-sm pointer-coarse:py-3">The figures ({rows.length} rows)</summary>
        {rows.length < aligned.x.length && (
          <p className="text-sm text-ink-2">
            {rows.length} of {aligned.x.length} places, evenly spread
            {csvHref === undefined ? '' : '; the file holds every reading'}.
          </p>
        )}
        <DataTable
          caption={`Figures: ${caption}`}
          columns={[
            { key: 'place', head: placeHead, rowHead: true, cell: (row) => placeText(row.x) },
            ...aligned.columns.map(({ label }, at) => ({
              key: label,
              head: label,
              align: 'right' as const,
              cell: (row: (typeof rows)[number]) => <Value cell={row.values[at]} />,
            })),
          ]}
          rows={rows}
          rowKey={({ x }) => x}
          empty="There are no figures."
        />
      </details>
      {csvHref !== undefined && (
        <ButtonLink to={csvHref} reloadDocument className="text-sm">
          Readings as CSV
        </ButtonLink>
      )}
    </div>
  )
}
