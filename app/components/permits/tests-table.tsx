/** Tests that a permit asks for: limits, the last result with its instrument and tester, and when each is due again. */
import { figureText } from '#app/domain/permit-tests.ts'
import { PERMIT_TEST_LABELS } from '#app/domain/permit-words.ts'
import type { TestLine } from '#app/services/permit-tests.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'

const STATES: Record<TestLine['state'], { word: string; look: string }> = {
  good: { word: 'good', look: 'border-rule text-ink-2' },
  missing: { word: 'not yet', look: 'border-warn bg-warn-soft text-warn' },
  overdue: { word: 'overdue', look: 'border-bad bg-bad-soft font-semibold text-bad' },
  failed: { word: 'failed', look: 'border-bad bg-bad-soft font-semibold text-bad' },
}

/** How a test stands, in a word with a border of its own so that print and greyscale show it. */
export function TestMark({ state }: Pick<TestLine, 'state'>) {
  const { word, look } = STATES[state]
  return <span className={`rounded-sm border px-1.5 text-sm whitespace-nowrap ${look}`}>{word}</span>
}

const COLUMNS: readonly Column<TestLine>[] = [
  {
    key: 'kind',
    head: 'Test',
    cell: ({ kind, place }) => (
      <>
        <span className="font-semibold">{PERMIT_TEST_LABELS[kind]}</span>
        {place !== '' && <span className="block text-sm text-ink-3">{place}</span>}
      </>
    ),
  },
  {
    key: 'limits',
    head: 'Wanted',
    cell: ({ limits, everyHours }) => (
      <>
        {limits === '' ? 'works' : limits}
        <span className="block text-sm text-ink-3">
          {everyHours === null ? 'once before acceptance' : `every ${everyHours} h`}
        </span>
      </>
    ),
  },
  {
    key: 'found',
    head: 'Found',
    cell: ({ last }) =>
      last === null ? (
        '–'
      ) : (
        <>
          {last.value === null ? (last.passed ? 'passed' : 'failed') : figureText(last.value, last.unit)}
          <Instant at={last.takenAt} className="block text-sm text-ink-2" />
          {last.note !== '' && <span className="block text-sm text-ink-2">{last.note}</span>}
        </>
      ),
  },
  {
    key: 'with',
    head: 'With and by',
    cell: ({ last }) => (last === null ? '–' : <WithAndBy last={last} />),
  },
  { key: 'state', head: 'Stands', cell: ({ state }) => <TestMark state={state} /> },
  {
    key: 'due',
    head: 'Due again',
    cell: ({ nextDueAt }) => (nextDueAt === null ? '–' : <Instant at={nextDueAt} />),
  },
]

function WithAndBy({ last }: { last: NonNullable<TestLine['last']> }) {
  return (
    <>
      {last.testerName}
      {last.witnessName !== null && (
        <span className="block text-sm text-ink-3">entered by {last.witnessName}</span>
      )}
      {last.instrumentSerial !== '' && (
        <span className="block text-sm text-ink-3">
          {last.instrumentSerial}
          {last.calibrationDue !== null && (
            <>
              , calibrated until <Instant at={last.calibrationDue} />
            </>
          )}
        </span>
      )}
    </>
  )
}

export function TestsTable({ lines }: { lines: readonly TestLine[] }) {
  return (
    <DataTable
      caption="Tests that this permit asks for, with the last result of each"
      columns={COLUMNS}
      rows={lines}
      rowKey={({ kind, place }) => `${kind}|${place}`}
      empty="This permit asks for no tests."
    />
  )
}
