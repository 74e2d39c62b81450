/** What a window comes to, while it is typed: hours as they pass, and the offsets on either side of a clock change. */
import { LONGEST_WINDOW_HOURS } from '#app/domain/permit-content.ts'
import { readLocalTime } from '#app/domain/schemas/instant.ts'
import { hoursText, windowHours } from '#app/domain/schemas/permit-form.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { longTimeText, offsetLabel } from '../ui/site-time.ts'

function instantOf(typed: string, zone: string): Date | null {
  const read = readLocalTime(typed, zone)
  return read.kind === 'instant' ? read.at : null
}

/**
 * @param from as typed
 * @param to as typed
 */
export function WindowNote({ from, to, unattended }: { from: string; to: string; unattended: boolean }) {
  const { zone } = useSite()
  const [begins, ends] = [instantOf(from, zone), instantOf(to, zone)]
  return (
    <div role="status" className="mb-4">
      {begins === null || ends === null ? (
        <p className="text-ink-2">The hours are counted here once both ends can be read.</p>
      ) : (
        <Counted begins={begins} ends={ends} />
      )}
      <p className="mt-1 text-sm text-ink-2">
        Within the window the permit is live only as long as it is revalidated on site: every 12 h
        {unattended ? ', or every 24 h where the annex covers unattended heating' : ''}.
      </p>
    </div>
  )
}

function Counted({ begins, ends }: { begins: Date; ends: Date }) {
  const { zone } = useSite()
  const hours = windowHours(begins.toISOString(), ends.toISOString())
  const [before, after] = [offsetLabel(begins, zone), offsetLabel(ends, zone)]
  const tooLong = hours > LONGEST_WINDOW_HOURS
  return (
    <>
      <p className={tooLong || hours <= 0 ? 'font-medium text-bad' : 'font-medium'}>
        {hours <= 0
          ? 'The window ends before it begins.'
          : `${hoursText(hours)} of at most ${LONGEST_WINDOW_HOURS} h${tooLong ? ': too long for one permit' : ''}`}
      </p>
      <p>
        {longTimeText(begins, zone)} {before} to {longTimeText(ends, zone)} {after}
      </p>
      {before !== after && (
        <p className="text-warn">
          The clocks change in between, from {before} to {after}. The hours above are those that really pass.
        </p>
      )}
    </>
  )
}
