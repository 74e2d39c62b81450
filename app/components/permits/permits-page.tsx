/** The register of permits: what waits for the reader on top, then all that fit the filter. */
import { Form, Link } from 'react-router'
import { PERMIT_GROUP_LABELS, PERMIT_GROUPS } from '#app/domain/permit-groups.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type {
  PermitRegisterData,
  RegisterFilter,
  RegisterLine,
  WaitingPermitLine,
} from '#app/services/permit-register.server.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { offsetLabel, siteTimeText, spanText } from '../ui/site-time.ts'
import { PermitMark } from './permit-mark.tsx'

export function PermitsPage(props: PermitRegisterData) {
  const { filter, lines, total, pageSize, waiting, may } = props
  const filtered = isFiltered(filter)
  return (
    <>
      <PageHead
        title="Permits"
        actions={
          <>
            <ButtonLink to="/permits/works">Works in the tunnel</ButtonLink>
            <ButtonLink to="/permits/bays">Closed bays and oxygen</ButtonLink>
            <ButtonLink to="/permits/thresholds">Thresholds</ButtonLink>
            <ButtonLink to="/permits/policy">Permit policy</ButtonLink>
            {may.draft && (
              <ButtonLink kind="primary" to="/permits/new">
                Draw up a permit
              </ButtonLink>
            )}
          </>
        }
      >
        Ebbline records who agreed to what. It does not isolate, switch off or protect.
      </PageHead>
      {waiting.length > 0 && <WaitingPanel waiting={waiting} />}
      <Filter {...props} filtered={filtered} />
      <p className="mb-1 text-ink-2">
        {total} {total === 1 ? 'permit' : 'permits'} {filtered ? 'found' : 'that have not ended'}
      </p>
      <LinesTable lines={lines} />
      <Pages filter={filter} total={total} pageSize={pageSize} />
    </>
  )
}

function isFiltered({ group, segment, holder, year, words }: RegisterFilter): boolean {
  return group !== 'open' || segment !== '' || holder !== '' || year !== '' || words !== ''
}

function WaitingPanel({ waiting }: { waiting: readonly WaitingPermitLine[] }) {
  return (
    <Panel title={waiting.length === 1 ? 'One waits for you' : `${waiting.length} wait for you`}>
      <ul>
        {waiting.map(({ number, segments, what }) => (
          <li key={number} className="border-b border-rule-2 py-1.5 last:border-b-0">
            <Link to={`/permits/${number}`} className="link inline-block py-0.5 font-semibold">
              {number}
            </Link>{' '}
            ({segments.join(' + ')}) {what}.
          </li>
        ))}
      </ul>
    </Panel>
  )
}

function Filter({ filter, filtered, segments, holders, years }: PermitRegisterData & { filtered: boolean }) {
  return (
    // The key makes the fields follow the address when one goes back or takes the filter off.
    <Form
      key={JSON.stringify(filter)}
      method="get"
      role="search"
      aria-label="Permits"
      className="mb-2 grid grid-cols-2 items-end gap-x-4 border-b sm:grid-cols-[9rem_8rem_12rem_7rem_minmax(8rem,1fr)_auto] print:hidden"
    >
      <SelectField
        name="group"
        label="Which"
        defaultValue={filter.group}
        options={PERMIT_GROUPS.map((value) => ({ value, label: PERMIT_GROUP_LABELS[value] }))}
      />
      <SelectField
        name="segment"
        label="Segment"
        defaultValue={filter.segment}
        options={[{ value: '', label: 'All' }, ...segments.map((tag) => ({ value: tag, label: tag }))]}
      />
      <SelectField
        name="holder"
        label="Holder"
        defaultValue={filter.holder}
        options={[
          { value: '', label: 'Anybody' },
          ...holders.map(({ id, name }) => ({ value: String(id), label: name })),
        ]}
      />
      <SelectField
        name="year"
        label="Year"
        defaultValue={filter.year}
        options={[
          { value: '', label: 'All' },
          ...years.map((year) => ({ value: String(year), label: String(year) })),
        ]}
      />
      <TextField
        name="words"
        label="Number or words"
        type="search"
        defaultValue={filter.words}
        maxLength={200}
      />
      <div className="mb-4 flex items-center gap-3">
        <Button>Find</Button>
        {filtered && (
          <Link to="/permits" className="link py-1">
            Take it off
          </Link>
        )}
      </div>
    </Form>
  )
}

const COLUMNS: readonly Column<RegisterLine>[] = [
  {
    key: 'number',
    head: 'Permit',
    rowHead: true,
    cell: ({ number }) => (
      <Link to={`/permits/${number}`} className="link inline-block py-0.5">
        {number}
      </Link>
    ),
  },
  {
    key: 'segments',
    head: 'Segment',
    nowrap: true,
    cell: ({ segments }) => segments.map((tag, i) => <SegmentLink key={tag} tag={tag} first={i === 0} />),
  },
  { key: 'title', head: 'Work', cell: ({ title }) => <span className="block min-w-40">{title}</span> },
  { key: 'state', head: 'State', cell: ({ state }) => <PermitMark state={state} /> },
  { key: 'holder', head: 'Holder', cell: ({ holder }) => holder ?? '–' },
  { key: 'window', head: 'Window', cell: (line) => <Window {...line} /> },
  { key: 'current', head: 'Current validity', cell: (line) => <Current {...line} /> },
  { key: 'notes', head: 'To look at', cell: (line) => <Remarks {...line} /> },
]

function LinesTable({ lines }: { lines: readonly RegisterLine[] }) {
  return (
    <DataTable
      caption="Permits, newest first"
      columns={COLUMNS}
      rows={lines}
      rowKey={({ number }) => number}
      empty="No permit fits. Take something out of the filter."
    />
  )
}

function SegmentLink({ tag, first }: { tag: string; first: boolean }) {
  return (
    <>
      {!first && ' + '}
      <Link to={`/segments/${tag}`} className="link inline-block py-0.5">
        {tag}
      </Link>
    </>
  )
}

function Window({ windowFrom, windowTo }: RegisterLine) {
  const { zone } = useSite()
  if (windowFrom === null || windowTo === null) return '–'
  const offsets = [...new Set([offsetLabel(windowFrom, zone), offsetLabel(windowTo, zone)])]
  return (
    <>
      <span className="whitespace-nowrap">{siteTimeText(windowFrom, zone)} to</span>{' '}
      <span className="whitespace-nowrap">{siteTimeText(windowTo, zone)}</span>
      <span className="block text-xs text-ink-3">{offsets.join(' to ')}</span>
    </>
  )
}

function Current({ currentUntil }: RegisterLine) {
  const { now } = useSite()
  if (currentUntil === null) return '–'
  const left = currentUntil.getTime() - now.getTime()
  return (
    <>
      until <Instant at={currentUntil} />
      <span className="block text-xs text-ink-3">{left > 0 ? `${spanText(left)} left` : 'run out'}</span>
    </>
  )
}

function Remarks({ dangers, testsWrong, locksOut, state, endedAt }: RegisterLine) {
  const locks = locksOut === 1 ? '1 lock hangs' : `${locksOut} locks hang`
  const oddLocks = locksOut > 0 && (state === 'handed-back' || state === 'expired')
  return (
    <span className="block min-w-44 text-sm">
      {dangers.map(({ kind, text }) => (
        <span key={kind} className="block font-medium text-bad">
          <span aria-hidden="true">▲ </span>Danger: {text}
        </span>
      ))}
      {testsWrong.map((text) => (
        <span key={text} className="block text-warn">
          {text}
        </span>
      ))}
      {locksOut > 0 && <span className={`block ${oddLocks ? 'text-warn' : 'text-ink-2'}`}>{locks}</span>}
      {endedAt !== null && (
        <span className="block text-ink-2">
          ended <Instant at={endedAt} />
        </span>
      )}
    </span>
  )
}

function Pages({ filter, total, pageSize }: { filter: RegisterFilter; total: number; pageSize: number }) {
  const last = Math.max(1, Math.ceil(total / pageSize))
  if (last === 1 && filter.page === 1) return null
  const address = (page: number) => {
    const query = new URLSearchParams()
    for (const name of ['group', 'segment', 'holder', 'year', 'words'] as const) {
      if (filter[name] !== '') query.set(name, filter[name])
    }
    if (page > 1) query.set('page', String(page))
    return `/permits?${query}`
  }
  return (
    <nav aria-label="Pages of the register" className="mt-3 flex items-center gap-4 print:hidden">
      {filter.page > 1 && <ButtonLink to={address(Math.min(last, filter.page - 1))}>Newer</ButtonLink>}
      <span className="text-ink-2">
        Page {filter.page} of {last}
      </span>
      {filter.page < last && <ButtonLink to={address(filter.page + 1)}>Older</ButtonLink>}
    </nav>
  )
}
