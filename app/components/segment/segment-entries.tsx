import { Link } from 'react-router'
import { Instant } from '#app/components/ui/instant.tsx'
import { Panel } from '#app/components/ui/panel.tsx'
import type { SegmentPageData } from '#app/services/segment-page.server.ts'

/** The newest log entries of a segment; an amended entry shows what holds now. */
export function SegmentEntries({ tag, entries }: { tag: string; entries: SegmentPageData['entries'] }) {
  return (
    <Panel
      title="Logbook"
      aside={
        <Link to={`/logbook?segment=${tag}`} className="link text-sm">
          all entries
        </Link>
      }
    >
      {entries.length === 0 ? (
        <p className="text-ink-2">Nothing written about {tag} yet.</p>
      ) : (
        <ol>
          {entries.map(({ id, eventAt, text, amendments, author }) => (
            <li key={id} className="border-t border-rule-2 py-2 first:border-t-0">
              <Link to={`/logbook/${id}`} className="link text-sm text-ink-3">
                <Instant at={eventAt} />
              </Link>
              <p>{amendments.at(-1)?.text ?? text}</p>
              <p className="text-sm text-ink-3">
                {author}
                {amendments.length > 0 && ', amended'}
              </p>
            </li>
          ))}
        </ol>
      )}
    </Panel>
  )
}
