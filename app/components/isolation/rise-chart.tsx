/**
 * Pressure in a closed segment against hours since the valve was closed, on straight axes: a leak is then a straight
 * line. Drawn as plain SVG, so that it is there without a script and on paper.
 */

import { type Column, DataTable } from '#app/components/ui/data-table.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import type { IsolationFinding, Opening } from '#app/domain/isolation-tests.ts'
import { roundStep } from '../charts/scales.ts'

const WIDTH = 720
const HEIGHT = 300
const LEFT = 54
const RIGHT = 12
const TOP = 16
const BOTTOM = 34
const HOUR_MS = 3_600_000
const TABLE_ROWS = 24

interface Point {
  at: Date
  pa: number
}

/**
 * @param limitPaPerHour drawn from the first reading of the window; null for none
 * @param finding its straight line and bend are drawn over the window; null before there is one
 */
export function RiseChart({
  caption,
  points,
  window: { closedAt, fitFrom, fitTo },
  finding,
  opening,
  limitPaPerHour,
}: {
  caption: string
  points: readonly Point[]
  window: { closedAt: Date; fitFrom: Date; fitTo: Date }
  finding: IsolationFinding | null
  opening: Opening | null
  limitPaPerHour: number | null
}) {
  if (points.length === 0) return <p className="py-2 text-ink-2">There are no readings around this window.</p>
  const hours = (at: Date) => (at.getTime() - closedAt.getTime()) / HOUR_MS
  const [from, to] = [hours(fitFrom), hours(fitTo)]
  const x0 = Math.min(...points.map(({ at }) => hours(at)), 0)
  const x1 = Math.max(...points.map(({ at }) => hours(at)), to)
  const highest = Math.max(...points.map(({ pa }) => pa))
  const yStep = roundStep(highest, 4)
  const top = Math.ceil((highest * 1.02) / yStep) * yStep
  const x = (hour: number) => LEFT + ((hour - x0) / (x1 - x0)) * (WIDTH - LEFT - RIGHT)
  const y = (pa: number) => HEIGHT - BOTTOM - (Math.min(pa, top) / top) * (HEIGHT - TOP - BOTTOM)
  const exponent = Math.floor(Math.log10(top))
  const ticks = Array.from({ length: Math.round(top / yStep) + 1 }, (_, index) => index * yStep)
  const xStep = Math.max(1, roundStep(x1 - x0, 7))
  const xTicks = Array.from(
    { length: Math.floor(x1 / xStep) - Math.ceil(x0 / xStep) + 1 },
    (_, index) => (Math.ceil(x0 / xStep) + index) * xStep,
  )
  const limit =
    limitPaPerHour === null ? null : limitLine(points, { fitFrom, from, x1, top }, hours, limitPaPerHour)
  return (
    <figure>
      <svg
        viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
        role="img"
        aria-label={caption}
        className="h-auto w-full"
        fontSize="13"
      >
        <rect
          x={x(from)}
          y={TOP}
          width={Math.max(0, x(to) - x(from))}
          height={HEIGHT - TOP - BOTTOM}
          className="fill-vac-soft"
        />
        {ticks.map((pa) => (
          <g key={pa}>
            <line x1={LEFT} x2={WIDTH - RIGHT} y1={y(pa)} y2={y(pa)} className="stroke-rule" />
            <text x={LEFT - 6} y={y(pa) + 4} textAnchor="end" className="fill-ink-3">
              {(pa / 10 ** exponent).toFixed(1)}
            </text>
          </g>
        ))}
        <text x={2} y={11} className="fill-ink-3">
          ×10
          <tspan dy="-4" fontSize="10">
            {String(exponent).replace('-', '−')}
          </tspan>
          <tspan dy="4"> Pa</tspan>
        </text>
        {xTicks.map((hour) => (
          <text key={hour} x={x(hour)} y={HEIGHT - BOTTOM + 17} textAnchor="middle" className="fill-ink-3">
            {`${hour} h`}
          </text>
        ))}
        <line
          x1={x(0)}
          x2={x(0)}
          y1={TOP}
          y2={HEIGHT - BOTTOM}
          className="stroke-ink-3"
          strokeDasharray="2 3"
        />
        {points.map(({ at, pa }) => (
          <circle key={at.getTime()} cx={x(hours(at))} cy={y(pa)} r={1.6} className="fill-ink" />
        ))}
        {limit !== null && (
          <>
            <line
              x1={x(limit.from)}
              y1={y(limit.fromPa)}
              x2={x(limit.to)}
              y2={y(limit.toPa)}
              className="stroke-ink-2"
              strokeDasharray="5 4"
              strokeWidth="1.5"
            />
            <text
              x={x(limit.to) - 4}
              y={Math.max(TOP + 12, y(limit.toPa) - 6)}
              textAnchor="end"
              className="fill-ink-2"
            >
              limit
            </text>
          </>
        )}
        {finding !== null && (
          <polyline
            points={fitted(finding, points, { from, to }, hours)
              .map(({ hour, pa }) => `${x(hour)},${y(pa)}`)
              .join(' ')}
            className="fill-none stroke-vac"
            strokeWidth="2.2"
          />
        )}
        {opening !== null && hours(opening.at) <= x1 && (
          <>
            <line
              x1={x(hours(opening.at))}
              x2={x(hours(opening.at))}
              y1={TOP}
              y2={HEIGHT - BOTTOM}
              className="stroke-bad"
              strokeWidth="2"
              strokeDasharray="6 3"
            />
            <text
              x={x(hours(opening.at)) - 5}
              y={TOP + 12}
              textAnchor="end"
              className="fill-bad"
              fontWeight="600"
            >
              opened
            </text>
          </>
        )}
      </svg>
      <figcaption className="text-sm text-ink-2">
        Hours since the valve was closed (<Instant at={closedAt} />
        ). Dots: means of the readings. Shaded: the window of the fit.
        {finding !== null && ' Solid line: the fit.'}
        {limit !== null && ' Dashed: what the limit allows from the beginning of the window.'}
        {opening !== null && (
          <>
            {' '}
            Opened <Instant at={opening.at} />: {opening.what}.
          </>
        )}
      </figcaption>
      <PointsTable caption={caption} points={points} hours={hours} />
    </figure>
  )
}

function limitLine(
  points: readonly Point[],
  edges: { fitFrom: Date; from: number; x1: number; top: number },
  hours: (at: Date) => number,
  perHour: number,
) {
  const first = points.find(({ at }) => at >= edges.fitFrom)
  if (first === undefined) return null
  const from = hours(first.at)
  // Cut off where it leaves the drawing.
  const to = Math.min(edges.x1, from + (edges.top - first.pa) / perHour)
  return { from, fromPa: first.pa, to, toPa: first.pa + perHour * (to - from) }
}

/** The curve that was fitted, through the middle of the window's readings. */
function fitted(
  { ratePaPerHour, bend }: IsolationFinding,
  points: readonly Point[],
  { from, to }: { from: number; to: number },
  hours: (at: Date) => number,
) {
  const shape = (hour: number) =>
    ratePaPerHour * (hour - from) +
    (bend === null ? 0 : bend.risePa * (1 - Math.exp(-(hour - from) / bend.tauHours)))
  const inside = points.filter(({ at }) => hours(at) >= from && hours(at) <= to)
  const weights = inside.map(({ pa }) => pa ** -2)
  const total = weights.reduce((sum, weight) => sum + weight, 0)
  const start =
    inside.reduce((sum, { at, pa }, index) => sum + (weights[index] ?? 0) * (pa - shape(hours(at))), 0) /
    total
  return Array.from({ length: 41 }, (_, index) => from + ((to - from) * index) / 40).map((hour) => ({
    hour,
    pa: Math.max(0, start + shape(hour)),
  }))
}

function PointsTable({
  caption,
  points,
  hours,
}: {
  caption: string
  points: readonly Point[]
  hours: (at: Date) => number
}) {
  const every = Math.max(1, Math.ceil(points.length / TABLE_ROWS))
  const rows = points.filter((_, index) => index % every === 0 || index === points.length - 1)
  const columns: readonly Column<Point>[] = [
    { key: 'at', head: 'Time', rowHead: true, cell: ({ at }) => <Instant at={at} /> },
    { key: 'hours', head: 'Hours', align: 'right', cell: ({ at }) => hours(at).toFixed(2) },
    { key: 'pa', head: 'Pressure', align: 'right', cell: ({ pa }) => <Pressure pa={pa} digits={3} /> },
  ]
  return (
    <details className="mt-2">
      <summary className="min-h-8 cursor-pointer text-sm">Figures of the curve</summary>
      <DataTable
        caption={caption}
        columns={columns}
        rows={rows}
        rowKey={({ at }) => at.getTime()}
        empty="No readings."
      />
    </details>
  )
}
