/** Cautions of a heated-segment permit: what these segments can do to people, and what is done against it. */
import { useId } from 'react'
import {
  type HazardFact,
  type HazardThreshold,
  type HazardView,
  STANDING_SENTENCE,
} from '#app/domain/hazards.ts'

/**
 * All cautions of a permit in one block, those said not to apply below the others with the reason given. Word, shape
 * and frame carry the meaning, so that it reads in grey and on paper.
 */
export function HazardList({ hazards }: { hazards: readonly HazardView[] }) {
  const headingId = useId()
  const shown = hazards.filter(({ applies }) => applies !== false)
  const left = hazards.filter(({ applies }) => applies === false)
  return (
    <section
      aria-labelledby={headingId}
      className="mb-4.5 min-w-0 overflow-hidden rounded-md border-2 border-heat bg-sheet print:rounded-none print:border-ink"
    >
      <h2
        id={headingId}
        className="bg-heat px-3.5 py-2.5 text-sheet print:border-b-2 print:border-ink print:bg-transparent print:text-ink"
      >
        Cautions for this segment while heated
      </h2>
      {shown.map((hazard) => (
        <Hazard key={hazard.key} hazard={hazard} />
      ))}
      {left.length > 0 && <LeftOut hazards={left} />}
      <p className="border-t bg-heat-soft px-3.5 py-2.5 text-sm print:border-ink print:bg-transparent">
        {STANDING_SENTENCE}
      </p>
    </section>
  )
}

function Hazard({ hazard }: { hazard: HazardView }) {
  const { label, applies, text, facts, findings, precautions, thresholds } = hazard
  return (
    <article className="unbroken border-b border-rule-2 px-3.5 py-2.5 sm:grid sm:grid-cols-[12.5rem_minmax(0,1fr)] sm:gap-x-3 print:border-ink">
      <h3 className="mb-1 flex items-start gap-2 text-base font-semibold">
        <WarningSign />
        <span>
          {label}
          {applies === null && (
            <span className="block text-sm font-normal text-ink-3">not answered by the requester yet</span>
          )}
        </span>
      </h3>
      <div className="min-w-0">
        {facts.length > 0 && <Facts facts={facts} />}
        {findings.map((finding) => (
          <p key={finding} className="mt-1 border-l-4 border-warn bg-warn-soft px-2 py-1 print:border-ink">
            <strong className="font-semibold">Beyond a limit: </strong>
            {finding}
          </p>
        ))}
        <p className="mt-1 text-ink-2">{precautions.join(' ')}</p>
        {text !== '' && (
          <p className="mt-1.5 whitespace-pre-line">
            <strong className="font-semibold">At this segment: </strong>
            {text}
          </p>
        )}
        {thresholds.length > 0 && <Thresholds thresholds={thresholds} />}
        {facts.length + thresholds.length > 0 && <Sources facts={facts} thresholds={thresholds} />}
      </div>
    </article>
  )
}

function Facts({ facts }: { facts: readonly HazardFact[] }) {
  return (
    <dl className="flex flex-wrap gap-x-4.5">
      {facts.map(({ name, value }) => (
        <div key={name} className="flex flex-wrap gap-x-1.5">
          <dt className="text-ink-2">{name}:</dt>
          <dd className="font-medium">{value}</dd>
        </div>
      ))}
    </dl>
  )
}

/** What the site has adopted, in a line; one that does not count says why at once. */
function Thresholds({ thresholds }: { thresholds: readonly HazardThreshold[] }) {
  return (
    <ul className="mt-1.5 flex flex-wrap gap-x-4.5 text-sm text-ink-2" aria-label="Thresholds of this site">
      {thresholds.map(({ key, label, standing, text, detail }) => (
        <li key={key}>
          {label}:{' '}
          {standing === 'in-force' ? (
            <b className="font-semibold text-ink">{text}</b>
          ) : (
            <>
              <b className="rounded-sm border border-warn bg-warn-soft px-1 font-semibold text-ink print:border-ink">
                {text}
              </b>{' '}
              {detail}
            </>
          )}
        </li>
      ))}
    </ul>
  )
}

interface Grounds {
  facts: readonly HazardFact[]
  thresholds: readonly HazardThreshold[]
}

/** How each figure was worked out and who adopted what; folded on the screen, printed in full. */
function Sources(grounds: Grounds) {
  return (
    <>
      <details className="mt-1 text-sm text-ink-2 print:hidden">
        <summary className="inline-block min-h-6 underline decoration-edge underline-offset-2">
          Working and sources
        </summary>
        <SourceLines {...grounds} />
      </details>
      <div className="mt-1 hidden text-xs print:block">
        <SourceLines {...grounds} />
      </div>
    </>
  )
}

function SourceLines({ facts, thresholds }: Grounds) {
  return (
    <ul className="mt-0.5">
      {facts.map(({ name, how, source }) => (
        <li key={name}>
          {name}: {how} Source: {source}.
        </li>
      ))}
      {thresholds
        .filter(({ standing }) => standing === 'in-force')
        .map(({ key, label, text, detail }) => (
          <li key={key}>
            {label}, {text}: {detail}
          </li>
        ))}
    </ul>
  )
}

function LeftOut({ hazards }: { hazards: readonly HazardView[] }) {
  return (
    <div className="px-3.5 py-2.5">
      <h3 className="text-base font-semibold">Said not to apply</h3>
      <ul className="mt-0.5 text-ink-2">
        {hazards.map(({ key, label, text }) => (
          <li key={key}>
            {label}: {text === '' ? <b className="font-semibold text-ink">no reason given</b> : text}
          </li>
        ))}
      </ul>
    </div>
  )
}

function WarningSign() {
  return (
    <svg
      viewBox="0 0 22 20"
      aria-hidden="true"
      className="mt-0.5 h-5 w-5.5 shrink-0 text-heat print:text-ink"
      fill="none"
      stroke="currentColor"
      strokeWidth="1.8"
    >
      <path d="M11 1.5 21 18.5H1Z" />
      <path d="M11 7v6M11 15v1.6" />
    </svg>
  )
}
