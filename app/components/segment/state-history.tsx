import { Instant } from '#app/components/ui/instant.tsx'
import { Panel } from '#app/components/ui/panel.tsx'
import { StateMark } from '#app/components/ui/state-mark.tsx'
import type { SegmentPageData } from '#app/services/segment-page.server.ts'

const SHOWN = 6

/** The states a segment has been in, newest first: since when, why, by whom. */
export function StateHistory({ states }: { states: SegmentPageData['states'] }) {
  return (
    <Panel title="States">
      {states.length === 0 ? (
        <p className="text-ink-2">Nobody has set a state yet.</p>
      ) : (
        <ol>
          {states.slice(0, SHOWN).map(({ id, state, since, reason, setBy }) => (
            <li key={id} className="border-t border-rule-2 py-2 first:border-t-0">
              <StateMark state={state} />{' '}
              <span className="text-sm text-ink-3">
                since <Instant at={since} />
              </span>
              <p className="text-sm text-ink-2">{reason}</p>
              <p className="text-sm text-ink-3">{setBy}</p>
            </li>
          ))}
        </ol>
      )}
    </Panel>
  )
}
