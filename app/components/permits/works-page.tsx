/** Work by others in the tunnel: the list. */
import { Link } from 'react-router'
import { stretchText } from '#app/domain/permit-conflicts/words.ts'
import { PLANNED_WORK_LABELS } from '#app/domain/permit-words.ts'
import { PLANNED_WORK_STATE_LABELS, standsInTheWay } from '#app/domain/planned-work.ts'
import type { WorkInList } from '#app/services/planned-work-page.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'

export function WorksCrumbs({ here = true }: { here?: boolean }) {
  return (
    <>
      <Link to="/permits" className="link">
        Permits
      </Link>
      {here && (
        <>
          {' / '}
          <Link to="/permits/works" className="link">
            Works
          </Link>
        </>
      )}
    </>
  )
}

/** Tag and stretch, the line where no segment is named, or that there is no place. */
function WorkPlace({ segmentTag, stretch }: Pick<WorkInList, 'segmentTag' | 'stretch'>) {
  if (stretch === null) return <>the site as a whole</>
  return (
    <>
      {segmentTag ?? stretch.line}, <span className="whitespace-nowrap">{stretchText(stretch)}</span>
    </>
  )
}

const NEAR: Column<WorkInList> = {
  key: 'near',
  head: 'Meets',
  cell: ({ clashes, stopped }) => {
    const against = [...new Set(clashes.map(({ permit }) => permit ?? 'hot segment'))].map((who) => {
      const rules = clashes.filter(({ permit }) => (permit ?? 'hot segment') === who).map(({ rule }) => rule)
      return `${who}: ${[...new Set(rules)].join(', ')}`
    })
    if (against.length === 0)
      return stopped ? <strong className="text-bad">closed bay</strong> : 'no permit or heat found'
    const waits = clashes.some((clash) => standsInTheWay(clash))
    return (
      <>
        <strong className={waits ? 'font-semibold text-bad' : 'font-medium'}>
          {waits ? 'cannot begin' : 'to be known'}
        </strong>
        {against.map((each) => (
          <span key={each} className="block text-sm whitespace-nowrap text-ink-2">
            {each}
          </span>
        ))}
      </>
    )
  },
}

const WHAT: Column<WorkInList> = {
  key: 'title',
  head: 'Work',
  cell: ({ id, title, kind }) => (
    <>
      <Link to={`/permits/works/${id}`} className="link font-semibold">
        {title}
      </Link>
      <span className="block text-sm text-ink-2">{PLANNED_WORK_LABELS[kind]}</span>
    </>
  ),
}

const COLUMNS: readonly Column<WorkInList>[] = [
  { key: 'place', head: 'Where', cell: (work) => <WorkPlace {...work} /> },
  {
    key: 'when',
    head: 'When',
    cell: ({ startsAt, endsAt }) => (
      <>
        <Instant at={startsAt} /> to <Instant at={endsAt} />
      </>
    ),
  },
  { key: 'state', head: 'State', nowrap: true, cell: ({ state }) => PLANNED_WORK_STATE_LABELS[state] },
]

const WHO: Column<WorkInList> = { key: 'people', head: 'Who', cell: ({ people }) => people }

export function WorksPage({
  ahead,
  over,
  mayPlan,
}: {
  ahead: readonly WorkInList[]
  over: readonly WorkInList[]
  mayPlan: boolean
}) {
  const stopped = ahead.filter((work) => work.stopped).length
  return (
    <>
      <PageHead
        title="Works in the tunnel"
        crumbs={<WorksCrumbs here={false} />}
        actions={
          <>
            <ButtonLink to="/people/competences">Competences</ButtonLink>
            {mayPlan && (
              <ButtonLink kind="primary" to="/permits/works/new">
                Plan work
              </ButtonLink>
            )}
          </>
        }
      >
        {ahead.length === 0 ? 'Nothing is planned' : `${ahead.length} planned or under way`}
        {stopped > 0 && `, ${stopped} of them cannot begin as things stand`}
      </PageHead>
      <Panel title="To come and under way">
        <DataTable
          caption="Works to come and under way, those near heat first"
          columns={[WHAT, NEAR, ...COLUMNS, WHO]}
          rows={ahead}
          rowKey={({ id }) => id}
          empty="No work is planned. What others do in the tunnel belongs here, so that permits can be held against it."
        />
      </Panel>
      <Panel title="Over">
        <DataTable
          caption="Works that are over, refused or called off"
          columns={[WHAT, ...COLUMNS, WHO]}
          rows={over}
          rowKey={({ id }) => id}
          empty="None yet."
        />
      </Panel>
    </>
  )
}
