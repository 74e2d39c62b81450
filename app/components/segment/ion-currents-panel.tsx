/** Ion currents beside a segment: what an analyser sees of each mass, and what flows in the pumps' ion parts. */
import { Link } from 'react-router'
import { Sparkline } from '#app/components/charts/sparkline.tsx'
import { type Column, DataTable } from '#app/components/ui/data-table.tsx'
import { raised } from '#app/components/ui/format-pressure.ts'
import { Instant } from '#app/components/ui/instant.tsx'
import { Panel } from '#app/components/ui/panel.tsx'
import type { IonCurrent } from '#app/services/ion-currents.server.ts'

/** A current as text, such as `6.2 × 10⁻¹⁴ A`. */
function ampsText(amps: number): string {
  if (amps === 0) return '0\u00a0A'
  const [mantissa = '', exponent = ''] = amps.toExponential(1).split('e')
  return `${mantissa.replace('-', '−')}\u00a0×\u00a010${raised(Number(exponent))}\u00a0A`
}

function changeText(ratio: number | null): string {
  if (ratio === null) return 'no comparison'
  if (ratio >= 0.9 && ratio <= 1.1) return 'level'
  const times = ratio > 1 ? ratio : 1 / ratio
  return `${times >= 10 ? Math.round(times) : times.toFixed(1)}\u00a0times ${ratio > 1 ? 'more' : 'less'}`
}

const COLUMNS: Column<IonCurrent>[] = [
  {
    key: 'tag',
    head: 'Channel',
    rowHead: true,
    nowrap: true,
    cell: ({ tag, label }) => (
      <>
        <Link to={`/register/positions/${tag}`} className="link inline-block py-0.5">
          {tag}
        </Link>{' '}
        <span className="text-ink-2">{label}</span>
      </>
    ),
  },
  {
    key: 'amps',
    head: 'Last good reading',
    align: 'right',
    nowrap: true,
    cell: ({ last }) =>
      last === null ? (
        <span className="text-ink-3">– no reading</span>
      ) : (
        <span className={last.fresh ? '' : 'text-ink-3'}>{ampsText(last.amps)}</span>
      ),
  },
  {
    key: 'when',
    head: 'When',
    nowrap: true,
    cell: ({ last }) => (last === null ? '–' : <Instant at={last.at} age />),
  },
  {
    key: 'health',
    head: 'Stands for now',
    cell: ({ last }) => (last === null ? 'no' : last.fresh ? 'fresh' : 'no, too old'),
  },
  { key: 'change', head: 'Over two weeks', nowrap: true, cell: ({ twoWeeks }) => changeText(twoWeeks) },
  {
    key: 'course',
    head: 'Daily means, 28 days',
    cell: ({ tag, days }) => <Sparkline values={days} label={`${tag}, daily means`} />,
  },
  {
    key: 'origin',
    head: 'From',
    nowrap: true,
    cell: ({ last }) =>
      last === null ? (
        '–'
      ) : last.importId === 0 ? (
        'typed by hand'
      ) : (
        <Link to={`/intake/${last.importId}`} className="link inline-block py-0.5">
          {last.sourceCode ?? 'import'}, line {last.lineNo}
        </Link>
      ),
  },
]

/** Nothing for a segment without such channels. */
export function IonCurrentsPanel({
  tag,
  currents,
  from,
}: {
  tag: string
  currents: readonly IonCurrent[]
  from: Date
}) {
  if (currents.length === 0) return null
  return (
    <Panel title="Ion currents">
      <DataTable
        caption="Ion currents of the analyser's masses and of the pumps' ion parts, in amperes as measured"
        columns={COLUMNS}
        rows={currents}
        rowKey={({ tag: channel }) => channel}
        empty="The register has no ion current on this segment."
      />
      <p className="mt-2 text-sm text-ink-2">
        Currents as the instruments give them, not corrected for the gas. Argon (m/z 40) that grows together
        with m/z 28 and 32 speaks for air from outside; nothing that is given off by the wall brings argon.{' '}
        <a
          className="link"
          href={`/segments/${tag}/readings.csv?quantity=ion-current&from=${from.toISOString()}`}
        >
          Download as CSV
        </a>
      </p>
    </Panel>
  )
}
