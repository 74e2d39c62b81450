import { useSite } from '#app/hooks/use-site.ts'
import { ageText, longTimeText, offsetLabel, siteTimeText, timeText } from './site-time.ts'

/**
 * An instant in site time. The offset is in the tooltip and machine-readable UTC in the element, so that a copied page
 * still says which instant was meant.
 *
 * @param show `time` for the time of day alone, where the date stands beside it
 * @param age adds how long ago it was, counted from the product's time
 */
export function Instant({
  at,
  show = 'date-time',
  age = false,
  className,
}: {
  at: Date
  show?: 'date-time' | 'long' | 'time'
  age?: boolean
  className?: string
}) {
  const { zone, now } = useSite()
  const text =
    show === 'time' ? timeText(at, zone) : show === 'long' ? longTimeText(at, zone) : siteTimeText(at, zone)
  return (
    <time
      dateTime={at.toISOString()}
      title={`${siteTimeText(at, zone, true)} (${offsetLabel(at, zone)})`}
      className={className}
    >
      <span className="whitespace-nowrap">{text}</span>
      {age && <span className="text-ink-3"> · {ageText(at, now)}</span>}
    </time>
  )
}
