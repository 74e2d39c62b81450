/** Temperature along the tube at one instant, against the band it should be in. */
import type { SkylinePoint } from '#app/domain/bake-run.ts'
import { linePath, PlotFrame, roundTicks } from '../charts/plot-frame.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'

const STATE_WORDS: Record<SkylinePoint['state'], string> = {
  fresh: 'fresh',
  stale: 'too old',
  silent: 'says nothing',
}

function ageText(minutes: number | null): string {
  if (minutes === null) return 'never'
  if (minutes < 90) return `${Math.max(0, Math.round(minutes))} min ago`
  if (minutes < 48 * 60) return `${(minutes / 60).toFixed(1)} h ago`
  return `${Math.round(minutes / 1440)} days ago`
}

const COLUMNS: readonly Column<SkylinePoint>[] = [
  { key: 'tag', head: 'Thermocouple', rowHead: true, nowrap: true, cell: ({ tag }) => tag },
  { key: 'at', head: 'Chainage, m', align: 'right', cell: ({ chainageM }) => chainageM.toFixed(1) },
  {
    key: 'celsius',
    head: 'Last value, °C',
    align: 'right',
    cell: ({ celsius }) => (celsius === null ? '–' : celsius.toFixed(1)),
  },
  { key: 'age', head: 'Measured', nowrap: true, cell: ({ ageMinutes }) => ageText(ageMinutes) },
  {
    key: 'state',
    head: 'Counted',
    cell: ({ state, since }) =>
      state === 'fresh' ? 'yes' : `no: ${since === '' ? STATE_WORDS[state] : since}`,
  },
]

/**
 * @param band setpoint and how far from it is allowed, °C; null where nothing is heated
 * @param levels temperatures that matter, drawn dashed
 */
export function Skyline({
  points,
  startM,
  endM,
  band,
  levels = [],
}: {
  points: readonly SkylinePoint[]
  startM: number
  endM: number
  band: { setpointC: number; toleranceC: number | null } | null
  levels?: readonly { celsius: number; label: string }[]
}) {
  const told = points.flatMap(({ celsius, state }) =>
    celsius === null || state === 'silent' ? [] : [celsius],
  )
  if (told.length === 0) {
    return <p className="py-2 text-ink-2">No thermocouple of this segment says anything at present.</p>
  }
  const wanted = [
    ...told,
    ...levels.map(({ celsius }) => celsius),
    ...(band === null
      ? []
      : [band.setpointC + (band.toleranceC ?? 0), band.setpointC - (band.toleranceC ?? 0)]),
  ]
  const low = Math.floor((Math.min(...wanted) - 4) / 10) * 10
  const high = Math.ceil((Math.max(...wanted) + 4) / 10) * 10
  const y = (celsius: number) => (celsius - low) / (high - low)
  const x = (chainage: number) => (chainage - startM) / (endM - startM)
  const drawn = points.map(({ chainageM, celsius, state }) => ({
    x: x(chainageM),
    y: state === 'fresh' && celsius !== null ? y(celsius) : null,
  }))
  const hottest = points.reduce<SkylinePoint | null>(
    (best, one) =>
      one.celsius !== null && one.state !== 'silent' && one.celsius > (best?.celsius ?? -Infinity)
        ? one
        : best,
    null,
  )
  return (
    <figure>
      <PlotFrame
        title="Temperature, °C, along chainage in m"
        label={`Temperature along the tube from ${startM} to ${endM} m: ${told.length} of ${points.length} thermocouples, ${Math.min(...told).toFixed(0)} to ${Math.max(...told).toFixed(0)} °C${hottest === null ? '' : `, hottest ${hottest.tag} at ${hottest.chainageM.toFixed(0)} m`}. The table below has every value.`}
        heightClass="h-52"
        xTicks={roundTicks(startM, endM, 4).map((value) => ({ share: x(value), label: `${value}` }))}
        yTicks={roundTicks(low, high, 5).map((value) => ({ share: y(value), label: `${value}` }))}
      >
        {band?.toleranceC != null && (
          <rect
            x={0}
            width={1000}
            y={1000 - y(band.setpointC + band.toleranceC) * 1000}
            height={(y(band.setpointC + band.toleranceC) - y(band.setpointC - band.toleranceC)) * 1000}
            className="fill-vac-soft"
          />
        )}
        {band !== null && (
          <line
            x1={0}
            x2={1000}
            y1={1000 - y(band.setpointC) * 1000}
            y2={1000 - y(band.setpointC) * 1000}
            className="stroke-vac"
            strokeWidth={1.5}
            strokeDasharray="6 4"
            vectorEffect="non-scaling-stroke"
          />
        )}
        {levels.map(({ celsius, label }) => (
          <line
            key={label}
            x1={0}
            x2={1000}
            y1={1000 - y(celsius) * 1000}
            y2={1000 - y(celsius) * 1000}
            className="stroke-ink-3"
            strokeDasharray="2 3"
            vectorEffect="non-scaling-stroke"
          />
        ))}
        <path
          d={linePath(drawn)}
          className="fill-none stroke-heat"
          strokeWidth={2}
          vectorEffect="non-scaling-stroke"
        />
        {points.map(({ tag, chainageM, celsius, state }) =>
          celsius === null || state === 'silent' ? (
            <Mark key={tag} x={x(chainageM)} y={0} className="stroke-bad" round={false} />
          ) : (
            <Mark
              key={tag}
              x={x(chainageM)}
              y={y(celsius)}
              className={state === 'fresh' ? 'stroke-heat' : 'stroke-ink-3'}
              round
            />
          ),
        )}
      </PlotFrame>
      <figcaption className="text-sm text-ink-2">
        {band !== null && (
          <>
            Dashed: setpoint {band.setpointC.toFixed(0)} °C
            {band.toleranceC !== null && `; shaded: ${band.toleranceC} °C to either side`}.{' '}
          </>
        )}
        {levels.map(({ label, celsius }) => `Dotted: ${label}, ${celsius} °C. `)}
        Points are thermocouples; a short stroke at the bottom edge is one that says nothing.
      </figcaption>
      <details className="mt-2 print:hidden">
        <summary className="cursor-pointer py-1 text-sm text-vac">Every thermocouple as a table</summary>
        <DataTable
          caption="Thermocouples along the segment, west to east"
          columns={COLUMNS}
          rows={points}
          rowKey={({ tag }) => tag}
          empty="The register has no thermocouple on this segment."
        />
      </details>
    </figure>
  )
}

/** A dot, or a short stroke, that keeps its size while the plot stretches: a line of no length with a thick, round end. */
function Mark({ x, y, className, round }: { x: number; y: number; className: string; round: boolean }) {
  const at = { x: x * 1000, y: 1000 - y * 1000 }
  return (
    <line
      x1={at.x}
      x2={at.x}
      y1={at.y}
      y2={round ? at.y + 0.01 : at.y - 60}
      className={className}
      strokeWidth={round ? 8 : 3}
      strokeLinecap={round ? 'round' : 'butt'}
      vectorEffect="non-scaling-stroke"
    />
  )
}
