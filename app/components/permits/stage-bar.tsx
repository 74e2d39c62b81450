/** How far a permit has come: a bar of its states with the time of each. */
import type { PermitStage } from '#app/domain/permit-progress.ts'
import type { PermitState } from '#app/domain/permit-words.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { Instant } from '../ui/instant.tsx'
import { spanText } from '../ui/site-time.ts'

/** What is needed for a stage that is still to come. */
const AHEAD: Partial<Record<PermitState, string>> = {
  requested: 'once every section is complete',
  approved: 'by an officer, for a window',
  issued: 'once the holder accepts on site',
  'handed-back': 'by the holder',
  cancelled: 'after an inspection',
}

export function StageBar({ stages }: { stages: readonly PermitStage[] }) {
  return (
    <ol
      aria-label="Way of this permit"
      className="mb-4.5 grid gap-y-1 sm:grid-cols-3 lg:auto-cols-fr lg:grid-flow-col lg:grid-cols-none"
    >
      {stages.map((stage) => (
        <li
          key={stage.state}
          aria-current={stage.status === 'now' ? 'step' : undefined}
          className={`border-l-4 pl-2.5 sm:border-t-4 sm:border-l-0 sm:pt-1.5 sm:pr-3 sm:pl-0 ${barOf(stage)}`}
        >
          <span
            className={
              stage.status === 'now' ? 'font-semibold' : stage.status === 'coming' ? 'text-ink-3' : ''
            }
          >
            {stage.label}
          </span>
          <span className="block text-sm text-ink-3">
            <When stage={stage} />
          </span>
        </li>
      ))}
    </ol>
  )
}

function barOf({ status, odd, state }: PermitStage): string {
  if (odd) return state === 'expired' || state === 'suspended' ? 'border-bad' : 'border-warn'
  if (status === 'now') return state === 'cancelled' ? 'border-ink' : 'border-heat'
  return status === 'done' ? 'border-ink' : 'border-rule'
}

function When({ stage: { status, at, state } }: { stage: PermitStage }) {
  const { now } = useSite()
  if (status === 'coming') return <>{AHEAD[state] ?? ''}</>
  if (at === null) return <>no time on record</>
  if (status === 'done' || state === 'cancelled') return <Instant at={at} />
  return (
    <>
      since <Instant at={at} />
      {(state === 'requested' || state === 'returned') &&
        `, waiting ${spanText(now.getTime() - at.getTime())}`}
    </>
  )
}
