/** One piece of work in the tunnel: what it would meet, what an officer leaves of it, and its beginning and end. */
import { Link } from 'react-router'
import { stretchText } from '#app/domain/permit-conflicts/words.ts'
import { PLANNED_WORK_LABELS } from '#app/domain/permit-words.ts'
import {
  OPEN_WORK,
  PLANNED_WORK_STATE_LABELS,
  standsInTheWay,
  type WorkClash,
} from '#app/domain/planned-work.ts'
import type { WorkPageData, WorkPlaces } from '#app/services/planned-work-page.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { Facts, PageHead, Panel } from '../ui/panel.tsx'
import { CONFLICT_RULE_LABELS } from './conflict-list.tsx'
import { type MarkedStretch, TubeConflicts } from './tube-conflicts.tsx'
import { BeginPanel, CallOffPanel, FinishPanel, RulePanels } from './work-acts.tsx'
import { WorkForm } from './work-form.tsx'
import { WorksCrumbs } from './works-page.tsx'

export interface WorkPageProps extends WorkPageData {
  /** Given where the reader may change it. */
  places: WorkPlaces | null
  failure: ActionFailure | undefined
}

export function WorkPage({ places, failure, ...data }: WorkPageProps) {
  const { work, clashes, closures, heated, may, own } = data
  const open = OPEN_WORK.includes(work.state)
  const against = clashes.filter(standsInTheWay)
  const of = (act: string) => (failure?.typed?.act === act ? failure : undefined)
  const known = ['change', 'limit', 'refuse', 'start', 'finish', 'call-off'].some(
    (act) => of(act) !== undefined,
  )
  return (
    <>
      <PageHead title={work.title} crumbs={<WorksCrumbs />}>
        {PLANNED_WORK_LABELS[work.kind]} · {PLANNED_WORK_STATE_LABELS[work.state].toLowerCase()} · work{' '}
        {work.id}
      </PageHead>
      {!known && <FormFailure failure={failure} />}
      {closures.map(({ id, line, fromM, toM, reason, closedAt }) => (
        <Notice key={id} tone="bad" lead="Closed. ">
          {line}, {stretchText({ fromM, toM })} has been closed since <Instant at={closedAt} />: {reason}{' '}
          <Link to="/permits/bays" className="link">
            Closed bays
          </Link>
        </Notice>
      ))}
      <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_23rem]">
        <div className="min-w-0">
          <Panel title="What it would meet">
            {heated.length > 0 && <TubeConflicts heated={heated} marked={marked(data)} />}
            <Clashes clashes={clashes} open={open || work.state === 'started'} />
          </Panel>
          {open && may.rule && (
            <RulePanels data={data} own={own} failures={{ limit: of('limit'), refuse: of('refuse') }} />
          )}
          {open && places !== null && (
            <Panel title="Change it" className="print:hidden">
              <details open={of('change') !== undefined}>
                <summary className="link inline-block cursor-pointer py-1.5">
                  Other times, another place, other people
                </summary>
                {work.state === 'limited' && (
                  <p className="my-2 text-ink-2">
                    The officer’s ruling was on the work as it stands. A change takes it away.
                  </p>
                )}
                <div className="pt-2">
                  <WorkForm key={work.revision} places={places} work={work} failure={of('change')} />
                </div>
              </details>
            </Panel>
          )}
        </div>
        <div className="min-w-0">
          <Panel title="The work">
            <Facts items={factsOf(data)} />
            {work.note !== '' && <p className="mt-2 whitespace-pre-line">{work.note}</p>}
          </Panel>
          {work.ruledByName !== null && work.ruledAt !== null && (
            <Panel title={work.state === 'refused' ? 'Refused' : 'The officer’s ruling'}>
              {data.left !== null && <p className="font-semibold">Only {stretchText(data.left)}</p>}
              {work.barrier !== '' && <p className="mt-1">Barrier: {work.barrier}</p>}
              <p className="mt-1 whitespace-pre-line">{work.ruling}</p>
              <p className="mt-1 text-sm text-ink-2">
                Signed by {work.ruledByName}, <Instant at={work.ruledAt} />
              </p>
            </Panel>
          )}
          {open && may.plan && (
            <BeginPanel
              revision={work.revision}
              against={against.length + closures.length}
              failure={of('start')}
            />
          )}
          {work.state === 'started' && may.plan && (
            <FinishPanel revision={work.revision} failure={of('finish')} />
          )}
          {open && may.plan && <CallOffPanel revision={work.revision} failure={of('call-off')} />}
        </div>
      </div>
    </>
  )
}

function marked({ asked, left, clashes }: WorkPageData): MarkedStretch[] {
  const meets = clashes.flatMap(({ permit, rule, effect, place }, index): MarkedStretch[] =>
    place === null
      ? []
      : [{ key: String(index), label: `${rule} ${permit ?? 'hot segment'}`, look: effect, ...place }],
  )
  return [
    ...(asked === null ? [] : [{ key: 'asked', label: 'Asked for', look: 'asked' as const, ...asked }]),
    ...(left === null ? [] : [{ key: 'left', label: 'Left of it', look: 'left' as const, ...left }]),
    ...meets,
  ]
}

function factsOf({ work, asked }: WorkPageData) {
  return [
    {
      name: 'Where',
      value:
        asked === null ? 'the site as a whole' : `${work.segmentTag ?? asked.line}, ${stretchText(asked)}`,
    },
    { name: 'Begins', value: <Instant at={work.startsAt} show="long" /> },
    { name: 'Ends', value: <Instant at={work.endsAt} show="long" /> },
    ...(work.people === '' ? [] : [{ name: 'Who', value: work.people }]),
    {
      name: 'Planned by',
      value: (
        <>
          {work.createdByName}, <Instant at={work.createdAt} />
        </>
      ),
    },
  ]
}

const LOOKS = {
  stops: 'border-bad bg-bad-soft',
  allowed: 'border-vac bg-vac-soft',
  known: 'border-edge bg-rule-2',
}

function Clashes({ clashes, open }: { clashes: readonly WorkClash[]; open: boolean }) {
  if (!open) return <p className="py-1 text-ink-2">The work is over; it is compared with nothing any more.</p>
  if (clashes.length === 0) {
    return (
      <p className="py-1 text-ink-2">
        Nothing was found among permits and segments that are recorded as hot. That does not say that the
        tunnel is safe to enter.
      </p>
    )
  }
  return (
    <ul>
      {clashes.map((clash) => {
        const { permit, rule, text, wayOut, allowedBy } = clash
        const look = standsInTheWay(clash) ? 'stops' : allowedBy === null ? 'known' : 'allowed'
        const word = { stops: 'keeps it from beginning', allowed: 'allowed by ruling', known: 'to be known' }[
          look
        ]
        return (
          <li
            key={`${permit} ${rule} ${text}`}
            className={`unbroken mb-3 border-l-4 px-3 py-2 ${LOOKS[look]}`}
          >
            <h3 className="font-semibold">
              {rule} {CONFLICT_RULE_LABELS[rule]} · {word}
            </h3>
            <p className="mt-1">
              {permit !== null && (
                <>
                  <Link to={`/permits/${permit}`} className="link">
                    {permit}
                  </Link>
                  :{' '}
                </>
              )}
              {text}
            </p>
            <p className="mt-1 text-ink-2">{allowedBy ?? wayOut}</p>
          </li>
        )
      })}
    </ul>
  )
}
