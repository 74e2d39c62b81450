/** Forecasts that were put on record, and how they came out. */
import { Link } from 'react-router'
import { type HitRecord, hitWords, OUTCOME_WORDS } from '#app/domain/forecast-records.ts'
import type { ForecastRow } from '#app/services/forecasts.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'

const COLUMNS: readonly Column<ForecastRow>[] = [
  {
    key: 'segment',
    head: 'Segment',
    rowHead: true,
    cell: ({ segmentTag }) => (
      <Link to={`/forecasts/${segmentTag}`} className="link">
        {segmentTag}
      </Link>
    ),
  },
  {
    key: 'made',
    head: 'Made',
    cell: ({ madeAt, madeByName }) => (
      <>
        <Instant at={madeAt} />
        <span className="block text-sm text-ink-3">{madeByName}</span>
      </>
    ),
  },
  { key: 'target', head: 'Pressure', align: 'right', cell: ({ targetPa }) => <Pressure pa={targetPa} /> },
  {
    key: 'range',
    head: '80 % range',
    cell: ({ lowAt, highAt }) => (
      <>
        <Instant at={lowAt} /> to {highAt === null ? 'no end' : <Instant at={highAt} />}
      </>
    ),
  },
  {
    key: 'outcome',
    head: 'Came out',
    cell: ({ outcome, reachedAt, outcomeReason }) => (
      <>
        <strong className="font-medium">{OUTCOME_WORDS[outcome]}</strong>
        {reachedAt !== null && (
          <span className="block text-sm text-ink-2">
            reached <Instant at={reachedAt} />
          </span>
        )}
        {outcomeReason !== '' && <span className="block text-sm text-ink-2">{outcomeReason}</span>}
      </>
    ),
  },
]

export function RecordsPanel({ records, hits }: { records: readonly ForecastRow[]; hits: HitRecord }) {
  return (
    <Panel title="Forecasts of record">
      <p className="mb-2">
        <strong>{hitWords(hits)}</strong>{' '}
        <span className="text-ink-2">
          {hits.open} open, {hits.spoiled} spoiled because the segment was handled or readings were missing;
          these count neither way. About eight of ten should come true.
        </span>
      </p>
      <DataTable
        caption="Forecasts of record, the last made first"
        columns={COLUMNS}
        rows={records}
        rowKey={({ id }) => id}
        empty="None has been put on record yet."
      />
    </Panel>
  )
}
