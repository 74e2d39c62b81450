/** Bakes: what is hot now, what is planned, and the ways on to options, plans and schedule. */
import { Link } from 'react-router'
import { BAKE_PLAN_STATE_LABELS, PLAN_PRIORITY_LABELS } from '#app/domain/bake-plan.ts'
import type { BakePlanState } from '#app/domain/planning.ts'
import type { BakesPageData } from '#app/services/bake-plans-page.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { StateMark } from '../ui/state-mark.tsx'

type Line = BakesPageData['plans'][number]
type Running = BakesPageData['running'][number]

const RUNNING: readonly Column<Running>[] = [
  {
    key: 'segment',
    head: 'Segment',
    rowHead: true,
    cell: ({ tag }) => (
      <Link to={`/segments/${tag}`} className="link">
        {tag}
      </Link>
    ),
  },
  { key: 'state', head: 'State', nowrap: true, cell: ({ state }) => <StateMark state={state} /> },
  {
    key: 'since',
    head: 'Since',
    cell: ({ since }) => (since === null ? 'not recorded' : <Instant at={since} age />),
  },
  { key: 'reason', head: 'What was done', cell: ({ reason }) => reason },
  {
    key: 'run',
    head: 'As it runs',
    cell: ({ tag }) => (
      <Link to={`/bakes/runs/${tag}`} className="link">
        Bake of {tag}
      </Link>
    ),
  },
]

const PLANS: readonly Column<Line>[] = [
  {
    key: 'plan',
    head: 'Plan',
    rowHead: true,
    cell: ({ id, title }) => (
      <Link to={`/bakes/plans/${id}`} className="link">
        {title}
      </Link>
    ),
  },
  { key: 'segments', head: 'Segments', nowrap: true, cell: ({ segments }) => segments.join(' + ') },
  {
    key: 'start',
    head: 'Heating from',
    cell: ({ startsAt }) => (startsAt === null ? 'no date yet' : <Instant at={startsAt} />),
  },
  { key: 'celsius', head: 'Bake', align: 'right', cell: ({ celsius }) => `${celsius} °C` },
  { key: 'soak', head: 'Soak', align: 'right', cell: ({ soakHours }) => `${soakHours} h` },
  {
    key: 'hot',
    head: 'Hot for',
    align: 'right',
    cell: ({ hotHours }) => `${(hotHours / 24).toFixed(1)} days`,
  },
  { key: 'peak', head: 'Peak', align: 'right', cell: ({ peakKW }) => `${peakKW.toFixed(0)} kW` },
  {
    key: 'energy',
    head: 'Energy',
    align: 'right',
    cell: ({ energyKWh }) => `${(energyKWh / 1000).toFixed(1)} MWh`,
  },
  {
    key: 'priority',
    head: 'Priority',
    cell: ({ priority }) => PLAN_PRIORITY_LABELS[priority],
  },
  { key: 'by', head: 'Planned by', cell: ({ createdBy }) => createdBy },
]

/** What comes first is what somebody has to do something about. */
const ORDER: readonly BakePlanState[] = ['under-way', 'draft', 'ready', 'done', 'withdrawn']

function isOpen(state: BakePlanState): boolean {
  return state === 'draft' || state === 'ready'
}

export function BakesPage({ running, plans, mayPlan }: BakesPageData) {
  return (
    <>
      <PageHead
        title="Bakes"
        actions={
          <>
            {mayPlan && (
              <ButtonLink to="/bakes/plans/new" kind="primary">
                New plan
              </ButtonLink>
            )}
            <ButtonLink to="/bakes/options">Options for a bake</ButtonLink>
            <ButtonLink to="/bakes/schedule">Schedule</ButtonLink>
          </>
        }
      >
        {plans.length} {plans.length === 1 ? 'plan' : 'plans'} on record
      </PageHead>
      <Panel title="Hot now">
        <DataTable
          caption="Segments that are heated or cooling"
          columns={RUNNING}
          rows={running}
          rowKey={({ tag }) => tag}
          empty="No segment is recorded as heated or cooling."
        />
      </Panel>
      {ORDER.map((state) => {
        const rows = plans.filter((plan) => plan.state === state)
        if (rows.length === 0 && state !== 'draft') return null
        return (
          <Panel key={state} title={`${BAKE_PLAN_STATE_LABELS[state]} (${rows.length})`}>
            <DataTable
              caption={`Plans: ${BAKE_PLAN_STATE_LABELS[state].toLowerCase()}`}
              columns={isOpen(state) ? PLANS : PLANS.filter(({ key }) => key !== 'priority')}
              rows={rows}
              rowKey={({ id }) => id}
              empty="No draft. Begin with the options for a segment, or with a new plan."
            />
          </Panel>
        )
      })}
    </>
  )
}
