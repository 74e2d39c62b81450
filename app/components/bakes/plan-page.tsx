/** A bake plan: its steps, curves and limits, what is missing before it may be signed, and how it came to be as it is. */
import { Link } from 'react-router'
import { BAKE_PLAN_STATE_LABELS, PLAN_PRIORITY_LABELS, PLAN_STEP_LABELS } from '#app/domain/bake-plan.ts'
import type { PlanPageData } from '#app/services/bake-plans-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { PermitsPanel } from '../permits/permits-panel.tsx'
import { ButtonLink } from '../ui/button.tsx'
import { DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { Pressure } from '../ui/pressure.tsx'
import { MoveOnPanel, PriorityPanel, SignPanel, WithdrawPanel } from './plan-acts.tsx'
import { PlanChecklist } from './plan-checklist.tsx'
import { PlanCurves } from './plan-curves.tsx'
import { PlanTable } from './plan-table.tsx'

type PageProps = PlanPageData & { failure: ActionFailure | undefined }

export function PlanPage(props: PageProps) {
  const { id, title, state, content, may, failure, permitChain } = props
  const blocking = props.checklist.filter((item) => item.blocking && !item.met).length
  return (
    <>
      <PageHead
        title={title}
        crumbs={
          <Link to="/bakes" className="link">
            Bakes
          </Link>
        }
        actions={
          <>
            {may.plan && <ButtonLink to={`/bakes/plans/new?of=${id}`}>New version</ButtonLink>}
            <ButtonLink to="/bakes/schedule">Schedule</ButtonLink>
            <ButtonLink to={`/bakes/plans/${id}/plan.csv`} reloadDocument>
              CSV
            </ButtonLink>
            {content.startsAt !== null && (
              <ButtonLink to={`/bakes/plans/${id}/plan.ics`} reloadDocument>
                Calendar
              </ButtonLink>
            )}
          </>
        }
      >
        <Standing {...props} />
      </PageHead>
      <FormFailure failure={failure} />
      {blocking > 0 && (
        <Notice tone="warn" lead={`${blocking} ${blocking === 1 ? 'step is' : 'steps are'} missing. `}>
          Until they are done this plan stays a draft and no permit can be asked for: see the checklist.
        </Notice>
      )}
      {permitChain !== null && <Notice tone="warn">{permitChain}</Notice>}
      {props.excess.map(({ segment, times }) => (
        <Notice key={segment} tone="warn">
          {segment} now reads {times.toFixed(1)} times what the register's hydrogen gives. The prediction
          takes all of what it read when this version was saved for hydrogen, as the{' '}
          <Link to={`/bakes/options?segments=${content.segments.join(',')}`} className="link">
            options
          </Link>{' '}
          do. A leak would not yield to the bake: find out which it is first.
        </Notice>
      ))}
      <Panel title="Course of the bake">
        <PlanCurves content={content} prediction={props.prediction} />
        <PlanTable prediction={props.prediction} />
        <p className="mt-3 text-sm text-ink-3">
          Pressures by full simulation of gas and wall from the register’s steel, water and pumps as they
          stood when this version was saved; after the change of pumps the same outgassing is put on the pump
          at the cross. Diffusion in steel is known to a factor of about two, and so are these pressures.
        </p>
      </Panel>
      <div className="grid gap-x-4.5 lg:grid-cols-2">
        <StepsPanel {...props} />
        <LimitsPanel {...props} />
      </div>
      {props.checklist.length > 0 && (
        <Panel title="Before it may be signed">
          <PlanChecklist planId={id} items={props.checklist} mayTick={may.tick} mayPlan={may.plan} />
        </Panel>
      )}
      <div className="grid gap-x-4.5 lg:grid-cols-2 print:hidden">
        {may.plan && state === 'draft' && <SignPanel {...props} blocking={blocking} />}
        {may.moveOn && <MoveOnPanel {...props} />}
        {may.prioritise && <PriorityPanel {...props} />}
        {may.plan && <WithdrawPanel {...props} />}
      </div>
      <PermitsPanel
        permits={props.drawnUp}
        empty="No permit has been drawn up from this plan yet."
        all={null}
        ask={may.draftPermit ? `/permits/new?plan=${id}` : null}
      />
      <VersionsPanel {...props} />
    </>
  )
}

function Standing({
  state,
  version,
  baselineVersion,
  priority,
  readyBy,
  readyAt,
  closedAt,
  closeReason,
  createdBy,
  createdAt,
}: PageProps) {
  return (
    <>
      <strong className="font-semibold text-ink">{BAKE_PLAN_STATE_LABELS[state]}</strong> · version {version}
      {baselineVersion !== null && ` (baseline: version ${baselineVersion})`} · priority{' '}
      {PLAN_PRIORITY_LABELS[priority].toLowerCase()}
      <span className="block text-sm">
        Planned by {createdBy}, <Instant at={createdAt} />
        {readyAt !== null && (
          <>
            {' · signed as ready by '}
            {readyBy ?? 'somebody'}, <Instant at={readyAt} />
          </>
        )}
        {closedAt !== null && (
          <>
            {' · closed '}
            <Instant at={closedAt} />
            {closeReason !== '' && `: ${closeReason}`}
          </>
        )}
      </span>
    </>
  )
}

function StepsPanel({ prediction, content, permits }: PageProps) {
  const start = content.startsAt === null ? null : Date.parse(content.startsAt)
  const when = (hours: number) =>
    start === null ? `hour ${Math.round(hours)}` : <Instant at={new Date(start + hours * 3_600_000)} />
  return (
    <Panel title="Steps">
      <DataTable
        caption="Steps of the plan"
        columns={[
          { key: 'step', head: 'Step', rowHead: true, cell: ({ kind }) => PLAN_STEP_LABELS[kind] },
          { key: 'from', head: 'From', cell: ({ fromH }) => when(fromH) },
          {
            key: 'length',
            head: 'Length',
            align: 'right',
            cell: ({ fromH, toH }) => `${(toH - fromH).toFixed(1)} h`,
          },
        ]}
        rows={prediction.steps}
        rowKey={({ kind }) => kind}
        empty="No steps."
      />
      {start === null && (
        <p className="mt-2 text-sm text-ink-2">
          Hours count from the start of heating, which has no date yet.
        </p>
      )}
      {prediction.holds.map(({ celsius, hours }) => (
        <p key={celsius} className="mt-2 text-warn">
          At {celsius.toFixed(0)} °C the pressure is expected to hold the ramp for {hours.toFixed(0)} h.
        </p>
      ))}
      {prediction.stuck && (
        <p className="mt-2 text-warn">
          The ramp is not expected to get past its hold limit. Ramp slower, or look for a leak first.
        </p>
      )}
      {permits.map(({ number, fromH, toH }) => (
        <p key={number} className="mt-2 text-sm text-ink-2">
          {permits.length === 1 ? 'One permit covers the hot time' : `Permit ${number} of ${permits.length}`}:{' '}
          {when(fromH)} to {when(toH)}.
        </p>
      ))}
      {content.remarks !== '' && <p className="mt-2 whitespace-pre-line">{content.remarks}</p>}
    </Panel>
  )
}

function LimitsPanel({ content, prediction, load }: PageProps) {
  const { soakEnd, cooling } = content
  return (
    <Panel title="Settings and limits">
      <Facts
        items={[
          {
            name: 'Segments',
            value: content.segments.map((tag, i) => (
              <span key={tag}>
                {i > 0 && ' + '}
                <Link to={`/segments/${tag}`} className="link">
                  {tag}
                </Link>
              </span>
            )),
          },
          { name: 'Ramp', value: `${content.upKH} °C/h to ${content.celsius} °C` },
          { name: 'Ramp waits above', value: <Pressure pa={content.holdPa} /> },
          { name: 'Ramp waits at a spread of', value: `${content.spreadK} °C` },
          {
            name: 'Heating off above',
            value: <Pressure pa={content.abortPa} reason="nobody has set one" />,
          },
          {
            name: 'Soak ends',
            value: `after ${content.soakHours} h and a fall below ${soakEnd.fallPercent} % in 12 h${soakEnd.waterBehind ? ', water below hydrogen' : ''}`,
          },
          {
            name: 'Cooling',
            value:
              cooling.kind === 'natural'
                ? 'by itself'
                : `held to ${cooling.downKH} °C/h where the tube can follow`,
          },
          { name: 'Change of pumps', value: `${content.pumpChangeC} °C` },
          { name: 'Cold', value: `below ${content.coldC} °C, measured` },
          {
            name: 'Supply set',
            value: `${content.supply ?? 'none yet'}, ${load.amps.toFixed(0)} A and ${load.volts.toFixed(1)} V at ramp end`,
          },
          { name: 'Pumping cart', value: content.cart ?? 'none yet' },
          { name: 'Target', value: <Pressure pa={content.targetPa} /> },
          ...prediction.segments.map(({ tag, afterPa }) => ({
            name: `${tag} expected after the bake`,
            value: <Pressure pa={afterPa} reason="the register lacks what the model needs" />,
          })),
          ...prediction.segments.map(({ tag, strokeMm, travelMm, ratedMm }) => ({
            name: `${tag}, stroke of a joint`,
            value: `${Math.max(...strokeMm).toFixed(1)} mm (travel ${travelMm} mm, rated ${ratedMm} mm)`,
          })),
        ]}
      />
    </Panel>
  )
}

function VersionsPanel({ versions, baselineVersion }: PageProps) {
  return (
    <Panel title="Versions">
      <ol className="space-y-3">
        {versions.map(({ version, madeBy, madeAt, reason, differences }) => (
          <li key={version}>
            <strong className="font-semibold">Version {version}</strong>
            {version === baselineVersion && ' (baseline)'}, {madeBy}, <Instant at={madeAt} />: {reason}
            {differences.length > 0 && (
              <ul className="ml-5 list-disc text-ink-2">
                {differences.map((difference) => (
                  <li key={difference}>{difference}</li>
                ))}
              </ul>
            )}
          </li>
        ))}
      </ol>
    </Panel>
  )
}
