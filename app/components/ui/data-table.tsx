/**
 * A table. On a narrow screen it scrolls inside itself, in a region that the keyboard can reach; the page stays still.
 */
export interface Column<Row> {
  key: string
  head: React.ReactNode
  cell: (row: Row) => React.ReactNode
  /** Figures stand at the right edge, so that their powers line up. */
  align?: 'left' | 'right'
  /** Names the row for readers who hear it cell by cell. One column at most. */
  rowHead?: boolean
  /** Keeps the cell on one line. */
  nowrap?: boolean
}

/**
 * @param caption what the table holds; read out and printed, and shown when `captionShown`
 * @param empty the sentence instead of a table without rows
 */
export function DataTable<Row>({
  caption,
  captionShown = false,
  columns,
  rows,
  rowKey,
  empty,
  rowClass,
}: {
  caption: string
  captionShown?: boolean
  columns: readonly Column<Row>[]
  rows: readonly Row[]
  rowKey: (row: Row) => string | number
  empty: string
  rowClass?: (row: Row) => string
}) {
  if (rows.length === 0) return <p className="py-2 text-ink-2">{empty}</p>
  return (
    // biome-ignore lint/a11y/useSemanticElements: a fieldset groups controls; this groups a table that scrolls
    <div
      role="group"
      aria-label={caption}
      // biome-ignore lint/a11y/noNoninteractiveTabindex: without it the keyboard could not scroll the table
      tabIndex={0}
      className="relative -mx-1 overflow-x-auto px-1 print:overflow-visible"
    >
      {/* As wide as its text wants, up to a limit: squeezed to the screen, a sentence would stand one word a line. */}
      <div className="w-max max-w-[46rem] min-w-full print:w-full">
        <table className="w-full border-collapse">
          <caption className={captionShown ? 'pb-1 text-left text-sm text-ink-2' : 'sr-only'}>
            {caption}
          </caption>
          <thead>
            <tr>
              {columns.map(({ key, head, align }) => (
                <th
                  key={key}
                  scope="col"
                  className={`border-b px-2.5 py-1.5 align-bottom text-sm font-medium text-ink-3 first:pl-0 last:pr-0 ${align === 'right' ? 'text-right' : 'text-left'}`}
                >
                  {head}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.map((row) => (
              <tr key={rowKey(row)} className={rowClass?.(row)}>
                {columns.map((column) => (
                  <Cell key={column.key} column={column} row={row} />
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </div>
  )
}

function Cell<Row>({ column, row }: { column: Column<Row>; row: Row }) {
  const look = `border-b border-rule-2 px-2.5 py-2 first:pl-0 last:pr-0 ${column.align === 'right' ? 'text-right whitespace-nowrap' : 'text-left'} ${column.nowrap ? 'whitespace-nowrap' : ''}`
  if (column.rowHead) {
    return (
      <th scope="row" className={`${look} font-semibold whitespace-nowrap`}>
        {column.cell(row)}
      </th>
    )
  }
  return <td className={look}>{column.cell(row)}</td>
}
