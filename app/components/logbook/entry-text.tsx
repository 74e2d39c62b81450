/** An entry as it holds now, with what a reader must know about it: kind, place, hand, and whether it came late. */
import { Link } from 'react-router'
import { ENTRY_KIND_FACTS } from '#app/domain/logbook.ts'
import type { LogbookPageData } from '#app/services/logbook-page.server.ts'
import { Instant } from '../ui/instant.tsx'

export type Entry = LogbookPageData['entries'][number]

/** Written this much later than it happened, an entry is late and says so. */
const LATE_MS = 15 * 60_000

/** The text in force: the last amendment's, or the first. */
export function textInForce(entry: Entry): string {
  return entry.amendments.at(-1)?.text ?? entry.text
}

export function EntryText({ text }: { text: string }) {
  return <p className="max-w-[70ch] whitespace-pre-wrap">{text}</p>
}

/** The small line under an entry. */
export function EntryFacts({ entry, linked }: { entry: Entry; linked: boolean }) {
  const { kind, segmentTag, author, amendments, eventAt, writtenAt, onChart, signed, id } = entry
  return (
    <p className="text-sm text-ink-3">
      {ENTRY_KIND_FACTS[kind].label}
      {' · '}
      {segmentTag === null ? (
        'facility'
      ) : (
        <Link to={`/segments/${segmentTag}`} className="link inline-block py-0.5">
          {segmentTag}
        </Link>
      )}
      {' · '}
      {author}
      {signed ? ', signed' : ', not signed'}
      {onChart && ' · on the chart'}
      {writtenAt.getTime() - eventAt.getTime() > LATE_MS && (
        <>
          {' · written '}
          <Instant at={writtenAt} />
        </>
      )}
      {linked && (
        <>
          {' · '}
          <Link to={`/logbook/${id}`} className="link inline-block py-0.5">
            {amendments.length === 0
              ? `entry ${id}`
              : `entry ${id}, amended ${amendments.length === 1 ? 'once' : `${amendments.length} times`}`}
          </Link>
        </>
      )}
    </p>
  )
}
