import { type Aligned, cellNear } from './chart-data.ts'
import { Value } from './chart-words.tsx'
import { dashOf, ROLE_LOOKS } from './uplot.tsx'

/** Which line is which, with the value of each at the read-out, or its last one. */
export function ChartKeys({ aligned, cursor }: { aligned: Aligned; cursor: number | null }) {
  const { columns } = aligned
  return (
    <ul className="flex flex-wrap gap-x-5 gap-y-1 text-sm text-ink-2">
      {columns.map((column, at) => {
        const { label, role, y, band } = column
        const { color, width } = ROLE_LOOKS[role]
        const shown =
          cursor === null
            ? y.findLast((cell) => cell !== null && cell !== undefined)
            : cellNear(aligned.x, column, cursor)
        return (
          <li key={label} className="flex items-center gap-1.5">
            <svg viewBox="0 0 26 12" width="26" height="12" aria-hidden="true" className="shrink-0">
              {band !== null && (
                <rect width="26" height="12" className={color === 'ink' ? 'fill-rule' : 'fill-vac-soft'} />
              )}
              <path
                d="M0 6h26"
                strokeWidth={width}
                strokeDasharray={dashOf(columns, at).join(' ')}
                className={color === 'ink' ? 'stroke-ink' : 'stroke-vac'}
              />
            </svg>
            {label}
            <span className="min-w-24 font-medium whitespace-nowrap text-ink">
              <Value cell={shown} />
            </span>
          </li>
        )
      })}
    </ul>
  )
}
