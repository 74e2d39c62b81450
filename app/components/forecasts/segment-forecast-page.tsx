/** The forecast of one segment: question, answer, curve with its band, what the gas is made of, and keeping it on record. */
import { Form, Link, useNavigation } from 'react-router'
import { SEGMENT_STATES } from '#app/domain/segment-states.ts'
import type { ForecastDetail } from '#app/services/forecasts-detail.server.ts'
import type { SegmentForecast } from '#app/services/forecasts-segment.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { offsetLabel, typedTime } from '../ui/site-time.ts'
import { ForecastChart } from './forecast-chart.tsx'
import { RecordsPanel } from './records-panel.tsx'

const HOUR_MS = 3_600_000

export interface SegmentForecastPageProps extends ForecastDetail {
  /** The question as typed into the address, and what of it could not be read. */
  asked: { typed: Readonly<Record<string, string>>; fields: Readonly<Record<string, string[]>> }
  mayRecord: boolean
  /** Whether the reader may record an isolation test. */
  mayTest: boolean
  zone: string
  failure: ActionFailure | undefined
}

export function SegmentForecastPage(props: SegmentForecastPageProps) {
  const { tag, state, forecast } = props
  return (
    <>
      <PageHead
        title={`Forecast for ${tag}`}
        crumbs={
          <>
            <Link to="/forecasts" className="link">
              Forecasts
            </Link>
            {' / '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>
          </>
        }
        actions={<ButtonLink to={`/forecasts/${tag}/what-if`}>What if</ButtonLink>}
      >
        {SEGMENT_STATES[state].label}
        {forecast !== null && (
          <>
            , high vacuum since <Instant at={forecast.startedAt} age />
          </>
        )}
      </PageHead>
      {forecast === null ? <NoForecast {...props} /> : <WithForecast {...props} forecast={forecast} />}
      <RecordsPanel records={props.records} hits={props.hits} />
    </>
  )
}

function NoForecast({ tag, state, trend, targetPa, mayTest }: SegmentForecastPageProps) {
  return (
    <Panel title="No forecast">
      <p>
        {state === 'pumping'
          ? 'The segment is being pumped, but its gauge has no usable reading since high vacuum began. A forecast may be tried 12 h after the first.'
          : `A date is forecast for segments that are being pumped down; this one is "${SEGMENT_STATES[state].label}".`}
      </p>
      {trend?.perWeek != null && (
        <p className="mt-2">
          {trend.gauge} has changed by {(trend.perWeek * 100).toFixed(1)} % a week over the last thirty days
          and reads <Pressure pa={trend.paNow} />; target <Pressure pa={targetPa} reason="none set" />.
          {trend.weeksToLimit !== null &&
            ` If that goes on, the limit is about ${Math.round(trend.weeksToLimit)} weeks away.`}
        </p>
      )}
      {trend?.paNow != null && targetPa !== null && trend.paNow > targetPa && (
        <>
          <p className="mt-2">
            Waiting does not bring it to its target. What binds is a constant load: hydrogen from the steel,
            which a bake drives out, or a leak, which has to be found. An isolation test and a leak check tell
            which.
          </p>
          <div className="mt-3 flex flex-wrap gap-2 print:hidden">
            {mayTest && (
              <ButtonLink to={`/segments/${tag}/isolation-tests/new`}>Isolation test of {tag}</ButtonLink>
            )}
            <ButtonLink to={`/bakes/options?segments=${tag}`}>Options for a bake of {tag}</ButtonLink>
          </div>
        </>
      )}
    </Panel>
  )
}

function WithForecast(props: SegmentForecastPageProps & { forecast: SegmentForecast }) {
  const { forecast, inService, tag } = props
  const { result, binding } = forecast
  return (
    <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_22rem]">
      <div className="min-w-0">
        <Panel title="Answer">
          <Answer forecast={forecast} />
          {binding !== null && <p className="mt-2">{binding.text}</p>}
          {inService?.binding != null && (
            <p className="mt-2">For the target in service: {inService.binding.text}</p>
          )}
          {[binding, inService?.binding].some(
            (one) => one?.binds === 'hydrogen' || one?.binds === 'water',
          ) && (
            <p className="mt-2 print:hidden">
              <Link to={`/bakes/options?segments=${tag}`} className="link">
                Options for a bake of {tag}
              </Link>
            </p>
          )}
        </Panel>
        <Panel title="Pump-down">
          <ForecastChart tag={tag} forecast={forecast} targetPa={props.targetPa} limitPa={props.limitPa} />
        </Panel>
        <PartsPanel forecast={forecast} />
      </div>
      <div className="min-w-0">
        <Panel title="Question" className="print:hidden">
          <QuestionForm {...props} />
        </Panel>
        {props.mayRecord && result.kind === 'forecast' && <RecordPanel {...props} />}
      </div>
    </div>
  )
}

function Answer({ forecast }: { forecast: SegmentForecast }) {
  const { result, startedAt, askedPa, modelHours } = forecast
  const at = (hours: number) => new Date(startedAt.getTime() + hours * HOUR_MS)
  if (result.kind === 'refused') {
    return (
      <p>
        <strong>
          No date for <Pressure pa={askedPa} />.
        </strong>{' '}
        {result.message}
        {result.tryAgainHours !== null && (
          <>
            {' '}
            It may be tried from <Instant at={at(result.tryAgainHours)} />.
          </>
        )}
      </p>
    )
  }
  return (
    <>
      <p>
        <Pressure pa={askedPa} /> at {forecast.gauge.tag}:{' '}
        <strong>
          <Instant at={at(result.hours)} />
        </strong>
        , {Math.round(result.hours)} h after the start of high vacuum.
      </p>
      <Facts
        items={[
          {
            name: '80 % range',
            value: (
              <>
                <Instant at={at(result.low)} /> to <Instant at={at(result.high)} />
                <span className="block text-sm font-normal text-ink-2">
                  {Math.round(result.low)} to {Math.round(result.high)} h
                </span>
              </>
            ),
          },
          {
            name: 'Window',
            value: (
              <>
                {forecast.window === null ? 'chosen by Ebbline' : 'chosen by you'}:{' '}
                {result.windowHours[0].toFixed(1)} to {result.windowHours[1].toFixed(1)} h
                <span className="block text-sm font-normal text-ink-2">
                  <Instant at={at(result.windowHours[0])} /> to <Instant at={at(result.windowHours[1])} />
                </span>
              </>
            ),
          },
          {
            name: 'Fitted on',
            value: `${result.points} means, scatter ${(result.rmsLn * 100).toFixed(1)} %`,
          },
          {
            name: "The register's model alone says",
            value: modelHours === null ? 'never, by pumping alone' : `${Math.round(modelHours)} h`,
          },
        ]}
      />
    </>
  )
}

function PartsPanel({ forecast: { parts, gauge } }: { forecast: SegmentForecast }) {
  if (parts === null) return null
  const { alpha, alphaSe, fallingPa, constantPa, constantUpperPa, hydrogenPa } = parts
  const rest = constantPa === null || hydrogenPa === null ? null : constantPa - hydrogenPa
  return (
    <Panel title="What it is made of now">
      <Facts
        items={[
          {
            name: 'Water from the wall, falling',
            value: (
              <>
                <Pressure pa={fallingPa} />
                <span className="block text-sm font-normal text-ink-2">
                  as t to the power −{alpha.toFixed(2)} ± {(2 * alphaSe).toFixed(2)}
                </span>
              </>
            ),
          },
          {
            name: 'Constant part in the readings',
            value:
              constantPa === null ? (
                <>
                  none shown, below <Pressure pa={constantUpperPa} />
                </>
              ) : (
                <Pressure pa={constantPa} />
              ),
          },
          { name: 'Of it hydrogen, by the register', value: <Pressure pa={hydrogenPa} reason="no model" /> },
          ...(rest === null
            ? []
            : [
                {
                  name: 'Constant load beside it',
                  value: rest > 0 ? <Pressure pa={rest} /> : 'none: the hydrogen explains it',
                },
              ]),
        ]}
      />
      <p className="mt-2 text-sm text-ink-3">
        Power law plus a constant, fitted to the logarithm of {gauge.tag}; the constant is kept only if the
        readings call for it (level 0.05), else its upper bound (95 %) is given. Nitrogen-equivalent, as the
        gauge reads.
      </p>
    </Panel>
  )
}

function QuestionForm({
  tag,
  forecast,
  asked,
  zone,
}: SegmentForecastPageProps & { forecast: SegmentForecast }) {
  const { window, startedAt, until, result } = forecast
  const at = (hours: number) => new Date(startedAt.getTime() + hours * HOUR_MS)
  const used = result.kind === 'forecast' ? result.windowHours : null
  const hint = `Year-month-day hour:minute, site time (now ${offsetLabel(until, zone)}).`
  const proposed =
    used === null ? '' : ` Used now: ${typedTime(at(used[0]), zone)} to ${typedTime(at(used[1]), zone)}.`
  return (
    <Form method="get" action={`/forecasts/${tag}`}>
      {Object.keys(asked.fields).length > 0 && (
        <Notice tone="bad" lead="Not understood. ">
          The forecast shown answers without what could not be read.
        </Notice>
      )}
      <TextField
        name="target"
        label="Pressure, Pa"
        inputMode="decimal"
        autoComplete="off"
        defaultValue={asked.typed.target ?? forecast.askedPa.toExponential(1)}
        errors={asked.fields.target}
      />
      <TextField
        name="from"
        label="Fit from"
        hint={`Empty: Ebbline chooses.${proposed}`}
        autoComplete="off"
        spellCheck={false}
        defaultValue={asked.typed.from ?? (window === null ? '' : typedTime(window.from, zone))}
        errors={asked.fields.from}
      />
      <TextField
        name="to"
        label="Fit to"
        hint={hint}
        autoComplete="off"
        spellCheck={false}
        defaultValue={asked.typed.to ?? (window === null ? '' : typedTime(window.to, zone))}
        errors={asked.fields.to}
      />
      <div className="flex flex-wrap gap-2">
        <Button kind="primary">Forecast</Button>
        <ButtonLink to={`/forecasts/${tag}`}>As Ebbline chooses</ButtonLink>
      </div>
    </Form>
  )
}

function RecordPanel({ forecast, zone, failure }: SegmentForecastPageProps & { forecast: SegmentForecast }) {
  const sending = useNavigation().formMethod === 'POST'
  const { window } = forecast
  return (
    <Panel title="Keep on record" className="print:hidden">
      <p className="mb-2 text-sm text-ink-2">
        Kept with its range and judged by itself when the range has passed. It cannot be taken back.
      </p>
      <Form method="post">
        <FormFailure failure={failure} />
        <input type="hidden" name="target" value={String(forecast.askedPa)} />
        <input type="hidden" name="from" value={window === null ? '' : typedTime(window.from, zone)} />
        <input type="hidden" name="to" value={window === null ? '' : typedTime(window.to, zone)} />
        <TextAreaField
          name="note"
          label="Note"
          rows={2}
          maxLength={1000}
          defaultValue={failure?.typed?.note}
          errors={failure?.fields.note}
        />
        <Button disabled={sending}>{sending ? 'Keeping' : 'Keep this forecast'}</Button>
      </Form>
    </Panel>
  )
}
