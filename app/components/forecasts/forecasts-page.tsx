/** All forecasts in one place: the facility, the segments on their way, slow growth, and the record of hits. */
import { Link } from 'react-router'
import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { ForecastLine, ForecastsPageData, Outcome } from '#app/services/forecasts-page.server.ts'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { dayText } from '../ui/site-time.ts'
import { RecordsPanel } from './records-panel.tsx'

const COLUMNS: readonly Column<ForecastLine>[] = [
  {
    key: 'tag',
    head: 'Segment',
    rowHead: true,
    cell: ({ tag, state }) => (
      <>
        <Link to={`/forecasts/${tag}`} className="link">
          {tag}
        </Link>
        <span className="block text-sm text-ink-3">{SEGMENT_STATES[state].label}</span>
      </>
    ),
  },
  { key: 'now', head: 'Reads', align: 'right', cell: ({ paNow }) => <Pressure pa={paNow} /> },
  {
    key: 'next',
    head: 'On the way',
    cell: ({ state, toNext }) => (state === 'pumping' ? <OutcomeCell outcome={toNext} /> : 'not pumped down'),
  },
  {
    key: 'target',
    head: 'Target',
    cell: ({ toTarget, trend, targetPa }) =>
      toTarget !== null ? (
        <OutcomeCell outcome={toTarget} />
      ) : (
        <>
          <Pressure pa={targetPa} reason="none set" />
          <span className="block text-sm text-ink-2">
            No date: it is not being pumped down
            {trend?.perWeek == null ? '' : ` and ${growthWords(trend.perWeek)}`}. It needs a leak found or a
            bake.
          </span>
        </>
      ),
  },
]

export function ForecastsPage({ lines, trends, facility, records, hits }: ForecastsPageData) {
  return (
    <>
      <PageHead title="Forecasts">
        What the log says about the days ahead, each with its range and its grounds.
      </PageHead>
      <FacilityPanel facility={facility} trends={trends} />
      <Panel title="Segments on their way">
        <DataTable
          caption="Segments that are pumped down or stand above their target, with 80 % ranges"
          columns={COLUMNS}
          rows={lines}
          rowKey={({ tag }) => tag}
          empty="No segment is being pumped down, and none in service stands above its target."
        />
      </Panel>
      <RecordsPanel records={records} hits={hits} />
    </>
  )
}

function growthWords(perWeek: number): string {
  if (Math.abs(perWeek) < 0.005) return 'stays as it is'
  return `${perWeek > 0 ? 'rises' : 'falls'} by ${Math.abs(perWeek * 100).toFixed(1)} % a week`
}

function OutcomeCell({ outcome }: { outcome: Outcome | null }) {
  if (outcome === null) return <span className="text-ink-3">no readings</span>
  const { at, pa, reason, tryAgainAt, binding } = outcome
  return (
    <>
      <Pressure pa={pa} />
      {at === null ? (
        <span className="block text-sm text-ink-2">
          No date. {reason}
          {tryAgainAt !== null && (
            <>
              {' '}
              May be tried from <Instant at={tryAgainAt} />.
            </>
          )}
        </span>
      ) : (
        <span className="block text-sm">
          <Instant at={at.median} />
          <span className="block text-ink-2">
            <Instant at={at.low} /> to <Instant at={at.high} />
          </span>
        </span>
      )}
      {binding !== null && <span className="block text-sm text-ink-2">{binding}</span>}
    </>
  )
}

function FacilityPanel({ facility, trends }: Pick<ForecastsPageData, 'facility' | 'trends'>) {
  const { from, to, slowest, open, segments } = facility
  const { zone } = useSite()
  return (
    <Panel title="When will the facility be available?">
      {from !== null && to !== null ? (
        to.getTime() === from.getTime() && segments.length === 0 ? (
          <p>All segments of the main line are in service.</p>
        ) : (
          <p>
            Between{' '}
            <strong>
              <time dateTime={from.toISOString()}>{dayText(from, zone)}</time>
            </strong>{' '}
            and{' '}
            <strong>
              <time dateTime={to.toISOString()}>{dayText(to, zone)}</time>
            </strong>
            , if what is assumed below holds. Available means every segment of the main line within its limit,
            and at least {facility.neededAtTarget} at target.
          </p>
        )
      ) : (
        <p>
          <strong>No date can be given:</strong>{' '}
          {open.map(({ tag, words }) => `${tag} (${words})`).join('; ')}.
        </p>
      )}
      {slowest !== null && (slowest.hours?.high ?? 0) > 0 && (
        <p className="mt-2">
          Slowest: <strong>{slowest.tag}</strong>, {daysWords(slowest.hours)}: {slowest.words}.
        </p>
      )}
      {segments.length > 0 && (
        <DataTable
          caption="What each segment has still before it"
          captionShown
          columns={[
            {
              key: 'tag',
              head: 'Segment',
              rowHead: true,
              cell: ({ tag }) => (
                <Link to={`/segments/${tag}`} className="link">
                  {tag}
                </Link>
              ),
            },
            { key: 'days', head: 'Back after', nowrap: true, cell: ({ hours }) => daysWords(hours) },
            { key: 'words', head: 'By way of', cell: ({ words }) => words },
          ]}
          rows={segments}
          rowKey={({ tag }) => tag}
          empty=""
        />
      )}
      {trends.map(({ tag, gauge, perWeek, weeksToLimit, limitPa }) => (
        <p key={tag} className="mt-2">
          <Link to={`/forecasts/${tag}`} className="link">
            {tag}
          </Link>{' '}
          rises by {((perWeek ?? 0) * 100).toFixed(1)} % a week ({gauge}, thirty days). If that goes on it
          reaches its limit of <Pressure pa={limitPa} /> in about {Math.round(weeksToLimit ?? 0)} weeks.
        </p>
      ))}
      <h3 className="mt-3 mb-1 text-sm font-medium text-ink-2">Assumed</h3>
      <ul className="list-disc pl-5 text-sm text-ink-2">
        {facility.assumptions.map((line) => (
          <li key={line}>{line}</li>
        ))}
      </ul>
    </Panel>
  )
}

function daysWords(hours: { low: number; high: number } | null): string {
  if (hours === null) return 'cannot be told'
  if (hours.high < 1) return 'any time'
  const days = (value: number) => (value / 24).toFixed(value < 240 ? 1 : 0)
  return days(hours.low) === days(hours.high)
    ? `${days(hours.high)} days`
    : `${days(hours.low)} to ${days(hours.high)} days`
}
