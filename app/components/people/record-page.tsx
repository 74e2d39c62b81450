/** The record of who did what: appended to, never changed. */
import { Form, Link } from 'react-router'
import type { RecordLine, RecordPage } from '#app/services/people-record.server.ts'
import { Button } from '../ui/button.tsx'
import { type Column, DataTable } from '../ui/data-table.tsx'
import { SelectField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead, Panel } from '../ui/panel.tsx'
import { PeopleCrumbs } from './people-pages.tsx'

const COLUMNS: readonly Column<RecordLine>[] = [
  { key: 'at', head: 'When', rowHead: true, cell: ({ at }) => <Instant at={at} /> },
  { key: 'person', head: 'Who', cell: ({ person }) => person ?? 'the product', nowrap: true },
  { key: 'act', head: 'What', cell: ({ act, signed }) => (signed ? `${act}, signed` : act) },
  { key: 'subject', head: 'To what', cell: ({ subject }) => subject },
  {
    key: 'effective',
    head: 'Holds since',
    cell: ({ effectiveAt }) => (effectiveAt === null ? '–' : <Instant at={effectiveAt} />),
  },
  { key: 'reason', head: 'Reason', cell: ({ reason }) => reason },
  { key: 'change', head: 'Before and after', cell: (line) => <Stored line={line} /> },
]

export function RecordListPage({ lines, filter, people, kinds, older }: RecordPage) {
  return (
    <>
      <PageHead title="Record of who did what" crumbs={<PeopleCrumbs />}>
        Every change, newest first. Nothing here can be edited or deleted.
      </PageHead>
      <Form
        // The key makes the fields follow the address when one goes back.
        key={`${filter.person} ${filter.kind}`}
        method="get"
        role="search"
        aria-label="Record"
        className="grid items-end gap-x-4 sm:grid-cols-[14rem_14rem_auto] print:hidden"
      >
        <SelectField
          name="person"
          label="Person"
          defaultValue={filter.person}
          options={[
            { value: '', label: 'Everybody' },
            ...people.map(({ id, name }) => ({ value: String(id), label: name })),
          ]}
        />
        <SelectField
          name="kind"
          label="Kind of thing"
          defaultValue={filter.kind}
          options={[{ value: '', label: 'All' }, ...kinds.map((kind) => ({ value: kind, label: kind }))]}
        />
        <div className="mb-4">
          <Button>Find</Button>
        </div>
      </Form>
      <Panel title="Acts">
        <DataTable
          caption="Acts, newest first"
          columns={COLUMNS}
          rows={lines}
          rowKey={({ id }) => id}
          empty="Nothing on record fits this."
        />
        <nav aria-label="Pages of the record" className="mt-3 flex gap-4">
          {filter.before !== '' && (
            <Link to={address(filter, null)} className="link py-1">
              Newest
            </Link>
          )}
          {older !== null && (
            <Link to={address(filter, older)} className="link py-1">
              Older
            </Link>
          )}
        </nav>
      </Panel>
    </>
  )
}

function address(filter: RecordPage['filter'], before: number | null): string {
  const query = new URLSearchParams({ person: filter.person, kind: filter.kind })
  if (before !== null) query.set('before', String(before))
  return `/people/record?${query}`
}

function Stored({ line }: { line: RecordLine }) {
  if (line.before === '' && line.after === '') return '–'
  return (
    <details>
      <summary className="min-h-6 cursor-pointer">Show</summary>
      {line.before !== '' && <pre className="text-sm whitespace-pre-wrap">before {line.before}</pre>}
      {line.after !== '' && <pre className="text-sm whitespace-pre-wrap">after {line.after}</pre>}
    </details>
  )
}
