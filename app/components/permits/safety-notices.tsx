/** What the page of the whole line says about closed stretches and open dangers: short, with the way to more. */
import { Link } from 'react-router'
import { SAFETY_EVENT_LABELS } from '#app/domain/safety-events.ts'
import type { SafetyNoticesData } from '#app/services/safety-notices.server.ts'
import { Notice } from '../ui/notice.tsx'
import { ClosedStretches } from './closed-stretches.tsx'

export function SafetyNotices({ closures, dangers }: SafetyNoticesData) {
  return (
    <>
      <ClosedStretches closures={closures} />
      {dangers.length > 0 && (
        <Notice tone="bad" announce="alert" lead="Danger: ">
          {dangers.map(({ id, kind, permit, segment }, index) => (
            <span key={id}>
              {index > 0 && '; '}
              {SAFETY_EVENT_LABELS[kind]} ({permit ?? segment})
            </span>
          ))}
          .{' '}
          <Link to="/permits/dangers" className="link">
            What to do
          </Link>
        </Notice>
      )}
    </>
  )
}
