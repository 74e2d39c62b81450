/** The schedule of bakes: the picture, what breaks, and the forms that make, move and choose. */
import { useEffect, useState } from 'react'
import { Form, Link, useNavigation, useRevalidator } from 'react-router'
import { SCHEDULE_OBJECTIVES, type ScheduleState } from '#app/domain/planning.ts'
import { missingCaps } from '#app/domain/schedule/caps.ts'
import { OBJECTIVE_FACTS } from '#app/domain/schedule/objectives.ts'
import type { Placement, ScheduleJob } from '#app/domain/schedule/problem.ts'
import { type Violation, violations } from '#app/domain/schedule/violations.ts'
import { whyNot } from '#app/domain/schedule/why-not.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { SchedulePageData, ShownSchedule } from '#app/services/schedule-of-bakes-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { SiteTimeField } from '../forms/site-time-field.tsx'
import { Button, ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { CheckField, SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { SchedulePicture } from './schedule-picture.tsx'

const HOUR_MS = 3_600_000
const STATE_WORDS: Record<ScheduleState, string> = {
  draft: 'draft',
  solving: 'places are being looked for',
  solved: 'proposed',
  failed: 'no proposal',
  current: 'current',
  replaced: 'replaced',
}

export function SchedulePage({
  shown,
  schedules,
  openPlans,
  mayPlan,
  failure,
}: SchedulePageData & { failure: ActionFailure | undefined }) {
  return (
    <>
      <PageHead
        title={shown === null ? 'Schedule of bakes' : `Schedule: ${shown.title}`}
        crumbs={
          <Link to="/bakes" className="link">
            Bakes
          </Link>
        }
        actions={
          shown !== null && (
            <>
              <ButtonLink to={`/bakes/schedule/${shown.id}/schedule.csv`} reloadDocument>
                CSV
              </ButtonLink>
              <ButtonLink to={`/bakes/schedule/${shown.id}/schedule.ics`} reloadDocument>
                Calendar
              </ButtonLink>
            </>
          )
        }
      >
        {shown === null ? 'No schedule yet' : `${STATE_WORDS[shown.state]}, made by ${shown.madeBy}`}
      </PageHead>
      <FormFailure failure={failure} />
      {shown !== null && (
        // What a person moved on the screen is forgotten when another state of the schedule arrives.
        <Shown key={`${shown.id}-${shown.revision}`} shown={shown} mayPlan={mayPlan} failure={failure} />
      )}
      {schedules.length > 1 && (
        <Panel title="Other schedules">
          <ul className="flex flex-wrap gap-x-4 gap-y-1">
            {schedules.map(({ id, title, state }) => (
              <li key={id}>
                <a className="link" href={`/bakes/schedule?id=${id}`}>
                  {title}
                </a>{' '}
                ({STATE_WORDS[state]})
              </li>
            ))}
          </ul>
        </Panel>
      )}
      {/* A schedule that has just been made leaves the form empty for the next. */}
      {mayPlan && <NewSchedule key={shown?.id} plans={openPlans} failure={failure} />}
    </>
  )
}

function Shown({
  shown,
  mayPlan,
  failure,
}: {
  shown: ShownSchedule
  mayPlan: boolean
  failure: ActionFailure | undefined
}) {
  const { problem } = shown
  const [placements, setPlacements] = useState<readonly Placement[]>(shown.placements)
  const [chosen, setChosen] = useState<string | null>(
    () =>
      failure?.typed?.planId ?? shown.placements.find((one) => isMovable(shown, one.jobId))?.jobId ?? null,
  )
  const sending = useNavigation().formMethod === 'POST'
  useProgress(shown.state === 'solving')
  const found = violations(problem, placements)
  const broken = new Set(found.filter(({ severity }) => severity === 'breaks').flatMap(({ jobs }) => jobs))
  const move = (jobId: string, startH: number): void =>
    setPlacements((before) => before.map((one) => (one.jobId === jobId ? { ...one, startH } : one)))
  const one = placements.find(({ jobId }) => jobId === chosen)
  return (
    <>
      <Outcome shown={shown} />
      {mayPlan && (
        <div className="mb-4 flex flex-wrap gap-2 print:hidden">
          {shown.state !== 'current' && (
            <Act act="propose" shown={shown} disabled={sending || shown.state === 'solving'} kind="primary">
              Propose places
            </Act>
          )}
          {shown.state !== 'current' && shown.state !== 'solving' && (
            <Act act="make-current" shown={shown} disabled={sending}>
              Make current
            </Act>
          )}
        </div>
      )}
      <Panel title="Bakes by day">
        <SchedulePicture
          problem={problem}
          placements={placements}
          actual={shown.actual}
          broken={broken}
          chosen={chosen}
          onChoose={setChosen}
          onMove={mayPlan ? move : null}
        />
        <p className="mt-2 text-sm text-ink-2">
          Light: preparation and test. Dark: ramp. Then soak, then cooling. A thin bar beneath: what was.
          Power with {problem.rules.baseKW} kW base load
          {missingCaps(problem.rules).length === 0 && '; the line is the cap'}.
          {mayPlan &&
            ' Drag a bake, or move it with the arrow keys (with Shift by a day); nothing is kept until “Keep this place”. A pinned bake stays where it is until it is unpinned there.'}
        </p>
      </Panel>
      <Findings
        found={found}
        unplaced={placements.flatMap(({ jobId, startH }) =>
          startH === null ? [problem.jobs.find(({ id }) => id === jobId)?.label ?? jobId] : [],
        )}
      />
      {mayPlan && one !== undefined && isMovable(shown, one.jobId) && (
        <MovePanel shown={shown} placements={placements} one={one} onChoose={setChosen} failure={failure} />
      )}
      <PlacesTable shown={shown} placements={placements} mayPlan={mayPlan} />
    </>
  )
}

function isMovable(shown: ShownSchedule, jobId: string): boolean {
  return shown.problem.jobs.some(({ id, underWay }) => id === jobId && !underWay)
}

/** Looks again every two seconds while the worker is at it. */
function useProgress(busy: boolean): void {
  const { revalidate, state } = useRevalidator()
  useEffect(() => {
    if (!busy || state !== 'idle') return
    const timer = setTimeout(() => void revalidate(), 2_000)
    return () => clearTimeout(timer)
  })
}

function Act({
  act,
  shown,
  children,
  ...button
}: {
  act: string
  shown: ShownSchedule
  disabled: boolean
  kind?: 'primary'
  children: React.ReactNode
}) {
  return (
    <Form method="post">
      <input type="hidden" name="act" value={act} />
      <input type="hidden" name="scheduleId" value={shown.id} />
      <input type="hidden" name="revision" value={shown.revision} />
      <Button {...button}>{children}</Button>
    </Form>
  )
}

function Outcome({ shown }: { shown: ShownSchedule }) {
  const { outcome, objective, state, fault, progress } = shown
  const { label, unit, says } = OBJECTIVE_FACTS[objective]
  if (state === 'solving')
    return <Notice announce="status">Places are being looked for: {Math.round(progress * 100)} %.</Notice>
  const lacking = missingCaps(shown.problem.rules)
  // A search that failed for want of them says the same.
  if (lacking.length > 0) return <Notice tone="bad">{lacking.join(' ')}</Notice>
  if (fault !== null) return <Notice tone="bad">{fault}</Notice>
  if (outcome === null || outcome.value === null) return null
  return (
    <p className="mb-4">
      {label}:{' '}
      <strong>
        {outcome.value.toFixed(0)} {unit}
      </strong>{' '}
      ({says}). No schedule can be below {outcome.bound.toFixed(0)} {unit}, from {outcome.boundWhy}: at most{' '}
      {(outcome.gap * 100).toFixed(1)} % are left to gain. {outcome.built} schedules were compared.
    </p>
  )
}

const SEVERITY = { breaks: 'Breaks', missing: 'To be done before', note: 'To be known' } as const

function Findings({ found, unplaced }: { found: readonly Violation[]; unplaced: readonly string[] }) {
  return (
    <Panel title="What breaks, what is missing">
      <div aria-live="polite">
        {unplaced.length > 0 && (
          <p className="mb-2">
            Without a place, and so not judged: <strong>{unplaced.join(', ')}</strong>. Propose places, or
            give one under “Move a bake”.
          </p>
        )}
        {found.length === 0 && unplaced.length === 0 && <p>Nothing breaks and nothing is missing.</p>}
        {(['breaks', 'missing', 'note'] as const).map((severity) => {
          const own = found.filter((one) => one.severity === severity)
          if (own.length === 0) return null
          return (
            <div key={severity} className="mb-2">
              <h3 className="font-semibold">
                {SEVERITY[severity]} ({own.length})
              </h3>
              {severity === 'missing' && (
                <p className="text-sm text-ink-2">
                  Judged by each plan as it stands, its own start included; put a place into the plan to have
                  it judged there.
                </p>
              )}
              <ul className="list-disc pl-5">
                {own.map(({ text, fromH }) => (
                  <li key={`${fromH}-${text}`}>{text}</li>
                ))}
              </ul>
            </div>
          )
        })}
      </div>
    </Panel>
  )
}

/** What the answer to "why not" takes for the set and the cart: the plan's own where it names them. */
function equipmentWords(job: ScheduleJob | undefined): string {
  const supply = job?.supply ?? null
  const cart = job?.cart ?? null
  if (supply === null && cart === null) return 'any free set and cart'
  return `${supply ?? 'any free set'} and ${cart ?? 'any free cart'}, as its plan asks`
}

function MovePanel({
  shown,
  placements,
  one,
  onChoose,
  failure,
}: {
  shown: ShownSchedule
  placements: readonly Placement[]
  one: Placement
  onChoose: (jobId: string) => void
  failure: ActionFailure | undefined
}) {
  const { zone } = useSite()
  const { problem } = shown
  const typed =
    failure?.typed?.act === 'move' && failure.typed.planId === one.jobId ? failure.typed : undefined
  const fields = typed === undefined ? {} : (failure?.fields ?? {})
  const answer = one.startH === null ? null : whyNot(problem, placements, one.jobId, one.startH).sentence
  const job = problem.jobs.find(({ id }) => id === one.jobId)
  const startsAt = new Date(problem.fromMs + (one.startH ?? 0) * HOUR_MS)
  const options = (tags: readonly string[]) => [
    { value: '', label: 'none yet' },
    ...tags.map((value) => ({ value, label: value })),
  ]
  return (
    <Panel title="Move a bake" className="print:hidden">
      <p aria-live="polite" className="mb-3">
        {answer === null
          ? 'It has no place yet; the form gives it one.'
          : `With ${equipmentWords(job)}: ${answer}`}
      </p>
      <Form key={`${one.jobId}-${one.startH}`} method="post" className="max-w-md">
        <input type="hidden" name="act" value="move" />
        <input type="hidden" name="scheduleId" value={shown.id} />
        <input type="hidden" name="revision" value={shown.revision} />
        <SelectField
          name="planId"
          label="Bake"
          value={one.jobId}
          onChange={(event) => onChoose(event.target.value)}
          options={problem.jobs
            .filter(({ underWay }) => !underWay)
            .map(({ id, label }) => ({ value: id, label }))}
        />
        <SiteTimeField
          name="startsAt"
          label="Heating from"
          at={startsAt}
          typed={typed?.startsAt}
          zone={zone}
          errors={fields.startsAt}
        />
        <SelectField
          name="supply"
          label="Supply set"
          defaultValue={typed?.supply ?? one.supply ?? ''}
          options={options(problem.supplies.map(({ tag }) => tag))}
        />
        <SelectField
          name="cart"
          label="Cart"
          defaultValue={typed?.cart ?? one.cart ?? ''}
          options={options(problem.carts)}
        />
        <CheckField name="pinned" label="Pinned: a proposal leaves it there" defaultChecked={one.pinned} />
        <Button kind="primary">Keep this place</Button>
      </Form>
    </Panel>
  )
}

/** The form of a new version of a plan, with the place that the schedule gives it. */
function planAddress({ problem }: ShownSchedule, { jobId, startH, supply, cart }: Placement): string {
  const params = new URLSearchParams({ of: jobId })
  if (startH !== null) params.set('startsAt', new Date(problem.fromMs + startH * HOUR_MS).toISOString())
  if (supply !== null) params.set('supply', supply)
  if (cart !== null) params.set('cart', cart)
  return `/bakes/plans/new?${params}`
}

function PlacesTable({
  shown,
  placements,
  mayPlan,
}: {
  shown: ShownSchedule
  placements: readonly Placement[]
  mayPlan: boolean
}) {
  const { problem } = shown
  const jobOf = ({ jobId }: Placement) => problem.jobs.find(({ id }) => id === jobId)
  const at = (placement: Placement, hours: number) =>
    placement.startH === null ? (
      ''
    ) : (
      <Instant at={new Date(problem.fromMs + (placement.startH + hours) * HOUR_MS)} />
    )
  const columns: Column<Placement>[] = [
    {
      key: 'bake',
      head: 'Bake',
      rowHead: true,
      nowrap: true,
      cell: (one) => (
        <Link to={`/bakes/plans/${one.jobId}`} className="link">
          {jobOf(one)?.label ?? one.jobId}
        </Link>
      ),
    },
    {
      key: 'from',
      head: 'Heating from',
      cell: (one) =>
        one.startH === null ? (
          <span>no place. {shown.trouble.find(({ jobId }) => jobId === one.jobId)?.reasons.join(' ')}</span>
        ) : (
          at(one, 0)
        ),
    },
    { key: 'soak', head: 'Soak ends', cell: (one) => at(one, jobOf(one)?.soakEndH ?? 0) },
    { key: 'over', head: 'Test over', cell: (one) => at(one, jobOf(one)?.endH ?? 0) },
    {
      key: 'peak',
      head: 'Peak',
      align: 'right',
      cell: (one) => `${Math.max(0, ...(jobOf(one)?.powerKW ?? [])).toFixed(0)} kW`,
    },
    { key: 'supply', head: 'Supply set', cell: ({ supply }) => supply ?? 'none yet' },
    { key: 'cart', head: 'Cart', cell: ({ cart }) => cart ?? 'none yet' },
    {
      key: 'state',
      head: 'State',
      cell: (one) => (jobOf(one)?.underWay === true ? 'under way' : one.pinned ? 'pinned' : 'planned'),
    },
  ]
  if (mayPlan) {
    columns.push({
      key: 'plan',
      head: 'Plan',
      nowrap: true,
      cell: (one) =>
        jobOf(one)?.underWay === false &&
        one.startH !== null && (
          <Link to={planAddress(shown, one)} className="link">
            Put into the plan <span className="sr-only">of {jobOf(one)?.label}</span>
          </Link>
        ),
    })
  }
  return (
    <Panel title="Places">
      <DataTable
        caption="Bakes and their places"
        columns={columns}
        rows={placements}
        rowKey={({ jobId }) => jobId}
        empty="No bake in this schedule."
      />
    </Panel>
  )
}

function NewSchedule({
  plans,
  failure,
}: {
  plans: SchedulePageData['openPlans']
  failure: ActionFailure | undefined
}) {
  const { now, zone } = useSite()
  const typed = failure?.typed?.act === 'create' ? failure.typed : undefined
  const fields = typed === undefined ? {} : (failure?.fields ?? {})
  return (
    <Panel title="New schedule" className="print:hidden">
      <Form method="post" className="max-w-md">
        <input type="hidden" name="act" value="create" />
        <TextField name="title" label="Name" defaultValue={typed?.title} required errors={fields.title} />
        <SiteTimeField
          name="fromAt"
          label="Window from"
          at={now}
          typed={typed?.fromAt}
          zone={zone}
          errors={fields.fromAt}
        />
        <TextField
          name="days"
          label="Days"
          type="number"
          min={1}
          max={200}
          defaultValue={typed?.days ?? '42'}
          errors={fields.days}
        />
        <SelectField
          name="objective"
          label="Made for"
          defaultValue={typed?.objective}
          options={SCHEDULE_OBJECTIVES.map((value) => ({ value, label: OBJECTIVE_FACTS[value].label }))}
        />
        <fieldset>
          <legend className="font-medium">Plans</legend>
          {plans.length === 0 && (
            <p>
              No plan is open.{' '}
              <Link to="/bakes/plans/new" className="link">
                Make one first
              </Link>
              .
            </p>
          )}
          {plans.map(({ id, title, segments }) => (
            <CheckField
              key={id}
              name={`plan-${id}`}
              label={`${title} (${segments})`}
              defaultChecked={typed === undefined || `plan-${id}` in typed}
              errors={undefined}
            />
          ))}
          {fields.plans !== undefined && <p className="text-bad">{fields.plans.join(' ')}</p>}
        </fieldset>
        <Button kind="primary">Make a schedule</Button>
      </Form>
    </Panel>
  )
}
