/** The facility at a glance: figures, the tube to scale with the pressure along it, and every segment in a row. */
import { Link } from 'react-router'
import { LineStrip } from '#app/components/charts/line-strip.tsx'
import { SafetyNotices } from '#app/components/permits/safety-notices.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { PageHead, Panel } from '#app/components/ui/panel.tsx'
import type { LinePageData, Trend } from '#app/services/line-page.server.ts'
import type { SafetyNoticesData } from '#app/services/safety-notices.server.ts'
import { MorningFigures } from './morning-figures.tsx'
import { readShown, trendOf } from './segment-rows.ts'
import { SegmentsTable, ShownFilter } from './segments-table.tsx'

export function LinePage({
  siteName,
  lines,
  segments,
  figures,
  worst,
  nightFiles,
  silentSources,
  trends,
  at,
  dayBefore,
  show,
  safety,
}: LinePageData & {
  siteName: string
  trends: Trend[]
  dayBefore: boolean
  show: string
  safety: SafetyNoticesData
}) {
  const shown = readShown(show)
  return (
    <>
      <PageHead title={siteName}>
        {lines.map(({ name, lengthM }) => `${name}, ${lengthM} m`).join(' · ')} · {segments.length} segments
        {dayBefore && (
          <>
            {' '}
            · as of <Instant at={at} />
          </>
        )}
      </PageHead>
      <SafetyNotices {...safety} />
      <MorningFigures
        figures={figures}
        worst={worst}
        nightFiles={nightFiles}
        silentSources={silentSources}
        perWeekOfWorst={worst === null ? null : (trendOf(trends, worst.tag)?.perWeek ?? null)}
      />
      {!figures.available && figures.unavailableBecause !== '' && (
        <p className="-mt-2 mb-4 text-sm text-ink-2">Not available: {figures.unavailableBecause}.</p>
      )}
      <Panel title="Pressure along the tube" aside={<LookBack dayBefore={dayBefore} />}>
        <LineStrip
          lines={lines}
          segments={segments.map((segment) => ({
            ...segment,
            gauges: segment.gauges.filter(readsHighVacuum),
          }))}
          summary={stripSummary(figures)}
          hrefFor={(tag) => `/segments/${tag}`}
        />
      </Panel>
      <Panel title="Segments" aside={<ShownFilter segments={segments} shown={shown} dayBefore={dayBefore} />}>
        <SegmentsTable segments={segments} trends={trends} shown={shown} />
      </Panel>
    </>
  )
}

/** Thermal-conductivity gauges end where this picture begins. */
function readsHighVacuum({ kind }: { kind: string }): boolean {
  return kind !== 'thermal-conductivity'
}

function stripSummary({ inService, atTarget, heated, unknown }: LinePageData['figures']): string {
  return [
    `${inService.length} segments in service, ${atTarget.length} at target with fresh data.`,
    heated.length === 0 ? 'None is heated.' : `Heated: ${heated.join(', ')}.`,
    unknown.length === 0 ? 'None is unknown.' : `Unknown: ${unknown.join(', ')}.`,
    'The table below holds every value.',
  ].join(' ')
}

function LookBack({ dayBefore }: { dayBefore: boolean }) {
  const choice =
    'flex min-h-8 items-center px-2.5 text-sm text-ink-2 hover:bg-rule-2 focus-visible:-outline-offset-2 aria-[current]:bg-ink aria-[current]:text-sheet pointer-coarse:min-h-11'
  return (
    <nav aria-label="Time shown" className="flex overflow-hidden rounded-md border print:hidden">
      <Link to="/" preventScrollReset aria-current={dayBefore ? undefined : 'true'} className={choice}>
        Now
      </Link>
      <Link
        to="/?at=day-before"
        preventScrollReset
        aria-current={dayBefore ? 'true' : undefined}
        className={`border-l ${choice}`}
      >
        24 h ago
      </Link>
    </nav>
  )
}
