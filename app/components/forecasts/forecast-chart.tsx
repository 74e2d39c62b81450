/** The pump-down on log axes with the forecast and its 80 % band. */
import type { SegmentForecast } from '#app/services/forecasts-segment.server.ts'
import { PressureChart } from '../charts/pressure-chart.tsx'

const HOUR_MS = 3_600_000
const BAND_POINTS = 40

export function ForecastChart({
  tag,
  forecast,
  targetPa,
  limitPa,
}: {
  tag: string
  forecast: SegmentForecast
  targetPa: number | null
  limitPa: number | null
}) {
  const hours = (at: Date) => (at.getTime() - forecast.startedAt.getTime()) / HOUR_MS
  const levels = [
    { pa: forecast.askedPa, label: 'asked' },
    ...(targetPa === null || targetPa === forecast.askedPa ? [] : [{ pa: targetPa, label: 'target' }]),
    ...(limitPa === null ? [] : [{ pa: limitPa, label: 'limit' }]),
  ]
  return (
    <PressureChart
      caption={`Pressure at ${forecast.gauge.tag} in ${tag} against hours since the start of high vacuum, with the forecast and its 80 % range`}
      kind="hours"
      xLog
      x={forecast.points.map(({ at }) => hours(at))}
      series={[
        {
          label: `${forecast.gauge.tag} measured`,
          role: 'measured',
          y: forecast.points.map(({ pa }) => pa),
          low: forecast.points.map(({ low }) => low),
          high: forecast.points.map(({ high }) => high),
        },
        ...bandOf(forecast, hours(forecast.until)),
      ]}
      levels={levels}
      marks={forecast.changes.map(({ at, what }) => ({ x: hours(at), text: what }))}
      now={hours(forecast.until)}
    />
  )
}

/** From the last reading to the asked pressure: straight on log axes, as the fit is where no floor bends it. */
function bandOf({ result, points, askedPa }: SegmentForecast, now: number) {
  const last = points.at(-1)?.pa
  if (result.kind !== 'forecast' || last === undefined || result.low <= now) return []
  const between = (from: number, to: number, share: number) => from * (to / from) ** share
  const x = Array.from({ length: BAND_POINTS }, (_, index) =>
    between(now, result.high, index / (BAND_POINTS - 1)),
  )
  const along = (end: number) =>
    x.map((hour) => {
      const share = Math.log(hour / now) / Math.log(end / now)
      return share > 1.0001 ? null : between(last, askedPa, share)
    })
  return [
    {
      label: 'forecast, 80 % range',
      role: 'forecast' as const,
      x,
      y: along(result.hours),
      low: along(result.low).map((pa) => pa ?? askedPa),
      high: along(result.high),
    },
  ]
}
