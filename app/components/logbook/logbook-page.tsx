/** The logbook: entries by the day they are about, newest first, with a filter that is part of the address. */
import { Form, Link } from 'react-router'
import { ENTRY_KIND_FACTS, ENTRY_KINDS } from '#app/domain/logbook.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { LogbookFilter, LogbookPageData } from '#app/services/logbook-page.server.ts'
import { Button, ButtonLink } from '../ui/button.tsx'
import { SelectField, TextField } from '../ui/field.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead } from '../ui/panel.tsx'
import { dayText } from '../ui/site-time.ts'
import { type Entry, EntryFacts, EntryText, textInForce } from './entry-text.tsx'

export function LogbookPage({ filter, entries, total, pageSize, segments }: LogbookPageData) {
  const filtered = filter.segment !== '' || filter.kind !== '' || filter.words !== ''
  return (
    <>
      <PageHead
        title="Logbook"
        actions={
          <ButtonLink kind="primary" to={writeAddress(filter)}>
            Write entry
          </ButtonLink>
        }
      >
        {total} {total === 1 ? 'entry' : 'entries'}
        {filtered ? ' found' : ''}
      </PageHead>
      <Filter filter={filter} segments={segments} filtered={filtered} />
      {entries.length === 0 ? (
        <p className="py-4 text-ink-2">
          {filtered
            ? 'No entry fits this filter. Take something out of it, or write the first one.'
            : 'Nothing has been written yet. The first entry can be yours.'}
        </p>
      ) : (
        <Days entries={entries} />
      )}
      <Pages filter={filter} total={total} pageSize={pageSize} />
    </>
  )
}

function writeAddress({ segment }: LogbookFilter): string {
  return segment === '' ? '/logbook/new' : `/logbook/new?segment=${encodeURIComponent(segment)}`
}

function Filter({
  filter,
  segments,
  filtered,
}: {
  filter: LogbookFilter
  segments: readonly string[]
  filtered: boolean
}) {
  return (
    // The key makes the fields follow the address when one goes back or takes the filter off.
    <Form
      key={`${filter.segment} ${filter.kind} ${filter.words}`}
      method="get"
      role="search"
      aria-label="Entries"
      className="mb-2 grid items-end gap-x-4 border-b sm:grid-cols-[10rem_10rem_minmax(0,1fr)_auto] print:hidden"
    >
      <SelectField
        name="segment"
        label="Segment"
        defaultValue={filter.segment}
        options={[{ value: '', label: 'All' }, ...segments.map((tag) => ({ value: tag, label: tag }))]}
      />
      <SelectField
        name="kind"
        label="Kind"
        defaultValue={filter.kind}
        options={[
          { value: '', label: 'All' },
          ...ENTRY_KINDS.map((kind) => ({ value: kind, label: ENTRY_KIND_FACTS[kind].label })),
        ]}
      />
      <TextField
        name="words"
        label="Words in the text"
        type="search"
        defaultValue={filter.words}
        maxLength={200}
      />
      <div className="mb-4 flex items-center gap-3">
        <Button>Find</Button>
        {filtered && (
          <Link to="/logbook" className="link py-1">
            All entries
          </Link>
        )}
      </div>
    </Form>
  )
}

function Days({ entries }: { entries: readonly Entry[] }) {
  const { zone } = useSite()
  const days = new Map<string, Entry[]>()
  for (const entry of entries) {
    const day = dayText(entry.eventAt, zone)
    days.set(day, [...(days.get(day) ?? []), entry])
  }
  return [...days].map(([day, ofDay]) => (
    <section key={day} aria-label={day} className="mb-4">
      <h2 className="border-b-2 border-ink pt-3 pb-1">{day}</h2>
      <ol>
        {ofDay.map((entry) => (
          <li
            key={entry.id}
            className="grid gap-x-4 border-b border-rule-2 py-2.5 sm:grid-cols-[4rem_minmax(0,1fr)] print:break-inside-avoid"
          >
            <Instant at={entry.eventAt} show="time" className="text-ink-2" />
            <div className="min-w-0">
              <EntryText text={textInForce(entry)} />
              <EntryFacts entry={entry} linked />
            </div>
          </li>
        ))}
      </ol>
    </section>
  ))
}

function Pages({ filter, total, pageSize }: { filter: LogbookFilter; total: number; pageSize: number }) {
  const last = Math.max(1, Math.ceil(total / pageSize))
  if (last === 1 && filter.page === 1) return null
  const address = (page: number) => {
    const query = new URLSearchParams()
    for (const name of ['segment', 'kind', 'words'] as const)
      if (filter[name] !== '') query.set(name, filter[name])
    if (page > 1) query.set('page', String(page))
    return `/logbook?${query}`
  }
  return (
    <nav aria-label="Pages of the logbook" className="flex items-center gap-4 print:hidden">
      {filter.page > 1 && <ButtonLink to={address(Math.min(last, filter.page - 1))}>Newer</ButtonLink>}
      <span className="text-ink-2">
        Page {filter.page} of {last}
      </span>
      {filter.page < last && <ButtonLink to={address(filter.page + 1)}>Older</ButtonLink>}
    </nav>
  )
}
