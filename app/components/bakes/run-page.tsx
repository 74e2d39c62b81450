/** A bake of a segment: how it stands now, how it went, and what it left behind. */
import { Form, Link, useNavigation } from 'react-router'
import { DEVIATION_KINDS } from '#app/domain/planning.ts'
import { DEVIATION_KIND_LABELS } from '#app/domain/schemas/bake-deviation.ts'
import type { BakeAfterwards } from '#app/services/bake-afterwards.server.ts'
import type { BakeRun } from '#app/services/bake-runs.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField, TextAreaField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { StateMark } from '../ui/state-mark.tsx'
import { AfterwardsPanel } from './run-afterwards.tsx'
import { Skyline } from './skyline.tsx'
import { Triptych } from './triptych.tsx'

type Deviation = BakeRun['deviations'][number]

const PHASE_WORDS = { heating: 'Heating up', soak: 'Soak', cooling: 'Cooling', over: 'Over' } as const

const DEVIATION_COLUMNS: readonly Column<Deviation>[] = [
  {
    key: 'kind',
    head: 'About',
    rowHead: true,
    nowrap: true,
    cell: ({ kind }) => DEVIATION_KIND_LABELS[kind],
  },
  { key: 'detail', head: 'What was found', cell: ({ detail }) => detail },
  { key: 'from', head: 'From', cell: ({ startsAt }) => <Instant at={startsAt} /> },
  {
    key: 'to',
    head: 'Until',
    cell: ({ endsAt }) => (endsAt === null ? 'lasts' : <Instant at={endsAt} />),
  },
  {
    key: 'by',
    head: 'Noted by',
    cell: ({ notedBy, notedAt }) => (
      <>
        {notedBy ?? 'Ebbline'}, <Instant at={notedAt} />
      </>
    ),
  },
]

export interface BakeRunPageProps extends BakeRun {
  now: Date
  zone: string
  gauge: string
  afterwards: BakeAfterwards | null
  may: { note: boolean; accept: boolean }
  failure: (ActionFailure & { intent?: string }) | undefined
}

export function BakeRunPage(props: BakeRunPageProps) {
  const { segment, bake, bakes, plan, terms, points, advice, may } = props
  const { tag } = segment
  const live = bake.phase !== 'over'
  return (
    <>
      <PageHead
        title={`Bake of ${tag}`}
        crumbs={
          <>
            <Link to="/bakes" className="link">
              Bakes
            </Link>
            {' / '}
            <Link to={`/segments/${tag}`} className="link">
              {tag}
            </Link>
          </>
        }
        actions={plan !== null && <ButtonLink to={`/bakes/plans/${plan.planId}`}>Its plan</ButtonLink>}
      >
        {live ? <StateMark state={segment.state} /> : <span>Over</span>}{' '}
        <span>
          · heating from <Instant at={bake.heatingFrom} />
          {bake.coolingFrom !== null && (
            <>
              {' '}
              to <Instant at={bake.coolingFrom} />
            </>
          )}
        </span>
        {props.day !== null && (
          <strong className="block font-semibold text-ink">
            Soak, day {props.day.day} of {props.day.of}
          </strong>
        )}
      </PageHead>
      {live && (
        <Notice tone="heat" lead="This segment is hot. ">
          Nobody is protected by this page: it shows what thermocouples said some minutes ago, at a few points
          only. Measure with a contact probe before anyone touches the tube, keep to the permit, to local
          rules and to what licensed persons say.
        </Notice>
      )}
      {advice.map(({ text, level, kind }) => (
        <Notice
          key={`${kind} ${text}`}
          tone={level === 'look' ? 'warn' : 'bad'}
          lead={
            level === 'abort' ? 'Advised: break off. ' : level === 'hold' ? 'Advised: hold. ' : 'Look here: '
          }
        >
          {text}
        </Notice>
      ))}
      <div className="grid items-start gap-x-4.5 xl:grid-cols-[minmax(0,1fr)_20.5rem]">
        <div className="min-w-0">
          {live && (
            <Panel title="Along the tube now">
              <Skyline
                points={points}
                startM={segment.startM}
                endM={segment.endM}
                band={
                  props.setpointC === null
                    ? null
                    : { setpointC: props.setpointC, toleranceC: terms?.toleranceC ?? null }
                }
                levels={
                  bake.phase === 'cooling' && terms?.touchC != null
                    ? [{ celsius: terms.touchC, label: 'free access, by contact probe' }]
                    : []
                }
              />
            </Panel>
          )}
          <Panel title="Course of the bake">
            <Triptych
              gauge={props.gauge}
              supply={plan?.content.supply ?? null}
              moments={props.series.steps.map((step, index) => {
                const power = props.series.supply[index]
                return {
                  at: step.at,
                  minC: step.minC,
                  medianC: step.medianC,
                  maxC: step.maxC,
                  setpointC: props.setpoints[index] ?? null,
                  pressurePa: step.pressurePa,
                  powerKW:
                    power === undefined || power.volts === null || power.amps === null
                      ? null
                      : (power.volts * power.amps) / 1000,
                }
              })}
            />
          </Panel>
          <Panel title="Deviations">
            <DataTable
              caption="Where this bake left its plan or its limits, oldest first"
              columns={DEVIATION_COLUMNS}
              rows={props.deviations}
              rowKey={({ id }) => id}
              empty="None noted so far."
            />
            <p className="mt-1 text-sm text-ink-2">
              Ebbline notes what the readings show, ten minutes after it began; people note what they saw.
            </p>
            {may.note && <NoteForm {...props} />}
          </Panel>
          {props.afterwards !== null && <AfterwardsPanel {...props.afterwards} mayAccept={may.accept} />}
        </div>
        <div className="grid min-w-0 items-start gap-x-4.5 md:grid-cols-2 xl:grid-cols-1">
          <NowPanel {...props} />
          <Panel title="Bakes of this segment">
            <ul>
              {bakes.map(({ heatingFrom, phase, offReason }) => (
                <li key={heatingFrom.getTime()} className="border-b py-1.5 last:border-b-0">
                  <Link
                    to={`/bakes/runs/${tag}?since=${heatingFrom.getTime()}`}
                    aria-current={heatingFrom.getTime() === bake.heatingFrom.getTime() ? 'page' : undefined}
                    className="link"
                  >
                    <Instant at={heatingFrom} />
                  </Link>{' '}
                  <span className="text-sm text-ink-2">
                    {PHASE_WORDS[phase]}
                    {offReason !== '' && `: ${offReason}`}
                  </span>
                </li>
              ))}
            </ul>
          </Panel>
        </div>
      </div>
    </>
  )
}

function NowPanel(props: BakeRunPageProps) {
  const { bake, terms, spread, worst, rateKH, end, cooling, supplyNow, energy, feeder, plan } = props
  const live = bake.phase !== 'over'
  return (
    <Panel title={live ? 'As it stands' : 'What it took'}>
      <Facts
        items={[
          ...(terms === null
            ? []
            : [
                {
                  name: terms.fromSite ? 'Setpoint (limit of the site)' : 'Setpoint (plan)',
                  value: `${terms.setpointC} °C for ${terms.soakHours.toFixed(0)} h`,
                },
              ]),
          ...(live && props.setpointC !== null && bake.phase === 'heating'
            ? [{ name: 'Setpoint by now', value: `${props.setpointC.toFixed(0)} °C` }]
            : []),
          ...(live && spread !== null
            ? [
                { name: 'Median', value: `${spread.medianC.toFixed(0)} °C` },
                {
                  name: 'Spread',
                  value: `${spread.celsius.toFixed(0)} °C${terms?.spreadC == null ? '' : ` of ${terms.spreadC} °C`}`,
                },
                { name: 'Thermocouples counted', value: `${spread.counted} of ${spread.of}` },
              ]
            : []),
          ...(bake.phase === 'cooling'
            ? []
            : worst.map(({ tag, celsius, offC }, index) => ({
                name: index === 0 ? 'Farthest from the setpoint' : 'Next farthest',
                value: `${tag} ${celsius.toFixed(0)} °C (${offC > 0 ? '+' : '−'}${Math.abs(offC).toFixed(0)})`,
              }))),
          ...(live
            ? [
                {
                  name: 'Rate, last half hour',
                  value:
                    rateKH === null
                      ? 'not known'
                      : `${rateKH < 0 ? '−' : ''}${Math.abs(rateKH).toFixed(1)} °C/h`,
                },
                { name: `Pressure at ${props.gauge}`, value: <Pressure pa={props.pressurePa} /> },
              ]
            : []),
          ...(supplyNow === null
            ? []
            : [
                {
                  name: supplyNow.tag,
                  value: (
                    <>
                      {supplyNow.amps === null ? '–' : supplyNow.amps.toFixed(0)} A,{' '}
                      {supplyNow.volts === null ? '–' : supplyNow.volts.toFixed(1)} V
                      {supplyNow.at !== null && (
                        <span className="block text-sm font-normal text-ink-3">
                          <Instant at={supplyNow.at} age />
                        </span>
                      )}
                    </>
                  ),
                },
              ]),
          ...(energy === null
            ? []
            : [
                {
                  name: 'Energy, volts × amps',
                  value: `${(energy.kWh / 1000).toFixed(2)} MWh${energy.missingHours > 0.5 ? `, ${energy.missingHours.toFixed(0)} h unknown` : ''}`,
                },
              ]),
          ...(feeder === null || feeder.kWh === null
            ? []
            : [
                {
                  name: `Meter ${feeder.tag}, all it feeds`,
                  value: `${(feeder.kWh / 1000).toFixed(2)} MWh`,
                },
              ]),
        ]}
      />
      {end !== null && (
        <p className="mt-2 border-t pt-2">
          <span className="text-ink-2">
            {bake.phase === 'heating' ? 'At its setpoint' : 'End of the soak'}:{' '}
          </span>
          {end.kind === 'at' ? (
            <strong className="font-semibold">
              <Instant at={new Date(end.at)} />
            </strong>
          ) : (
            <strong className="font-semibold">cannot be told</strong>
          )}
          <span className="block text-sm text-ink-2">{end.because}</span>
          {bake.phase === 'soak' && plan !== null && (
            <span className="block text-sm text-ink-2">
              It ends by the curve as well as by the clock: pressure falling less than{' '}
              {plan.content.soakEnd.fallPercent} % in 12 h
              {plan.content.soakEnd.waterBehind && ' and water no longer ahead of hydrogen'}.
            </span>
          )}
        </p>
      )}
      {cooling !== null && (
        <div className="mt-2 border-t pt-2">
          {cooling.hottest === null ? (
            <p>No thermocouple says how hot the tube is.</p>
          ) : (
            <p>
              <span className="text-ink-2">Hottest measured: </span>
              <strong className="font-semibold">
                {cooling.hottest.tag} {cooling.hottest.celsius.toFixed(0)} °C
              </strong>{' '}
              at {cooling.hottest.chainageM.toFixed(0)} m,{' '}
              {Math.max(0, Math.round(cooling.hottest.ageMinutes))} min ago.
            </p>
          )}
          <p className="text-sm text-ink-2">
            {cooling.below
              ? 'At or below the limit for free access where thermocouples sit. Flanges and supports stay hot longer: only a contact probe tells.'
              : cooling.touchSafeAt === null
                ? 'When it will be cool enough cannot be told.'
                : 'Forecast of the limit for free access at this point, if it cools as an insulated tube does: '}
            {!cooling.below && cooling.touchSafeAt !== null && (
              <>
                <Instant at={new Date(cooling.touchSafeAt)} />. A forecast is no permission.
              </>
            )}
          </p>
        </div>
      )}
      {terms === null && (
        <p className="mt-2 text-sm text-ink-2">
          Neither a plan nor the limits of the site say how hot and how long this bake was meant to be.
        </p>
      )}
    </Panel>
  )
}

function NoteForm({ segment, bake, now, zone, failure }: BakeRunPageProps) {
  const sending = useNavigation().formMethod === 'POST'
  const own = failure?.intent === 'note' ? failure : undefined
  return (
    <details className="mt-3 border-t pt-2 print:hidden" open={own !== undefined}>
      <summary className="cursor-pointer py-1 font-medium">Note a deviation</summary>
      <Form method="post" className="mt-2 max-w-2xl">
        <FormFailure failure={own} />
        <input type="hidden" name="intent" value="note" />
        <SelectField
          name="kind"
          label="About"
          defaultValue={own?.typed?.kind ?? ''}
          options={[
            { value: '', label: 'Choose' },
            ...DEVIATION_KINDS.map((kind) => ({ value: kind, label: DEVIATION_KIND_LABELS[kind] })),
          ]}
          errors={own?.fields.kind}
        />
        <div className="grid gap-x-4 sm:grid-cols-2">
          <SiteTimeField
            name="startsAt"
            label="From"
            at={now}
            typed={own?.typed?.startsAt}
            zone={zone}
            errors={own?.fields.startsAt}
          />
          <TextField
            name="endsAt"
            label="Until"
            hint="Year first, as on the left; empty while it lasts."
            defaultValue={own?.typed?.endsAt}
            autoComplete="off"
            errors={own?.fields.endsAt}
          />
        </div>
        <TextAreaField
          name="detail"
          label="What was seen"
          rows={3}
          required
          minLength={5}
          maxLength={1000}
          defaultValue={own?.typed?.detail}
          errors={own?.fields.detail}
        />
        <input type="hidden" name="since" value={bake.heatingFrom.getTime()} />
        <Button kind="primary" disabled={sending}>
          {sending ? 'Noting' : `Note it for ${segment.tag}`}
        </Button>
      </Form>
    </details>
  )
}
