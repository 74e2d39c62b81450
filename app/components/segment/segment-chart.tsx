/** The measured curve with the model over it: hours since the start during a pump-down, dates otherwise. */
import { PressureChart } from '#app/components/charts/pressure-chart.tsx'
import { Panel } from '#app/components/ui/panel.tsx'
import type { SegmentPageProps } from './segment-page.tsx'

const HOUR_MS = 3_600_000

export function SegmentChart(props: SegmentPageProps) {
  return props.curves.kind === 'pump-down' ? <PumpDownChart {...props} /> : <HistoryChart {...props} />
}

function PumpDownChart({ segment, curves, forecast, limit, target, now }: SegmentPageProps) {
  const hoursOf = (at: Date) => (at.getTime() - curves.from.getTime()) / HOUR_MS
  const x = curves.gauges[0]?.mean.map((_, step) => ((step + 0.5) * curves.stepSeconds) / 3600) ?? []
  const measured = curves.gauges.map(({ tag, mean, min, max }) => ({
    label: `${tag} measured`,
    role: 'measured' as const,
    y: mean,
    low: min,
    high: max,
  }))
  const predicted =
    forecast === null || forecast.model === null
      ? []
      : [
          {
            label: 'predicted by the model',
            role: 'predicted' as const,
            x: forecast.model.hours,
            y: forecast.model.pa,
          },
        ]
  return (
    <Panel title="Pump-down">
      <PressureChart
        caption={`Pressure in ${segment.tag} against hours since the start of high vacuum, measured and predicted`}
        kind="hours"
        xLog
        x={x}
        series={[
          ...measured,
          ...predicted,
          ...forecastSeries(forecast, hoursOf(now), lastOf(curves, forecast?.gauge)),
        ]}
        levels={levelsOf(target, limit)}
        marks={curves.marks.map(({ at, text }) => ({ x: hoursOf(at), text }))}
        now={hoursOf(now)}
        csvHref={`/segments/${segment.tag}/readings.csv?from=${curves.from.toISOString()}`}
      />
    </Panel>
  )
}

function lastOf(curves: SegmentPageProps['curves'], tag: string | undefined): number | null {
  const mean = curves.gauges.find((gauge) => gauge.tag === tag)?.mean ?? []
  return mean.findLast((value) => value !== null) ?? null
}

/** From the last reading to the asked pressure, with the 80 % range: straight lines on log–log axes, as the fit is. */
function forecastSeries(forecast: SegmentPageProps['forecast'], nowHours: number, lastPa: number | null) {
  if (forecast === null || forecast.result.kind !== 'forecast' || lastPa === null) return []
  const { hours, low, high } = forecast.result
  const points = 40
  const at = (from: number, to: number, share: number) => from * (to / from) ** share
  const x = Array.from({ length: points }, (_, index) => at(nowHours, high, index / (points - 1)))
  const along = (end: number) =>
    x.map((hour) => {
      const share = Math.log(hour / nowHours) / Math.log(end / nowHours)
      return share > 1.0001 ? null : at(lastPa, forecast.askedPa, share)
    })
  const bottom = along(low).map((value) => value ?? forecast.askedPa)
  return [
    {
      label: 'forecast, 80 % range',
      role: 'forecast' as const,
      x,
      y: along(hours),
      low: bottom,
      high: along(high),
    },
  ]
}

function HistoryChart({ segment, curves, predicted, limit, target, now }: SegmentPageProps) {
  const x =
    curves.gauges[0]?.mean.map(
      (_, step) => curves.from.getTime() + (step + 0.5) * curves.stepSeconds * 1000,
    ) ?? []
  const measured = curves.gauges.map(({ tag, mean, min, max }) => ({
    label: `${tag} measured`,
    role: 'measured' as const,
    y: mean,
    low: min,
    high: max,
  }))
  // The profile is lowest at the pump: that is the value the model gives for the cross.
  const atPump = predicted === null ? null : Math.min(...predicted.map(({ pa }) => pa))
  const level =
    atPump === null
      ? []
      : [{ label: 'predicted at the cross', role: 'predicted' as const, y: x.map(() => atPump) }]
  return (
    <Panel title="Last thirty days">
      <PressureChart
        caption={`Pressure in ${segment.tag} over the last thirty days, measured and predicted`}
        kind="time"
        x={x}
        series={[...measured, ...level]}
        levels={levelsOf(target, limit)}
        marks={curves.marks.map(({ at, text }) => ({ x: at.getTime(), text }))}
        now={now.getTime()}
        csvHref={`/segments/${segment.tag}/readings.csv?from=${curves.from.toISOString()}`}
      />
    </Panel>
  )
}

function levelsOf(target: number | null, limit: number | null) {
  return [
    ...(target === null ? [] : [{ pa: target, label: 'target' }]),
    ...(limit === null ? [] : [{ pa: limit, label: 'limit' }]),
  ]
}
