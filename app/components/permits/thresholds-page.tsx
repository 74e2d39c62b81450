/** Thresholds that cautions rest on: what has been published, what this site has adopted, and since when. */
import { Link } from 'react-router'
import {
  type AdoptedThreshold,
  isLessCareful,
  NOT_SET,
  PROVENANCE_WORDS,
  THRESHOLD_KEYS,
  THRESHOLDS,
  type ThresholdKey,
  thresholdStanding,
} from '#app/domain/hazard-thresholds.ts'
import { HAZARD_LABELS } from '#app/domain/permit-words.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { ThresholdsPageData } from '#app/services/thresholds.server.ts'
import type { ActionFailure } from '../forms/failure.ts'
import { FormFailure } from '../forms/form-failure.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { dayText } from '../ui/site-time.ts'
import { AdoptForm, BayForm, EndForm, failureOf } from './threshold-forms.tsx'

export interface ThresholdsPageProps extends ThresholdsPageData {
  /** The threshold that the address names. */
  chosen: ThresholdKey | null
  failure: ActionFailure | undefined
}

export function ThresholdsPage(props: ThresholdsPageProps) {
  const { open, history, bay, chosen, mayAdopt, failure } = props
  const { now } = useSite()
  const openOf = (key: ThresholdKey) => open.find((one) => one.key === key) ?? null
  const unset = THRESHOLD_KEYS.filter((key) => thresholdStanding(openOf(key), now) !== 'in-force')
  const placed = ['adopt', 'end', 'bay-volume'].some((act) => failureOf(failure, act) !== undefined)
  return (
    <>
      <PageHead
        title="Thresholds"
        crumbs={
          <Link to="/permits" className="link">
            Permits
          </Link>
        }
      >
        Values that the cautions of a permit are held against. A published value is information; only what a
        safety officer has adopted counts here.
      </PageHead>
      {/* A refusal that belongs to no form of this page still has to be said. */}
      {!placed && <FormFailure failure={failure} />}
      {unset.length > 0 && (
        <Notice tone="warn" lead={`${unset.length} of ${THRESHOLD_KEYS.length} not set by site. `}>
          A permit whose cautions rest on one of them cannot be approved:{' '}
          {unset.map((key) => THRESHOLDS[key].label).join(', ')}.
        </Notice>
      )}
      <Panel title="All thresholds">
        <ThresholdsTable openOf={openOf} mayAdopt={mayAdopt} />
      </Panel>
      {chosen !== null && (
        <Chosen
          key={chosen}
          threshold={chosen}
          open={openOf(chosen)}
          history={history}
          mayAdopt={mayAdopt}
          failure={failure}
        />
      )}
      {chosen === null && (
        <div className="grid items-start gap-x-4.5 lg:grid-cols-[minmax(0,1fr)_22rem]">
          <Panel title="History">
            <HistoryTable columns={[LABEL_COLUMN, ...HISTORY_COLUMNS]} rows={history} />
          </Panel>
          <Panel title="Space of a bay">
            <p className="mb-2">
              {bay.volumeM3} m³ ({bay.basis}). The oxygen that venting would leave is worked out with it.
            </p>
            {mayAdopt && (
              <BayForm
                key={bay.settingId}
                settingId={bay.settingId}
                volumeM3={bay.volumeM3}
                failure={failureOf(failure, 'bay-volume')}
              />
            )}
          </Panel>
        </div>
      )}
    </>
  )
}

function ThresholdsTable({
  openOf,
  mayAdopt,
}: {
  openOf: (key: ThresholdKey) => AdoptedThreshold | null
  mayAdopt: boolean
}) {
  const columns: readonly Column<ThresholdKey>[] = [
    {
      key: 'label',
      head: 'Threshold',
      cell: (key) => (
        <Link
          to={`?key=${key}#threshold`}
          className="link inline-block py-0.5 font-semibold"
          aria-label={`${THRESHOLDS[key].label}: ${mayAdopt ? 'adopt, change or look at' : 'look at'}`}
        >
          {THRESHOLDS[key].label}
        </Link>
      ),
    },
    { key: 'site', head: 'This site', nowrap: true, cell: (key) => <SiteValue open={openOf(key)} /> },
    {
      key: 'review',
      head: 'Look again by',
      nowrap: true,
      cell: (key) => <ReviewDay open={openOf(key)} />,
    },
    {
      key: 'published',
      head: 'Published, for information',
      cell: (key) => <Published threshold={key} />,
    },
  ]
  return (
    <DataTable
      caption="Thresholds with what this site has adopted and what has been published"
      columns={columns}
      rows={THRESHOLD_KEYS}
      rowKey={(key) => key}
      empty="The catalogue is empty."
    />
  )
}

function SiteValue({ open }: { open: AdoptedThreshold | null }) {
  const { now } = useSite()
  const standing = thresholdStanding(open, now)
  if (open !== null && standing === 'in-force') {
    return (
      <>
        <b className="font-semibold">
          {open.value} {open.unit}
        </b>
        {isLessCareful(open.key, open.value) && (
          <span className="block text-sm text-warn">less careful than published</span>
        )}
      </>
    )
  }
  return (
    <span className="rounded-sm border border-warn bg-warn-soft px-1 text-ink">
      {NOT_SET}
      {standing === 'lapsed' && ' (lapsed)'}
    </span>
  )
}

function ReviewDay({ open }: { open: AdoptedThreshold | null }) {
  const { zone } = useSite()
  return open === null ? '–' : dayText(open.reviewAt, zone)
}

function Published({ threshold }: { threshold: ThresholdKey }) {
  return (
    <ul className="text-sm text-ink-2">
      {THRESHOLDS[threshold].published.map(({ text, source, edition, provenance }) => (
        <li key={text}>
          {text}
          {source !== 'none' && ` (${source}, ${edition})`}; {PROVENANCE_WORDS[provenance]}
        </li>
      ))}
    </ul>
  )
}

function Chosen({
  threshold,
  open,
  history,
  mayAdopt,
  failure,
}: Pick<ThresholdsPageProps, 'history' | 'mayAdopt' | 'failure'> & {
  threshold: ThresholdKey
  open: AdoptedThreshold | null
}) {
  const { label, meaning, hazards, careful } = THRESHOLDS[threshold]
  return (
    <div id="threshold" className="scroll-mt-4">
      <Panel
        title={label}
        aside={
          <Link to="/permits/thresholds" className="link text-sm print:hidden">
            Show none
          </Link>
        }
      >
        <p>
          {meaning} The {careful} value is the more careful one. Cautions that rest on it:{' '}
          {hazards.map((key) => HAZARD_LABELS[key]).join(', ')}.
        </p>
        <div className="mt-2">
          <HistoryTable columns={HISTORY_COLUMNS} rows={history.filter(({ key }) => key === threshold)} />
        </div>
      </Panel>
      {mayAdopt && (
        <div className="grid items-start gap-x-4.5 lg:grid-cols-2 print:hidden">
          <Panel title={open === null ? 'Adopt a value' : 'Adopt another value, or confirm this one'}>
            <AdoptForm
              // Emptied once a value has been adopted.
              key={open?.id ?? 0}
              threshold={threshold}
              open={open}
              failure={failureOf(failure, 'adopt')}
            />
          </Panel>
          {open !== null && (
            <Panel title="End it">
              <EndForm key={open.id} open={open} failure={failureOf(failure, 'end')} />
            </Panel>
          )}
        </div>
      )}
    </div>
  )
}

const LABEL_COLUMN: Column<AdoptedThreshold> = {
  key: 'label',
  head: 'Threshold',
  cell: ({ key }) => THRESHOLDS[key].label,
}

const HISTORY_COLUMNS: readonly Column<AdoptedThreshold>[] = [
  { key: 'value', head: 'Value', nowrap: true, cell: ({ value, unit }) => `${value} ${unit}` },
  {
    key: 'source',
    head: 'Comes from',
    cell: ({ source, edition }) => (edition === '' ? source : `${source}, ${edition}`),
  },
  {
    key: 'by',
    head: 'Adopted and signed',
    cell: ({ by, at, reason }) => (
      <>
        {by}, <Instant at={at} />: {reason}
      </>
    ),
  },
  {
    key: 'until',
    head: 'Until',
    cell: ({ endedAt, endedBy, reviewAt }) =>
      endedAt === null ? (
        <>
          review by <Instant at={reviewAt} />
        </>
      ) : (
        <>
          ended by {endedBy}, <Instant at={endedAt} />
        </>
      ),
  },
]

function HistoryTable({
  columns,
  rows,
}: {
  columns: readonly Column<AdoptedThreshold>[]
  rows: readonly AdoptedThreshold[]
}) {
  return (
    <DataTable
      caption="Values adopted, the newest first"
      columns={columns}
      rows={rows}
      rowKey={({ id }) => id}
      empty="No value has ever been adopted here."
    />
  )
}
