/** What comes of a trial: its figures, its curve, and the same as a table. */
import { PressureChart } from '#app/components/charts/pressure-chart.tsx'
import { Facts } from '#app/components/ui/panel.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import type { WhatIfState } from '#app/domain/what-if.ts'
import { readOff, type WhatIfCurve } from '#app/domain/what-if-solve.ts'
import type { WhatIfPageData } from '#app/services/what-if.server.ts'

const DAY_H = 24
const DAYS_FROM_H = 72

/** A length of time as people say it. */
export function spanText(hours: number): string {
  if (hours < DAYS_FROM_H) return `${hours < 10 ? hours.toFixed(1) : Math.round(hours)} h`
  return `${(hours / DAY_H).toFixed(1)} d`
}

export function WhatIfFacts({
  curve,
  mode,
  targetPa,
  corners,
}: {
  curve: WhatIfCurve
  mode: WhatIfState['mode']
  targetPa: number | null
  corners: readonly { hour: number }[]
}) {
  const read = readOff(curve, targetPa)
  const cooled = corners.at(-1)?.hour ?? 0
  const last = curve.hours.length - 1
  return (
    <Facts
      items={[
        {
          name:
            mode === 'bake'
              ? `Cold again, ${spanText(read.endHour - cooled)} after the bake`
              : `After ${spanText(read.endHour)}`,
          value: <Pressure pa={read.endPa} />,
        },
        { name: 'Most of it', value: read.mostly },
        {
          name: 'Water, hydrogen, air then',
          value: (
            <>
              <Pressure pa={curve.waterPa[last] ?? null} />, <Pressure pa={curve.hydrogenPa[last] ?? null} />,{' '}
              <Pressure pa={curve.airPa[last] ?? null} />
            </>
          ),
        },
        ...(mode === 'bake'
          ? [
              {
                name: 'Bake, ramps included',
                value: spanText(cooled - (corners[1]?.hour ?? 0)),
              },
              {
                name: 'Highest while warm',
                value: <Pressure pa={highestFrom(curve, corners[1]?.hour ?? 0)} />,
              },
            ]
          : []),
        {
          name: 'At the target',
          value:
            targetPa === null ? (
              'none set'
            ) : (
              <>
                {read.targetHour === null
                  ? `not within ${spanText(read.endHour)}`
                  : `${spanText(read.targetHour)} after the start`}
                <span className="block text-sm font-normal text-ink-2">
                  <Pressure pa={targetPa} />
                </span>
              </>
            ),
        },
      ]}
    />
  )
}

function highestFrom({ hours, pa }: WhatIfCurve, from: number): number {
  return Math.max(...pa.filter((_, at) => (hours[at] ?? 0) >= from))
}

export function WhatIfChart({
  tag,
  curve,
  mode,
  usual,
  measured,
  targetPa,
  corners,
}: {
  tag: string
  curve: WhatIfCurve
  mode: WhatIfState['mode']
  /** Pumping with the register's numbers; null where the trial is that. */
  usual: WhatIfCurve | null
  measured: WhatIfPageData['measured']
  targetPa: number | null
  corners: readonly { hour: number; celsius: number }[]
}) {
  const end = curve.hours.at(-1) ?? 0
  const [, cold, hot, held, cooled] = corners
  const marks =
    cold === undefined || hot === undefined || held === undefined || cooled === undefined
      ? []
      : [
          { x: cold.hour, text: 'ramp begins' },
          { x: hot.hour, text: `soak at ${hot.celsius} °C begins` },
          { x: held.hour, text: 'soak ends' },
          { x: cooled.hour, text: 'cold again' },
        ]
  // Only what lies in the time of the trial: the picture is of the trial.
  const within = (hours: readonly number[]) => hours.filter((hour) => hour <= end * (1 + 1e-9))
  const seen = measured === null ? [] : within(measured.hours)
  const known = usual === null ? [] : within(usual.hours)
  return (
    <PressureChart
      key={mode}
      caption={`Pressure in ${tag} against hours since the start of high vacuum, for the numbers tried`}
      kind="hours"
      xLog={mode === 'pump-down'}
      x={curve.hours}
      series={[
        ...(measured === null || seen.length === 0
          ? []
          : [
              {
                label: `${measured.gauge} measured`,
                role: 'measured' as const,
                x: seen,
                y: measured.pa.slice(0, seen.length),
              },
            ]),
        ...(usual === null || known.length === 0
          ? []
          : [
              {
                label: mode === 'bake' ? 'pumping on without a bake' : 'with the register’s numbers',
                role: 'forecast' as const,
                x: known,
                y: usual.pa.slice(0, known.length),
              },
            ]),
        { label: 'tried', role: 'predicted', y: curve.pa },
        { label: 'of it water', role: 'predicted', y: curve.waterPa },
        { label: 'of it hydrogen', role: 'predicted', y: curve.hydrogenPa },
      ]}
      levels={targetPa === null ? [] : [{ pa: targetPa, label: 'target' }]}
      marks={marks}
    />
  )
}
