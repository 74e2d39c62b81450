/** Channels that seem to carry each other's gauge: what speaks for it, and the form a person may send. Nothing is changed by itself. */
import { Link } from 'react-router'
import type { CrossedFindings, CrossedSuggestion } from '#app/services/crossed-suggestions.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { Panel } from '../ui/panel.tsx'

export function CrossedPanel({ findings, mayEdit }: { findings: CrossedFindings; mayEdit: boolean }) {
  const { suggestions, clear, notEvaluable, from, to } = findings
  return (
    <Panel title="Compared with the neighbours’ channels">
      <p className="mb-2 max-w-prose text-ink-2">
        Hot-cathode channels of neighbouring segments that one logger reads, <Instant at={from} /> to{' '}
        <Instant at={to} />, as the channel maps have them.
      </p>
      {suggestions.map((one) => (
        <Suggestion key={`${one.x.position} ${one.y.position}`} suggestion={one} mayEdit={mayEdit} />
      ))}
      {clear > 0 && (
        <p>
          {clear === 1 ? 'In one pair' : `In ${clear} pairs`} nothing speaks for an exchange in this time.
        </p>
      )}
      {notEvaluable.length > 0 && (
        <details className="mt-1">
          <summary className="min-h-8 cursor-pointer py-1">
            {notEvaluable.length === 1
              ? 'One pair cannot be judged'
              : `${notEvaluable.length} pairs cannot be judged`}
          </summary>
          <ul className="list-disc pl-5">
            {notEvaluable.map(({ pair, reason }) => (
              <li key={pair}>{reason}.</li>
            ))}
          </ul>
        </details>
      )}
      {suggestions.length === 0 && clear === 0 && notEvaluable.length === 0 && (
        <p>No neighbouring segment has a hot-cathode channel of the same logger to compare with.</p>
      )}
    </Panel>
  )
}

function Suggestion({ suggestion, mayEdit }: { suggestion: CrossedSuggestion; mayEdit: boolean }) {
  const { x, y, sourceCode, confidence, begin, evidence, nearby, to } = suggestion
  return (
    <section className="mb-3 border-l-4 border-warn bg-warn-soft px-3 py-2">
      <h3 className="font-semibold">
        {x.position} and {y.position} seem to carry each other’s gauge
      </h3>
      <p>
        {confidence === 'strong' ? 'Strong' : 'Moderate'} suspicion, {begin}. Channels{' '}
        <ChannelLink channel={x} /> and <ChannelLink channel={y} /> of {sourceCode}.
      </p>
      <ul className="my-1 list-disc pl-5">
        {evidence.map((sentence) => (
          <li key={sentence}>{sentence}</li>
        ))}
        {nearby.map(({ at, text }) => (
          <li key={`${at.getTime()} ${text}`}>
            In the logbook, <Instant at={at} />: “{text}”
          </li>
        ))}
      </ul>
      <p className="mb-2">
        Ebbline changes nothing by itself. Look at the cables, or move a valve and see which channel answers.
      </p>
      {mayEdit && <ButtonLink to={to}>Fill in the channel map</ButtonLink>}
    </section>
  )
}

function ChannelLink({ channel: { channelId, channel } }: { channel: CrossedSuggestion['x'] }) {
  return (
    <Link to={`/register/channels/${channelId}`} className="link">
      {channel}
    </Link>
  )
}
