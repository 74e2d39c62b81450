/** The permits of a segment or of a bake plan, on that page. */
import { Link } from 'react-router'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitBrief } from '#app/services/permit-register.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { shortDayText, spanText } from '../ui/site-time.ts'
import { PermitMark } from './permit-mark.tsx'

/**
 * @param empty the sentence where there is none
 * @param all address of the whole list; null where this is all
 * @param ask address where a permit is drawn up; null for whoever may not
 */
export function PermitsPanel({
  permits,
  empty,
  all,
  ask,
}: {
  permits: readonly PermitBrief[]
  empty: string
  all: string | null
  ask: string | null
}) {
  return (
    <Panel
      title="Permits"
      aside={
        all === null || permits.length === 0 ? undefined : (
          <Link to={all} className="link text-sm">
            All of them
          </Link>
        )
      }
    >
      {permits.length === 0 ? (
        <p className="text-ink-2">{empty}</p>
      ) : (
        <ul>
          {permits.map((permit) => (
            <Brief key={permit.number} permit={permit} />
          ))}
        </ul>
      )}
      {ask !== null && (
        <ButtonLink to={ask} className="mt-2">
          Draw up a permit
        </ButtonLink>
      )}
    </Panel>
  )
}

function Brief({
  permit: { number, title, state, windowFrom, windowTo, currentUntil },
}: {
  permit: PermitBrief
}) {
  const { zone, now } = useSite()
  return (
    <li className="border-b border-rule-2 py-1.5 last:border-b-0">
      <span className="flex flex-wrap justify-between gap-x-4">
        <Link to={`/permits/${number}`} className="link inline-block py-0.5 font-semibold">
          {number}
        </Link>
        <PermitMark state={state} />
      </span>
      <span className="block text-sm text-ink-2">
        {title}
        {windowFrom !== null && windowTo !== null && (
          <>
            {', '}
            <span className="whitespace-nowrap">
              {shortDayText(windowFrom, zone)} – {shortDayText(windowTo, zone)}
            </span>
          </>
        )}
        {currentUntil !== null && (
          <span className="block">
            valid until <Instant at={currentUntil} />, {spanText(currentUntil.getTime() - now.getTime())} left
          </span>
        )}
      </span>
    </li>
  )
}
