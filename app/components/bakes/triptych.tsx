/** Temperature, pressure and power of a bake under one another on one axis of time. */
import type { PressureUnit } from '#app/context.ts'
import { useSite } from '#app/hooks/use-site.ts'
import { fromPascal } from '#app/physics/units.ts'
import { bandPath, linePath, PlotFrame, roundTicks, type Tick } from '../charts/plot-frame.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { pressureWords } from '../ui/format-pressure.ts'
import { Instant } from '../ui/instant.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { shortDayText } from '../ui/site-time.ts'

export interface BakeMoment {
  at: number
  minC: number | null
  medianC: number | null
  maxC: number | null
  setpointC: number | null
  pressurePa: number | null
  powerKW: number | null
}

const DAY_MS = 86_400_000
/** Rows of the table: enough to follow the bake, few enough to read. */
const TABLE_ROWS = 40

const COLUMNS: readonly Column<BakeMoment>[] = [
  { key: 'at', head: 'Time', rowHead: true, cell: ({ at }) => <Instant at={new Date(at)} /> },
  { key: 'setpoint', head: 'Setpoint, °C', align: 'right', cell: ({ setpointC }) => degrees(setpointC) },
  { key: 'min', head: 'Lowest, °C', align: 'right', cell: ({ minC }) => degrees(minC) },
  { key: 'median', head: 'Median, °C', align: 'right', cell: ({ medianC }) => degrees(medianC) },
  { key: 'max', head: 'Highest, °C', align: 'right', cell: ({ maxC }) => degrees(maxC) },
  {
    key: 'pressure',
    head: 'Pressure',
    align: 'right',
    cell: ({ pressurePa }) => <Pressure pa={pressurePa} />,
  },
  {
    key: 'power',
    head: 'Power, kW',
    align: 'right',
    cell: ({ powerKW }) => (powerKW === null ? '–' : powerKW.toFixed(1)),
  },
]

function degrees(value: number | null): string {
  return value === null ? '–' : value.toFixed(0)
}

/** Every so many moments, and the last one. */
function thinned(moments: readonly BakeMoment[]): BakeMoment[] {
  const every = Math.max(1, Math.ceil(moments.length / TABLE_ROWS))
  return moments.filter((_, index) => index % every === 0 || index === moments.length - 1)
}

function extremes(values: readonly (number | null)[]): { low: number; high: number } | null {
  const told = values.flatMap((value) => (value === null ? [] : [value]))
  return told.length === 0 ? null : { low: Math.min(...told), high: Math.max(...told) }
}

/**
 * @param gauge the gauge whose pressure is drawn
 * @param supply the supply set whose power is drawn; null when nobody has said which one heats the segment
 */
export function Triptych({
  moments,
  gauge,
  supply,
}: {
  moments: readonly BakeMoment[]
  gauge: string
  supply: string | null
}) {
  const { unit, zone } = useSite()
  const first = moments[0]
  const last = moments.at(-1)
  if (first === undefined || last === undefined || moments.length < 2) {
    return <p className="py-2 text-ink-2">There is nothing to draw yet: the bake has just begun.</p>
  }
  const span = last.at - first.at
  const x = (at: number) => (at - first.at) / span
  const xTicks = dayTicks(first.at, last.at, zone)
  return (
    <figure>
      <figcaption className="sr-only">
        Temperature, pressure and power of the bake on one axis of time. The table below holds the figures.
      </figcaption>
      <Temperatures moments={moments} x={x} xTicks={xTicks} />
      <Pressures moments={moments} x={x} xTicks={xTicks} gauge={gauge} unit={unit} />
      {supply === null ? (
        <p className="py-2 text-sm text-ink-2">
          No power is drawn: no plan says which supply set heats this segment.
        </p>
      ) : (
        <Powers moments={moments} x={x} xTicks={xTicks} supply={supply} />
      )}
      <details className="mt-2 print:hidden">
        <summary className="cursor-pointer py-1 text-sm text-vac">The same as a table</summary>
        <DataTable
          caption="The bake in figures, oldest first"
          columns={COLUMNS}
          rows={thinned(moments)}
          rowKey={({ at }) => at}
          empty="Nothing yet."
        />
      </details>
    </figure>
  )
}

interface PartProps {
  moments: readonly BakeMoment[]
  x: (at: number) => number
  xTicks: readonly Tick[]
}

function Temperatures({ moments, x, xTicks }: PartProps) {
  const range = extremes(moments.flatMap(({ minC, maxC, setpointC }) => [minC, maxC, setpointC]))
  if (range === null) return <p className="py-2 text-ink-2">No temperature is known of this stretch.</p>
  const low = Math.min(0, range.low)
  const high = Math.ceil((range.high + 2) / 20) * 20
  const y = (value: number | null) => (value === null ? null : (value - low) / (high - low))
  return (
    <PlotFrame
      title="Temperature of the tube, °C: lowest to highest shaded, median drawn, setpoint dashed"
      label={`Temperatures from ${range.low.toFixed(0)} to ${range.high.toFixed(0)} °C`}
      heightClass="h-44"
      xTicks={xTicks}
      yTicks={roundTicks(low, high, 4).map((value) => ({ share: y(value) ?? 0, label: `${value}` }))}
    >
      <path
        d={bandPath(moments.map(({ at, minC, maxC }) => ({ x: x(at), low: y(minC), high: y(maxC) })))}
        className="fill-heat-soft"
      />
      <path
        d={linePath(moments.map(({ at, medianC }) => ({ x: x(at), y: y(medianC) })))}
        className="fill-none stroke-heat"
        strokeWidth={2}
        vectorEffect="non-scaling-stroke"
      />
      <path
        d={linePath(moments.map(({ at, setpointC }) => ({ x: x(at), y: y(setpointC) })))}
        className="fill-none stroke-vac"
        strokeWidth={1.5}
        strokeDasharray="6 4"
        vectorEffect="non-scaling-stroke"
      />
    </PlotFrame>
  )
}

function Pressures({ moments, x, xTicks, gauge, unit }: PartProps & { gauge: string; unit: PressureUnit }) {
  const positive = moments.map(({ pressurePa }) =>
    pressurePa !== null && pressurePa > 0 ? pressurePa : null,
  )
  const range = extremes(positive)
  if (range === null) {
    return <p className="py-2 text-sm text-ink-2">{gauge} gave no pressure in this stretch.</p>
  }
  const low = Math.floor(Math.log10(fromPascal(range.low, unit)))
  const high = Math.max(low + 1, Math.ceil(Math.log10(fromPascal(range.high, unit))))
  const y = (pa: number | null) =>
    pa === null ? null : (Math.log10(fromPascal(pa, unit)) - low) / (high - low)
  const ticks = Array.from({ length: high - low + 1 }, (_, index) => low + index)
  return (
    <PlotFrame
      title={`Pressure at ${gauge}, ${unit}, nitrogen-equivalent, one decade a line`}
      label={`Pressure from ${pressureWords(range.low, unit)} to ${pressureWords(range.high, unit)}`}
      heightClass="h-36"
      xTicks={xTicks}
      yTicks={ticks.map((power) => ({ share: (power - low) / (high - low), label: `1e${power}` }))}
    >
      <path
        d={linePath(positive.map((pa, index) => ({ x: x(moments[index]?.at ?? 0), y: y(pa) })))}
        className="fill-none stroke-ink"
        strokeWidth={1.8}
        vectorEffect="non-scaling-stroke"
      />
    </PlotFrame>
  )
}

/** Supplies are logged more sparsely than temperatures in the archive: over so long a pause the line is carried on. */
const CARRIED_MS = 3 * 3_600_000

/** Moments with a power, and one without where a pause is too long to be carried over. */
function carried(moments: readonly BakeMoment[]): BakeMoment[] {
  const kept: BakeMoment[] = []
  for (const moment of moments) {
    if (moment.powerKW === null) continue
    const before = kept.at(-1)
    if (before !== undefined && moment.at - before.at > CARRIED_MS) {
      kept.push({ ...moment, at: before.at + 1, powerKW: null })
    }
    kept.push(moment)
  }
  return kept
}

function Powers({ moments: all, x, xTicks, supply }: PartProps & { supply: string }) {
  const moments = carried(all)
  const range = extremes(moments.map(({ powerKW }) => powerKW))
  if (range === null) {
    return <p className="py-2 text-sm text-ink-2">{supply} gave no readings in this stretch.</p>
  }
  const high = Math.max(10, Math.ceil((range.high * 1.05) / 10) * 10)
  const y = (value: number | null) => (value === null ? null : value / high)
  return (
    <PlotFrame
      title={`Power of ${supply}, kW, volts times amps at its terminals`}
      label={`Power up to ${range.high.toFixed(1)} kW`}
      heightClass="h-28"
      xTicks={xTicks}
      yTicks={roundTicks(0, high, 3).map((value) => ({ share: value / high, label: `${value}` }))}
    >
      <path
        d={bandPath(
          moments.map(({ at, powerKW }) => ({
            x: x(at),
            low: powerKW === null ? null : 0,
            high: y(powerKW),
          })),
        )}
        className="fill-warn-soft"
      />
      <path
        d={linePath(moments.map(({ at, powerKW }) => ({ x: x(at), y: y(powerKW) })))}
        className="fill-none stroke-warn"
        strokeWidth={1.5}
        vectorEffect="non-scaling-stroke"
      />
    </PlotFrame>
  )
}

/** Site midnights, thinned so that their dates do not touch. */
function dayTicks(fromMs: number, toMs: number, zone: string): Tick[] {
  const days = (toMs - fromMs) / DAY_MS
  const every = Math.max(1, Math.ceil(days / 6))
  const ticks: Tick[] = []
  let before = ''
  let count = 0
  for (let at = Math.ceil(fromMs / 3_600_000) * 3_600_000; at <= toMs; at += 3_600_000) {
    const day = shortDayText(new Date(at), zone)
    if (before !== '' && day !== before) {
      if (count % every === 0) ticks.push({ share: (at - fromMs) / (toMs - fromMs), label: day })
      count += 1
    }
    before = day
  }
  return ticks
}
