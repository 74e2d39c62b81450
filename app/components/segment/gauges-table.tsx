import { Link } from 'react-router'
import { type Column, DataTable } from '#app/components/ui/data-table.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import { QUALITY_LABELS } from '#app/domain/readings.ts'
import { POSITION_KIND_LABELS } from '#app/domain/register.ts'
import type { SegmentPageData } from '#app/services/segment-page.server.ts'

type Gauge = SegmentPageData['gauges'][number]

/** Import number of readings that came from no file. */
const TYPED = 0

const COLUMNS: Column<Gauge>[] = [
  {
    key: 'tag',
    head: 'Gauge',
    rowHead: true,
    cell: ({ position }) => (
      <Link to={`/register/positions/${position.tag}`} className="link inline-block py-0.5">
        {position.tag}
      </Link>
    ),
  },
  {
    key: 'value',
    head: 'Last good reading, N₂-equivalent',
    align: 'right',
    cell: ({ value, fresh, newestQuality }) =>
      value === null ? (
        <Pressure pa={null} reason={newestQuality === null ? 'no reading' : QUALITY_LABELS[newestQuality]} />
      ) : (
        <span className={fresh ? '' : 'text-ink-3'}>
          <Pressure pa={value} />
        </span>
      ),
  },
  {
    key: 'when',
    head: 'When',
    nowrap: true,
    cell: ({ at }) => (at === null ? '–' : <Instant at={at} age />),
  },
  {
    key: 'health',
    head: 'Stands for now',
    cell: ({ fresh, value, newestQuality, newestAt, at }) => {
      if (fresh) return 'fresh'
      if (value === null) return 'no'
      const newer = newestAt !== null && at !== null && newestAt > at && newestQuality !== null
      return newer ? `no, since then ${QUALITY_LABELS[newestQuality]}` : 'no, too old'
    },
  },
  {
    key: 'at',
    head: 'Chainage',
    align: 'right',
    cell: ({ position }) => (position.chainageM === null ? '–' : `${position.chainageM} m`),
  },
  { key: 'kind', head: 'Kind', nowrap: true, cell: ({ position }) => POSITION_KIND_LABELS[position.kind] },
  {
    key: 'origin',
    head: 'From',
    nowrap: true,
    cell: ({ importId, lineNo, sourceCode }) =>
      importId === null ? (
        '–'
      ) : importId === TYPED ? (
        'typed by hand'
      ) : (
        <Link to={`/intake/${importId}`} className="link inline-block py-0.5">
          {sourceCode ?? 'import'}, line {lineNo}
        </Link>
      ),
  },
]

/** Every pressure gauge of a segment, with the file and line its last value came from. */
export function GaugesTable({ gauges }: { gauges: readonly Gauge[] }) {
  return (
    <DataTable
      caption="Pressure gauges of this segment"
      columns={COLUMNS}
      rows={gauges}
      rowKey={({ position }) => position.id}
      empty="The register has no pressure gauge on this segment."
    />
  )
}
