/** The figures a manager reads first. Each one leads to its own list. */
import { Link } from 'react-router'
import { Pressure } from '#app/components/ui/pressure.tsx'
import type { NightFileStatus } from '#app/domain/expected-files.ts'
import type { FacilityFigures } from '#app/domain/segment-standing.ts'

interface Worst {
  tag: string
  ratio: number
  pa: number
}

/** `of 9 in service`, `SG-15`, … under a number. */
export function MorningFigures({
  figures,
  worst,
  nightFiles,
  silentSources,
  perWeekOfWorst,
}: {
  figures: FacilityFigures
  worst: Worst | null
  nightFiles: readonly NightFileStatus[]
  silentSources: readonly string[]
  perWeekOfWorst: number | null
}) {
  const takenIn = nightFiles.filter(({ state }) => state === 'taken-in').length
  const missing = nightFiles.filter(({ state }) => state === 'missing')
  const expected = nightFiles.filter(({ state }) => state === 'expected')
  return (
    <dl className="mb-4.5 grid grid-cols-2 border-t-2 border-b border-t-ink md:grid-cols-3 xl:grid-cols-6 print:grid-cols-3">
      <Figure
        to="/?show=at-target"
        value={String(figures.atTarget.length)}
        label="at target with fresh data"
        aside={`of ${figures.inService.length} in service`}
      >
        facility available: {figures.available ? 'yes' : 'no'}
      </Figure>
      <Figure to="/?show=unknown" value={String(figures.unknown.length)} label="unknown">
        {figures.unknown.length === 0
          ? 'every segment in service has fresh data'
          : shortList(figures.unknown)}
      </Figure>
      <Figure
        to="/?show=questioned"
        value={String(figures.questioned.length)}
        label="with a questioned reading"
      >
        {figures.questioned.length === 0 ? 'no reading contradicts another' : shortList(figures.questioned)}
      </Figure>
      <Figure to="/?show=heated" value={String(figures.heated.length)} label="heated">
        {figures.heated.length === 0 ? 'no heat recorded on any segment' : shortList(figures.heated)}
      </Figure>
      <Figure
        to="/?show=over-target"
        value={worst === null ? '–' : `${worst.ratio.toFixed(1)}×`}
        label={
          worst === null
            ? 'no fresh reading in service'
            : worst.ratio > 1
              ? `${worst.tag} above target`
              : `${worst.tag} nearest to target`
        }
        tone={worst !== null && worst.ratio > 1 ? 'warn' : 'plain'}
      >
        {worst !== null && (
          <>
            <Pressure pa={worst.pa} />
            {perWeekOfWorst !== null && `, ${percentText(perWeekOfWorst)} a week`}
          </>
        )}
      </Figure>
      <Figure
        to="/intake"
        value={`${takenIn} of ${nightFiles.length}`}
        label="night files taken in"
        tone={missing.length > 0 ? 'warn' : 'plain'}
      >
        {missing.length > 0
          ? `overdue: ${shortList(missing.map(({ code }) => code))}`
          : expected.length > 0
            ? `still to come: ${shortList(expected.map(({ code }) => code))}`
            : 'all in'}
        {silentSources.length > 0 && `; never sent one: ${shortList(silentSources)}`}
      </Figure>
    </dl>
  )
}

function Figure({
  to,
  value,
  label,
  aside,
  tone = 'plain',
  children,
}: {
  to: string
  value: string
  label: string
  aside?: string
  tone?: 'plain' | 'warn'
  children?: React.ReactNode
}) {
  return (
    <div className="flex flex-col border-l px-3.5 pt-2.5 pb-3 first:border-l-0 max-md:odd:border-l-0 max-md:odd:pl-0 md:max-xl:nth-[3n+1]:border-l-0 md:max-xl:nth-[3n+1]:pl-0 xl:first:pl-0">
      <dt className="order-2">
        <Link to={to} className="link" preventScrollReset>
          {label}
        </Link>
      </dt>
      <dd className="order-1">
        <span className={`text-3xl font-semibold tracking-head ${tone === 'warn' ? 'text-warn' : ''}`}>
          {value}
        </span>
        {aside !== undefined && <span className="text-ink-3"> {aside}</span>}
      </dd>
      <dd className="order-3 text-sm text-ink-3">{children}</dd>
    </div>
  )
}

/** Three tags at most, then how many more. */
function shortList(tags: readonly string[]): string {
  return tags.length <= 3 ? tags.join(', ') : `${tags.slice(0, 3).join(', ')} and ${tags.length - 3} more`
}

/** A relative change as people say it: `+6 %`, `−3 %`, `flat` within one per cent. */
export function percentText(change: number): string {
  const percent = Math.round(change * 100)
  if (Math.abs(percent) < 1) return 'flat'
  return `${percent > 0 ? '+' : '−'}${Math.abs(percent)} %`
}
