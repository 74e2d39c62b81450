/** The isolation tests of a segment, on its page. */
import { Link } from 'react-router'
import type { IsolationTestRow } from '#app/services/isolation-tests.server.ts'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { TestState } from './test-state.tsx'

const SHOWN = 4

export function IsolationTestsPanel({
  tag,
  tests,
  mayRecord,
}: {
  tag: string
  tests: readonly Pick<IsolationTestRow, 'id' | 'state' | 'closedAt' | 'finding'>[]
  mayRecord: boolean
}) {
  return (
    <Panel
      title="Isolation tests"
      aside={
        mayRecord && (
          <Link to={`/segments/${tag}/isolation-tests/new`} className="link text-sm print:hidden">
            New test
          </Link>
        )
      }
    >
      {tests.length === 0 ? (
        <p className="text-ink-2">None on record.</p>
      ) : (
        <ul>
          {tests.slice(0, SHOWN).map(({ id, state, closedAt, finding }) => (
            <li key={id} className="border-b border-rule-2 py-1.5 last:border-b-0">
              <Link to={`/segments/${tag}/isolation-tests/${id}`} className="link">
                <Instant at={closedAt} />
              </Link>{' '}
              <TestState state={state} />
              <span className="block text-sm text-ink-2">
                {finding.ratePaPerHour.toExponential(1)} Pa/h at {finding.gauge}
              </span>
            </li>
          ))}
        </ul>
      )}
    </Panel>
  )
}
