import { Link } from 'react-router'
import { Sparkline } from '#app/components/charts/sparkline.tsx'
import { type Column, DataTable } from '#app/components/ui/data-table.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import { StateMark } from '#app/components/ui/state-mark.tsx'
import { PERMIT_STATE_LABELS } from '#app/domain/permit-words.ts'
import type { LineSegment, Trend } from '#app/services/line-page.server.ts'
import { percentText } from './morning-figures.tsx'
import { attentionOf, belongs, SHOWN, SHOWN_LABELS, type Shown, trendOf } from './segment-rows.ts'

const TONES = { bad: 'text-bad', warn: 'text-warn', heat: 'text-heat', plain: 'text-ink-2' }

const VERDICT_WORDS: Record<LineSegment['verdict'], string> = {
  'at-target': 'yes',
  'above-target': 'no',
  'over-limit': 'no, over limit',
  unknown: 'unknown',
  'not-in-service': '–',
}

/** Every segment with its state, pressure, trend and what needs attention. */
export function SegmentsTable({
  segments,
  trends,
  shown,
}: {
  segments: readonly LineSegment[]
  trends: readonly Trend[]
  shown: Shown
}) {
  const columns: Column<LineSegment>[] = [
    {
      key: 'tag',
      head: 'Segment',
      rowHead: true,
      cell: ({ tag }) => (
        <Link to={`/segments/${tag}`} className="link inline-block py-0.5">
          {tag}
        </Link>
      ),
    },
    {
      key: 'state',
      head: 'State',
      nowrap: true,
      cell: ({ state, permits }) => (
        <>
          <StateMark state={state} />
          {(permits ?? []).map((permit) => (
            <span key={permit.number} className="block text-sm">
              <Link to={`/permits/${permit.number}`} className="link inline-block py-0.5">
                {permit.number}
              </Link>
              <span className="text-ink-2">, {PERMIT_STATE_LABELS[permit.state].toLowerCase()}</span>
            </span>
          ))}
        </>
      ),
    },
    { key: 'pressure', head: 'Pressure', align: 'right', cell: (segment) => <Headline segment={segment} /> },
    {
      key: 'target',
      head: 'Target',
      align: 'right',
      cell: ({ targetPa }) => <Pressure pa={targetPa} reason="none set" />,
    },
    {
      key: 'spark',
      head: 'Last 30 days',
      cell: ({ tag }) => {
        const trend = trendOf(trends, tag)
        return trend === null ? null : <Sparkline values={trend.values} label={`${tag}, last 30 days`} />
      },
    },
    {
      key: 'trend',
      head: 'Trend',
      align: 'right',
      cell: ({ tag, state }) => {
        const perWeek = trendOf(trends, tag)?.perWeek ?? null
        return perWeek === null || state !== 'in-service'
          ? '–'
          : `${percentText(perWeek)}${Math.abs(perWeek) < 0.005 ? '' : ' a week'}`
      },
    },
    { key: 'reached', head: 'At target', cell: ({ verdict }) => VERDICT_WORDS[verdict] },
    {
      key: 'attention',
      head: 'Attention',
      cell: (segment) => {
        const attention = attentionOf(segment)
        return attention === null ? null : (
          <span className={`block min-w-56 text-sm ${TONES[attention.tone]}`}>{attention.text}</span>
        )
      },
    },
  ]
  return (
    <DataTable
      caption="Segments in order along the tube"
      columns={columns}
      rows={segments.filter((segment) => belongs(segment, shown))}
      rowKey={({ tag }) => tag}
      empty={`No segment belongs to “${SHOWN_LABELS[shown]}” at the moment.`}
    />
  )
}

/** A stale value stays readable but is never set like a fresh one. */
function Headline({ segment }: { segment: LineSegment }) {
  const { headline } = segment
  if (headline === null || headline.value === null || headline.at === null) {
    return <Pressure pa={null} reason="no reading" />
  }
  if (headline.fresh) return <Pressure pa={headline.value} />
  return (
    <span className="text-ink-3">
      unknown
      <span className="block text-xs">
        last <Pressure pa={headline.value} />
        <br />
        <Instant at={headline.at} />
      </span>
    </span>
  )
}

/** Which segments the table lists: links, so that a list can be sent to somebody. */
export function ShownFilter({
  segments,
  shown,
  dayBefore,
}: {
  segments: readonly LineSegment[]
  shown: Shown
  dayBefore: boolean
}) {
  return (
    <nav aria-label="Which segments to list" className="print:hidden">
      <ul className="flex flex-wrap overflow-hidden rounded-md border">
        {SHOWN.map((choice) => (
          <li key={choice} className="border-l first:border-l-0">
            <Link
              to={`/?${new URLSearchParams({ ...(dayBefore ? { at: 'day-before' } : {}), show: choice })}`}
              preventScrollReset
              aria-current={choice === shown ? 'true' : undefined}
              className="flex min-h-8 items-center px-2.5 text-sm text-ink-2 hover:bg-rule-2 focus-visible:-outline-offset-2 aria-[current]:bg-ink aria-[current]:text-sheet pointer-coarse:min-h-11"
            >
              {SHOWN_LABELS[choice]} {segments.filter((segment) => belongs(segment, choice)).length}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  )
}
