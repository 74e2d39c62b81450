/** A heated-segment permit on one page: where it stands, what it warns of, what is in its way, and what can be done. */
import { Link } from 'react-router'
import type { OfferedAct } from '#app/domain/permit-offers.ts'
import type { PermitPageData } from '#app/services/permit-page.server.ts'
import { Locator } from '../charts/locator.tsx'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { ButtonLink } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { ActForm } from './act-form.tsx'
import { ACT_WORDS, kindOf } from './act-words.ts'
import { ConflictsPanel } from './conflicts-panel.tsx'
import { DangerPanel } from './danger-panel.tsx'
import { HazardList } from './hazard-list.tsx'
import {
  ChecklistPanel,
  DifferencesPanel,
  HeatingPanel,
  PeoplePanel,
  ProtectionPanel,
  RecentPanel,
  TermsPanel,
  ValidityPanel,
} from './permit-panels.tsx'
import { PointsTable } from './points-table.tsx'
import { StageBar } from './stage-bar.tsx'
import { StopCard } from './stop-card.tsx'
import { TestsTable } from './tests-table.tsx'

export interface PermitPageProps extends PermitPageData {
  /** The act whose form is asked for by the address. */
  asked: OfferedAct | null
  failure: ActionFailure | undefined
}

export function PermitPage(props: PermitPageProps) {
  const { number, content, along, failure, revision, checklist, waitsFor, offers, may } = props
  const open = openForm(props)
  const here = `/permits/${number}`
  return (
    <>
      <Head {...props} />
      <div className="-mt-2 mb-3">
        <Locator along={along} here={content.segments} />
      </div>
      <p className="mb-2 hidden font-semibold print:block">
        A page of the register, and no sheet for posting: those are printed from the permit’s own sheets.
      </p>
      <StageBar stages={props.stages} />
      <DangerPanel events={props.dangers} mayTolerate={may.rule} mayState={may.heating} />
      {/* A refused ruling is told at its conflict. */}
      <FormFailure failure={failure?.typed?.act === 'rule' ? undefined : failure} />
      {waitsFor !== '' && <p className="-mt-1 mb-4">{waitsFor}</p>}
      {open === undefined && <NotYours asked={props.asked} />}
      {open === undefined && <InTheWay offers={offers} />}
      {open !== undefined && open.act !== 'suspend' && (
        <ActForm
          key={open.act}
          offer={open}
          revision={revision}
          failure={failure}
          here={here}
          holder={props.holder}
        />
      )}
      {offers.some(({ act }) => act === 'suspend') && (
        <StopCard number={number} revision={revision} failure={failure} />
      )}
      <DifferencesPanel {...props} />
      {/* What is in the way comes first on a narrow screen and for those who hear the page; beside the rest on a wide one. */}
      <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_20.5rem] lg:grid-rows-[auto_1fr]">
        <div className="min-w-0 lg:col-start-2 lg:row-start-1">
          {checklist !== null && <ChecklistPanel checklist={checklist} />}
          <ValidityPanel {...props} />
          <HeatingPanel {...props} />
        </div>
        <div className="min-w-0 lg:col-start-1 lg:row-span-2 lg:row-start-1">
          <OnThisPage />
          <ConflictsPanel {...props} />
          <div id="cautions" className="scroll-mt-4">
            <HazardList hazards={props.hazards} />
          </div>
          <Panel
            title="Isolation points"
            id="isolation"
            className="scroll-mt-4"
            aside={<LocksOut locks={props.locksOut} />}
          >
            <PointsTable lines={props.points} />
          </Panel>
          <Panel title="Tests" id="tests" className="scroll-mt-4">
            <TestsTable lines={props.tests} />
          </Panel>
          <ProtectionPanel {...props} />
        </div>
        <div className="min-w-0 lg:col-start-2 lg:row-start-2">
          <TermsPanel {...props} />
          <PeoplePanel {...props} />
          <RecentPanel {...props} />
        </div>
      </div>
    </>
  )
}

/** Somebody has followed a link to an act that is for other people, or for another state: told, not passed over. */
function NotYours({ asked }: Pick<PermitPageProps, 'asked'>) {
  if (asked === null) return null
  return (
    <p className="mb-4 border-l-4 border-warn bg-warn-soft px-3 py-2 print:hidden">
      “{ACT_WORDS[asked].button}” is not for you on this permit as it stands. Ask those who are named here.
    </p>
  )
}

/** Before anything is read: whether the act that the page is there for can be done, and how much keeps it from that. */
function InTheWay({ offers }: Pick<PermitPageProps, 'offers'>) {
  const next = offers.find(({ act }) => ACT_WORDS[act].kind === 'primary')
  if (next === undefined) return null
  const { reasons } = next
  const word = ACT_WORDS[next.act].button
  if (reasons.length === 0) {
    return (
      <p className="mb-4 print:hidden">
        By the record nothing keeps you from “{word}”. The record is not the site.
      </p>
    )
  }
  return (
    <p className="mb-4 border-l-4 border-warn bg-warn-soft px-3 py-2 print:hidden">
      <strong className="font-semibold">
        “{word}” would be refused now, for {reasons.length === 1 ? 'one reason' : `${reasons.length} reasons`}
        .
      </strong>{' '}
      <Link to={`?act=${next.act}#act`} className="link inline-block py-0.5">
        Read {reasons.length === 1 ? 'it' : 'them'}
      </Link>
    </p>
  )
}

/** The cautions are long, as they have to be; what stands below them is found from here. */
function OnThisPage() {
  return (
    <nav aria-label="Parts of this permit" className="mb-2 flex flex-wrap gap-x-4 text-sm print:hidden">
      {[
        ['#conflicts', 'Conflicts'],
        ['#cautions', 'Cautions'],
        ['#isolation', 'Isolation points'],
        ['#tests', 'Tests'],
        ['#protection', 'Protection and rescue'],
      ].map(([to, label]) => (
        <a key={to} href={to} className="link inline-block py-1.5">
          {label}
        </a>
      ))}
    </nav>
  )
}

function LocksOut({ locks }: { locks: readonly string[] }) {
  if (locks.length === 0) return <span className="text-sm text-ink-3">no lock hangs for it</span>
  return (
    <span className="text-sm text-ink-2">
      {locks.length === 1 ? '1 lock hangs' : `${locks.length} locks hang`}: {locks.join(', ')}
    </span>
  )
}

/** The form on the page: the one that was refused, or the one that is asked for, if it is offered to this reader. */
function openForm({ asked, failure, offers }: PermitPageProps) {
  const act = failure?.typed?.act ?? asked
  return offers.find((offer) => offer.act === act)
}

function Head(props: PermitPageProps) {
  const { number, content, requestedBy, requestedAt, createdBy, createdAt, offers, may } = props
  const { fromM, toM, planId } = content
  return (
    <PageHead
      title={`Heated-segment permit ${number}`}
      crumbs={
        <>
          <Link to="/permits" className="link">
            Permits
          </Link>{' '}
          / {number}
        </>
      }
      actions={
        <>
          <ButtonLink to={`/permits/${number}/print`}>Print for posting</ButtonLink>
          {may.site && <ButtonLink to={`/permits/${number}/site`}>At the site</ButtonLink>}
          {may.edit && (
            <ButtonLink to={`/permits/${number}/edit`}>
              {props.state === 'draft' || props.state === 'returned' ? 'Edit' : 'Change the terms'}
            </ButtonLink>
          )}
          {offers.map(({ act, reasons }) =>
            act === 'suspend' ? (
              <ButtonLink key={act} to="#stop" kind="danger">
                {ACT_WORDS[act].button}
              </ButtonLink>
            ) : (
              <ButtonLink key={act} to={`?act=${act}#act`} kind={kindOf(act, reasons)}>
                {ACT_WORDS[act].button}
              </ButtonLink>
            ),
          )}
        </>
      }
    >
      <span className="block font-medium text-ink">{content.title || 'No title yet'}</span>
      {content.segments.length === 0
        ? 'no segment yet'
        : content.segments.map((tag, i) => (
            <span key={tag}>
              {i > 0 && ' + '}
              <Link to={`/segments/${tag}`} className="link">
                {tag}
              </Link>
            </span>
          ))}
      {fromM !== null && toM !== null && `, ${fromM} – ${toM} m`}
      {' · '}
      {requestedBy === null || requestedAt === null ? (
        <>
          drafted by {createdBy}, <Instant at={createdAt} />
        </>
      ) : (
        <>
          asked for by {requestedBy}, <Instant at={requestedAt} />
        </>
      )}
      {planId !== null && (
        <>
          {' · '}
          <Link to={`/bakes/plans/${planId}`} className="link">
            bake plan {planId}
          </Link>
          {content.planVersion !== null && `, version ${content.planVersion}`}
        </>
      )}
      <span className="block text-sm">
        Revision {props.revision} · version {props.version}
        {props.approvedVersion !== null &&
          !props.approvedIsShown &&
          ` (approved was version ${props.approvedVersion})`}
        {' · '}short code {props.shortCode} · Ebbline records; it does not isolate, switch off or protect.
      </span>
    </PageHead>
  )
}
