/** One cell of a table of the register, and a number as people write it. */
import { Link } from 'react-router'
import type { Cell } from '#app/services/register-cells.server.ts'
import { raised } from '../ui/format-pressure.ts'
import { Instant } from '../ui/instant.tsx'
import { Pressure } from '../ui/pressure.tsx'

export function CellView({ cell }: { cell: Cell }) {
  if (cell.kind === 'none') {
    return (
      <span className="text-ink-3">
        <span aria-hidden="true">–</span>
        <span className="sr-only">none</span>
      </span>
    )
  }
  if (cell.kind === 'link') {
    return (
      <Link to={cell.to} className="link whitespace-nowrap">
        {cell.text}
      </Link>
    )
  }
  if (cell.kind === 'instant') return <Instant at={cell.at} />
  if (cell.kind === 'pressure') return <Pressure pa={cell.pa} digits={digitsOf(cell.pa)} />
  if (cell.kind === 'number') return <Figure value={cell.value} unit={cell.unit} />
  return cell.text
}

/** A number with its unit: plain where it is readable so, otherwise with a power of ten. */
function Figure({ value, unit }: { value: number; unit: string }) {
  const after = unit === '' ? '' : ` ${unit}`
  if (isPlain(value)) {
    return (
      <span className="whitespace-nowrap">
        {value}
        {after}
      </span>
    )
  }
  const [mantissa = '', exponent = '0'] = value.toExponential().split('e')
  return (
    <span className="whitespace-nowrap">
      {`${mantissa} × 10`}
      {raised(Number(exponent))}
      {after}
    </span>
  )
}

/** Whether a number is readable without a power of ten. */
export function isPlain(value: number): boolean {
  const size = Math.abs(value)
  return size === 0 || (size >= 1e-3 && size < 1e6)
}

/** Significant digits that a figure was given with, so that a limit of 2.55e-7 is not shown as 2.6e-7. */
function digitsOf(value: number): number {
  const [mantissa = ''] = value.toExponential().split('e')
  return Math.min(6, Math.max(1, mantissa.replace(/[^0-9]/g, '').length))
}
