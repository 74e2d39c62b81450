/** What the log says: when a pressure will be reached, with its range and its grounds, or why that cannot be said. */
import { Form, Link } from 'react-router'
import { Button } from '#app/components/ui/button.tsx'
import { Instant } from '#app/components/ui/instant.tsx'
import { Facts, Panel } from '#app/components/ui/panel.tsx'
import { Pressure } from '#app/components/ui/pressure.tsx'
import type { SegmentPageProps } from './segment-page.tsx'

const HOUR_MS = 3_600_000
const WEEKS_WORTH_SAYING = 400

export function ForecastPanel(props: SegmentPageProps) {
  const { forecast, curves, standing } = props
  if (forecast !== null) return <PumpDownForecastPanel {...props} forecast={forecast} />
  return (
    <Panel title="What the log says">
      {standing.verdict === 'not-in-service' ? (
        <p className="text-ink-2">
          Forecasts are made for pump-downs and for segments in service. In this state the readings stand for
          themselves.
        </p>
      ) : (
        <TrendWords perWeek={curves.perWeek} {...props} />
      )}
    </Panel>
  )
}

function TrendWords({ perWeek, standing, limit, target }: SegmentPageProps & { perWeek: number | null }) {
  const now = standing.headline?.value ?? null
  if (perWeek === null)
    return <p className="text-ink-2">Not enough readings in the last thirty days to see a trend.</p>
  const rising = perWeek >= 0.005
  const weeks =
    rising && limit !== null && now !== null && now < limit
      ? Math.log(limit / now) / Math.log1p(perWeek)
      : null
  return (
    <>
      <Facts
        items={[
          {
            name: 'Trend of the cross gauge',
            value: Math.abs(perWeek) < 0.005 ? 'flat' : `${(perWeek * 100).toFixed(1)} % a week`,
          },
          { name: 'Target', value: <Pressure pa={target} reason="none set" /> },
          { name: 'Operating limit', value: <Pressure pa={limit} reason="none set" /> },
        ]}
      />
      {weeks !== null && weeks < WEEKS_WORTH_SAYING && (
        <p className="mt-2 text-ink-2">
          If this trend holds, the limit is about {Math.round(weeks)} weeks away. Thirty days of readings,
          median slope; a trend is not a cause.
        </p>
      )}
    </>
  )
}

function PumpDownForecastPanel({
  forecast,
  asked,
  segment,
}: SegmentPageProps & { forecast: NonNullable<SegmentPageProps['forecast']> }) {
  const { result } = forecast
  const instant = (hours: number) => new Date(forecast.startedAt.getTime() + hours * HOUR_MS)
  return (
    <Panel
      title="When will it be there?"
      aside={
        <Link to={`/forecasts/${segment.tag}`} className="link text-sm">
          The fit in full
        </Link>
      }
    >
      <Form
        method="get"
        action={`/segments/${segment.tag}`}
        className="mb-3 flex flex-wrap items-end gap-2 print:hidden"
      >
        <label className="min-w-0 flex-1">
          <span className="block text-sm text-ink-2">Pressure at {forecast.gauge}, Pa</span>
          <input
            name="to"
            inputMode="decimal"
            defaultValue={asked.text === '' ? forecast.askedPa.toExponential(1) : asked.text}
            aria-invalid={asked.error !== null}
            aria-describedby={asked.error === null ? undefined : 'asked-error'}
            className="min-h-10 w-full rounded-md border border-edge bg-sheet px-2.5"
          />
        </label>
        <Button>Forecast</Button>
      </Form>
      {asked.error !== null && (
        <p id="asked-error" className="mb-2 text-bad">
          {asked.error} Shown instead: <Pressure pa={forecast.askedPa} />.
        </p>
      )}
      {result.kind === 'forecast' ? (
        <>
          <p className="mb-2">
            <Pressure pa={forecast.askedPa} /> is forecast <strong>{Math.round(result.hours)} h</strong> after
            the start of high vacuum: <Instant at={instant(result.hours)} />.
          </p>
          <Facts
            items={[
              {
                name: '80 % range',
                value: (
                  <>
                    {Math.round(result.low)} to {Math.round(result.high)} h
                    <span className="block text-sm font-normal text-ink-2">
                      <Instant at={instant(result.low)} /> to <Instant at={instant(result.high)} />
                    </span>
                  </>
                ),
              },
              {
                name: 'Exponent of the fall',
                value: `${result.alpha.toFixed(3)} ± ${result.alphaSe.toFixed(3)}`,
              },
              {
                name: 'Constant part',
                value:
                  result.floorPa === null ? (
                    <>
                      below <Pressure pa={result.floorUpperPa} />
                    </>
                  ) : (
                    <Pressure pa={result.floorPa} />
                  ),
              },
              {
                name: 'Fitted on',
                value: `${result.points} steps, ${result.windowHours[0].toFixed(0)} to ${result.windowHours[1].toFixed(0)} h`,
              },
              {
                name: 'Model alone says',
                value:
                  forecast.modelHours === null
                    ? 'never, by pumping alone'
                    : `${Math.round(forecast.modelHours)} h`,
              },
            ]}
          />
          <p className="mt-2 text-sm text-ink-3">
            Fit of a falling power law, with a constant part if the data call for one, to {forecast.gauge} as
            read (nitrogen-equivalent). The range covers noise, its correlation in time and the choice of the
            law; it cannot cover a leak that opens or a pump that stops.
          </p>
        </>
      ) : (
        <p>
          <strong>No forecast.</strong> {result.message}
          {result.tryAgainHours !== null && (
            <>
              {' '}
              Try again from <Instant at={instant(result.tryAgainHours)} />.
            </>
          )}
        </p>
      )}
    </Panel>
  )
}
