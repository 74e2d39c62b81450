/** Each channel of a file: where its readings go, how it begins, how far it ranges, and its course. */
import { Link } from 'react-router'
import type { ChannelSummary, ReadOut, Sketch } from '#app/domain/night-files/types.ts'
import { QUANTITIES } from '#app/domain/readings.ts'
import type { ImportPageData } from '#app/services/intake-pages.server.ts'
import { Sparkline } from '../charts/sparkline.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { qualityWords } from './lines-panel.tsx'

interface Row extends ChannelSummary {
  position: string | null
  segment: string | null
}

const COLUMNS: Column<Row>[] = [
  { key: 'name', head: 'Channel', rowHead: true, cell: ({ name }) => name },
  {
    key: 'to',
    head: 'Belongs to',
    nowrap: true,
    cell: ({ position, segment }) =>
      position === null ? (
        <span className="text-ink-3">no position yet</span>
      ) : (
        <>
          {position}
          {segment !== null && (
            <>
              {', '}
              <Link to={`/segments/${segment}`} className="link inline-block py-0.5">
                {segment}
              </Link>
            </>
          )}
        </>
      ),
  },
  { key: 'first', head: 'First as written', align: 'right', cell: ({ firstText }) => firstText || '–' },
  { key: 'last', head: 'Last as written', align: 'right', cell: ({ lastText }) => lastText || '–' },
  { key: 'lastValue', head: 'Last', align: 'right', cell: (row) => <Value row={row} value={row.last} /> },
  { key: 'min', head: 'Lowest', align: 'right', cell: (row) => <Value row={row} value={row.min} /> },
  { key: 'max', head: 'Highest', align: 'right', cell: (row) => <Value row={row} value={row.max} /> },
  {
    key: 'course',
    head: 'Course',
    cell: ({ name, sketch }) => <Sparkline label={name} values={courseOf(sketch)} />,
  },
  { key: 'quality', head: 'Readings', cell: ({ byQuality }) => qualityWords(byQuality) },
]

export function ChannelsPanel({
  readOut,
  targets,
}: {
  readOut: ReadOut
  targets: ImportPageData['targets']
}) {
  const rows = readOut.channels.map((channel): Row => {
    const target = targets.find((one) => one.channel === channel.name)
    return { ...channel, position: target?.position ?? null, segment: target?.segment ?? null }
  })
  return (
    <Panel title="Channels">
      <DataTable
        caption="Channels of the file"
        columns={COLUMNS}
        rows={rows}
        rowKey={({ name }) => name}
        empty="No channel of the file could be read."
      />
    </Panel>
  )
}

function Value({ row, value }: { row: Row; value: number | null }) {
  if (value === null) return <span className="text-ink-3">–</span>
  if (row.quantity === 'pressure') return <Pressure pa={value} />
  return (
    <span className="whitespace-nowrap">
      {Number(value.toPrecision(4))} {QUANTITIES[row.quantity].unit}
    </span>
  )
}

/** Middle of each step on the log scale; a step without values stays a gap. */
function courseOf(sketch: Sketch | null): (number | null)[] {
  if (sketch === null) return []
  return sketch.low.map((low, i) => {
    const high = sketch.high[i] ?? null
    return low === null || high === null || low <= 0 ? null : Math.sqrt(low * high)
  })
}
