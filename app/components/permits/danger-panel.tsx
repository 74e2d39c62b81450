/** Dangers that stand open, as a red band: what is wrong, since when, and what whoever reads it does first. */
import { Link } from 'react-router'
import { canBeTolerated, SAFETY_EVENT_LABELS, WHAT_TO_DO } from '#app/domain/safety-events.ts'
import type { SafetyEventRow } from '#app/services/safety-events.server.ts'
import { Instant } from '../ui/instant.tsx'

/**
 * @param events the most serious first; nothing is drawn where there is none
 * @param mayTolerate whether the reader may write why a heating goes on
 * @param mayState whether the reader may say that a heating is on or off
 */
export function DangerPanel({
  events,
  mayTolerate,
  mayState,
}: {
  events: readonly SafetyEventRow[]
  mayTolerate: boolean
  mayState: boolean
}) {
  if (events.length === 0) return null
  return (
    <section
      role="alert"
      aria-label="Dangers"
      className="mb-4.5 border-2 border-l-8 border-bad bg-bad-soft px-4 py-3 text-ink [&_.text-ink-3]:text-ink-2"
    >
      <ul className="space-y-3">
        {events.map((event) => (
          <li key={event.id} id={`event-${event.id}`} className="scroll-mt-4">
            <Danger event={event} mayTolerate={mayTolerate} mayState={mayState} />
          </li>
        ))}
      </ul>
      <p className="mt-3 border-t border-bad pt-2 text-sm">
        Ebbline writes down and shows. It isolates nothing, switches nothing off and protects nobody.
      </p>
    </section>
  )
}

function Danger({
  event,
  mayTolerate,
  mayState,
}: {
  event: SafetyEventRow
  mayTolerate: boolean
  mayState: boolean
}) {
  const { kind, text, tolerated, startedAt, noticedAt, permit, segment } = event
  const late = noticedAt.getTime() - startedAt.getTime() >= 60_000
  const heated = canBeTolerated(kind)
  return (
    <>
      <p className="text-lg font-semibold text-bad">Danger: {SAFETY_EVENT_LABELS[kind]}</p>
      <p>
        Since <Instant at={startedAt} />
        {late && (
          <>
            , noticed <Instant at={noticedAt} />
          </>
        )}
        . {text}
      </p>
      <p className="mt-1 font-medium">{WHAT_TO_DO[kind]}</p>
      {tolerated !== null && (
        <p className="mt-1 border-l-4 border-ink pl-2">
          <strong>It goes on by the word of {tolerated.by}</strong> (<Instant at={tolerated.at} />
          ): {tolerated.reason}
        </p>
      )}
      <p className="mt-1 flex flex-wrap gap-x-4 gap-y-1 print:hidden">
        {heated && mayState && (
          <Link to={heatingAddress(permit, segment)} className="link py-1">
            Write down that the heating is off
          </Link>
        )}
        {heated && mayTolerate && (
          <Link to={`/permits/dangers?event=${event.id}#tolerate`} className="link py-1">
            {tolerated === null ? 'Write why it goes on' : 'Write a newer word on it'}
          </Link>
        )}
        {(kind === 'low-oxygen' || kind === 'high-oxygen') && (
          <Link to="/permits/bays" className="link py-1">
            Closed stretches and readings
          </Link>
        )}
      </p>
    </>
  )
}

function heatingAddress(permit: string | null, segment: string | null): string {
  return permit === null ? `/segments/${segment ?? ''}/heating` : `/permits/${permit}/heating`
}
