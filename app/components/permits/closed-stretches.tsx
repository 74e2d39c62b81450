/** Stretches of tunnel that are closed, in a few words for any page that shows the tunnel. */
import { Link } from 'react-router'
import type { BayClosureRow } from '#app/services/bay-closures.server.ts'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'

/** Nothing is drawn where nothing is closed. */
export function ClosedStretches({ closures }: { closures: readonly BayClosureRow[] }) {
  if (closures.length === 0) return null
  return (
    <Notice tone="bad" announce="alert" lead="Closed, keep out: ">
      {closures.map((closure, index) => (
        <span key={closure.id}>
          {index > 0 && '; '}
          <strong className="whitespace-nowrap">
            {closure.line} {metres(closure.fromM)} to {metres(closure.toM)} m
          </strong>{' '}
          since <Instant at={closure.closedAt} /> ({closure.reason})
        </span>
      ))}
      . Until an officer releases it.{' '}
      <Link to="/permits/bays" className="link">
        Readings and release
      </Link>
    </Notice>
  )
}

function metres(value: number): string {
  return String(Math.round(value * 10) / 10)
}
