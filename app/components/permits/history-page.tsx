/** The whole story of a permit, day by day, as it is printed for a file. */
import { Link } from 'react-router'
import type { StoryLine } from '#app/domain/permit-story.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitHistoryData } from '#app/services/permit-story.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { PageHead } from '../ui/panel.tsx'
import { dayText } from '../ui/site-time.ts'
import { PermitMark } from './permit-mark.tsx'

export function PermitHistoryPage({ number, title, segments, state, revision, lines }: PermitHistoryData) {
  const { zone, now } = useSite()
  const days = new Map<string, StoryLine[]>()
  for (const line of lines) {
    const day = dayText(line.at, zone)
    days.set(day, [...(days.get(day) ?? []), line])
  }
  return (
    <>
      <PageHead
        title={`Story of ${number}`}
        crumbs={
          <>
            <Link to="/permits" className="link">
              Permits
            </Link>{' '}
            /{' '}
            <Link to={`/permits/${number}`} className="link">
              {number}
            </Link>{' '}
            / Story
          </>
        }
        actions={<ButtonLink to={`/permits/${number}`}>Back to the permit</ButtonLink>}
      >
        {title}, {segments.join(' + ')} · <PermitMark state={state} /> · revision {revision}
        <span className="block text-sm">
          Everything that was written down until <Instant at={now} />, in the order in which it happened. An
          act marked “signed” was signed with the person’s own password.
        </span>
      </PageHead>
      {[...days].map(([day, ofDay]) => (
        <section key={day} aria-label={day} className="mb-4">
          <h2 className="border-b-2 border-ink pt-3 pb-1">{day}</h2>
          <ol>
            {ofDay.map((line, i) => (
              // Two things may happen at one instant in the same words: only their place tells them apart.
              // biome-ignore lint/suspicious/noArrayIndexKey: the list never changes while it is shown
              <Line key={i} line={line} />
            ))}
          </ol>
        </section>
      ))}
    </>
  )
}

const TONES: Record<StoryLine['tone'], string> = {
  plain: '',
  stop: 'font-semibold',
  bad: 'font-semibold text-bad',
}

function Line({ line }: { line: StoryLine }) {
  return (
    <li className="unbroken grid gap-x-4 border-b border-rule-2 py-2 sm:grid-cols-[4rem_minmax(0,1fr)]">
      <Instant at={line.at} show="time" className="text-ink-2" />
      <div className="min-w-0">
        <p className={TONES[line.tone]}>
          {line.tone === 'bad' && <span aria-hidden="true">▲ </span>}
          {line.text}
        </p>
        {line.more.map((text) => (
          <p key={text} className="text-sm whitespace-pre-line text-ink-2">
            {text}
          </p>
        ))}
        <Marks line={line} />
      </div>
    </li>
  )
}

function Marks({ line: { signed, recordedAt, revision } }: { line: StoryLine }) {
  if (!signed && recordedAt === null && revision === null) return null
  return (
    <p className="text-xs text-ink-3">
      {[
        ...(signed ? ['signed'] : []),
        ...(revision === null ? [] : [`revision ${revision}`]),
        ...(recordedAt === null ? [] : ['written down later']),
      ].join(' · ')}
      {recordedAt !== null && (
        <>
          : <Instant at={recordedAt} />
        </>
      )}
    </p>
  )
}
