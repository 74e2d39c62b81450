/** Panels of a permit's page: what is in its way, its terms, its two clocks, its people, what has changed. */
import { Link } from 'react-router'
import type { CheckItem, Checklist } from '#app/domain/permit-checklist.ts'
import { PERMIT_SECTION_LABELS } from '#app/domain/permit-words.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitPageData, PermitPerson } from '#app/services/permit-page.server.ts'
import { DataTable } from '../ui/data-table.tsx'
import { Instant } from '../ui/instant.tsx'
import { Facts, Panel } from '../ui/panel.tsx'
import { dayText, offsetLabel, siteTimeText, spanText } from '../ui/site-time.ts'

const HOUR_MS = 3_600_000

const STATUS: Record<CheckItem['status'], { word: string; look: string }> = {
  done: { word: 'done', look: 'text-ink-2' },
  'not-done': { word: 'not done', look: 'bg-warn-soft font-semibold text-warn' },
  'not-set': { word: 'not set by site', look: 'bg-warn-soft font-semibold text-warn' },
}

/** Computed from what is on record: there is nothing to tick. */
export function ChecklistPanel({ checklist }: { checklist: Checklist }) {
  return (
    <Panel title={checklist.title}>
      <ul>
        {checklist.items.map(({ text, status, missing }) => (
          <li key={text} className="border-b border-rule-2 py-2 last:border-b-0">
            <span className="flex items-baseline justify-between gap-3">
              <span>{text}</span>
              <span className={`rounded-sm px-1.5 text-sm whitespace-nowrap ${STATUS[status].look}`}>
                {STATUS[status].word}
              </span>
            </span>
            {missing.length > 0 && (
              <ul className="mt-1 ml-4 list-disc text-sm text-ink-2">
                {missing.map((each) => (
                  <li key={each}>{each}</li>
                ))}
              </ul>
            )}
          </li>
        ))}
      </ul>
      <p className="mt-2 text-sm text-ink-3">Worked out from what is on record; it cannot be ticked here.</p>
    </Panel>
  )
}

function figure(value: number | null, unit: string): string {
  return value === null ? 'not said' : `${Number(value.toFixed(2))} ${unit}`
}

export function TermsPanel({ content }: PermitPageData) {
  const { unattended } = content
  return (
    <Panel title="Terms">
      <Facts
        items={[
          { name: 'Highest temperature', value: figure(content.maxCelsius, '°C') },
          { name: 'Fastest ramp', value: figure(content.rampKH, '°C/h') },
          { name: 'Soak', value: figure(content.soakHours, 'h') },
          { name: 'Supply set', value: content.supply ?? 'none' },
          { name: 'Highest current', value: figure(content.maxAmps, 'A') },
          { name: 'Highest voltage under load', value: figure(content.maxVolts, 'V') },
          { name: 'Open-circuit voltage', value: figure(content.openCircuitVolts, 'V') },
          {
            name: 'Heated with nobody there',
            value: unattended === null ? 'not said' : unattended ? 'yes, see the annex' : 'no',
          },
        ]}
      />
      <Words name="Work" text={content.work} />
      <Words name="Not included" text={content.notIncluded} />
      <Words name="Earthing" text={content.earthing} />
      <Words name="Night cover" text={content.nightCover} />
      {unattended === true && (
        <>
          <Words name="Annex: alarms" text={content.annex.alarms} />
          <Words
            name="Annex: on call within"
            text={content.annex.onCallMinutes === null ? '' : `${content.annex.onCallMinutes} min`}
          />
          <Words name="Annex: automatic shut-off" text={content.annex.shutOff} />
        </>
      )}
    </Panel>
  )
}

export function ProtectionPanel({ content }: PermitPageData) {
  return (
    <Panel title="Protection, signs and rescue" id="protection" className="scroll-mt-4">
      <Words name="Protective equipment" text={content.protectiveEquipment} />
      <Words name="Barriers" text={content.barriers} />
      <Words name="Signs" text={content.signs} />
      <Words name="Lighting" text={content.lighting} />
      <Words name="Rescue" text={content.rescue} />
      <Words name="Assembly point" text={content.assemblyPoint} />
      {content.contacts.length > 0 && (
        <ul className="mt-2">
          {content.contacts.map(({ role, name, phone }) => (
            <li key={`${role} ${phone}`} className="flex justify-between gap-4 py-0.5">
              <span>
                {role}
                {name !== '' && `, ${name}`}
              </span>
              <span className="font-medium whitespace-nowrap">{phone}</span>
            </li>
          ))}
        </ul>
      )}
    </Panel>
  )
}

function Words({ name, text }: { name: string; text: string }) {
  if (text === '') return null
  return (
    <p className="mt-2">
      <span className="text-ink-2">{name}: </span>
      <span className="whitespace-pre-line">{text}</span>
    </p>
  )
}

/** The two clocks of a permit, each in words: the window that an officer gave, and what the holder keeps alive. */
export function ValidityPanel({ state, windowFrom, windowTo, currentUntil, ...rest }: PermitPageData) {
  const { zone, now } = useSite()
  const inside = windowFrom !== null && windowFrom <= now
  return (
    <Panel title="Validity">
      <h3 className="font-semibold">Window</h3>
      {windowFrom === null || windowTo === null ? (
        <p className="text-ink-2">None asked for yet.</p>
      ) : (
        <>
          <p>
            {siteTimeText(windowFrom, zone)} ({offsetLabel(windowFrom, zone)}) to{' '}
            {siteTimeText(windowTo, zone)} ({offsetLabel(windowTo, zone)}),{' '}
            {hoursText(windowTo.getTime() - windowFrom.getTime())} in all
          </p>
          <p className="text-sm text-ink-2">
            {windowTo <= now
              ? 'It has ended.'
              : inside
                ? `${spanText(windowTo.getTime() - now.getTime())} of it are left.`
                : `It begins in ${spanText(windowFrom.getTime() - now.getTime())}.`}
            {rest.extensions > 0 &&
              ` Extended ${rest.extensions === 1 ? 'once' : `${rest.extensions} times`}, by ${rest.extendedHours} h.`}
          </p>
        </>
      )}
      <h3 className="mt-3 font-semibold">Current validity</h3>
      {currentUntil === null ? (
        <p className="text-ink-2">
          {state === 'expired'
            ? 'Run out. It does not come back.'
            : 'Begins when the holder accepts on site.'}
        </p>
      ) : (
        <>
          <p>
            until {siteTimeText(currentUntil, zone)} ({offsetLabel(currentUntil, zone)})
          </p>
          <p className="text-sm text-ink-2">
            {spanText(currentUntil.getTime() - now.getTime())} left.{' '}
            {state === 'suspended'
              ? 'It runs on while work is stopped.'
              : 'Signed for again on site before then, or the permit runs out.'}
          </p>
        </>
      )}
    </Panel>
  )
}

function hoursText(ms: number): string {
  return `${Number((ms / HOUR_MS).toFixed(1))} h`
}

export function PeoplePanel({
  people,
  requestedBy,
  approvedBy,
  createdBy,
  approvedAt,
  requestedAt,
}: PermitPageData) {
  return (
    <Panel title="People">
      <ul>
        {people.map((person) => (
          <PersonLine key={`${person.role} ${person.name}`} person={person} />
        ))}
      </ul>
      <p className="mt-2 text-sm text-ink-2">
        Drafted by {createdBy}
        {requestedBy !== null && requestedAt !== null && (
          <>
            ; asked for by {requestedBy}, <Instant at={requestedAt} />
          </>
        )}
        {approvedBy !== null && approvedAt !== null && (
          <>
            ; approved by {approvedBy}, <Instant at={approvedAt} />
          </>
        )}
        .
      </p>
    </Panel>
  )
}

function PersonLine({ person: { role, name, competences } }: { person: PermitPerson }) {
  const { zone } = useSite()
  return (
    <li className="border-b border-rule-2 py-1.5 last:border-b-0">
      <span className="flex justify-between gap-4">
        <span className="text-ink-2">{role}</span>
        <span className="text-right font-medium">{name}</span>
      </span>
      {competences.map(({ label, number, endsAt, endsInside }) => (
        <span
          key={`${label} ${number}`}
          className={`block text-right text-sm ${endsInside ? 'font-semibold text-bad' : 'text-ink-3'}`}
        >
          {label}
          {number !== '' && ` ${number}`}
          {endsAt === null ? ', without an end' : `, ends ${dayText(new Date(endsAt.getTime() - 1), zone)}`}
          {endsInside && ': inside the window'}
        </span>
      ))}
    </li>
  )
}

/** What was approved and what stands now, side by side. */
export function DifferencesPanel({ differences, approvedVersion, version, state }: PermitPageData) {
  if (differences.length === 0) return null
  return (
    <Panel title={`Changed since version ${approvedVersion} was approved`}>
      <p className="mb-2 text-ink-2">
        {state === 'requested'
          ? 'That approval is void. Copies of it that are posted at the site are superseded.'
          : 'What was approved, and what the newest version says.'}
      </p>
      <DataTable
        caption="Approved version and newest version side by side"
        columns={[
          {
            key: 'what',
            head: 'What',
            rowHead: true,
            cell: ({ section, label }) => (
              <>
                {label}
                <span className="block text-xs font-normal text-ink-3">{PERMIT_SECTION_LABELS[section]}</span>
              </>
            ),
          },
          {
            key: 'before',
            head: `Version ${approvedVersion}, approved`,
            cell: ({ before }) => <Said text={before} />,
          },
          {
            key: 'after',
            head: `Version ${version}`,
            cell: ({ after }) => (
              <b className="font-semibold">
                <Said text={after} />
              </b>
            ),
          },
        ]}
        rows={differences}
        rowKey={({ section, label }) => `${section} ${label}`}
        empty="Nothing."
      />
    </Panel>
  )
}

function Said({ text }: { text: string }) {
  return text === '' ? (
    <span className="text-ink-3">nothing</span>
  ) : (
    <span className="whitespace-pre-line">{text}</span>
  )
}

/** A fact of its own: it follows from no state of the permit. */
export function HeatingPanel({ heating, number, may }: PermitPageData) {
  const word = heating.on === null ? 'not known' : heating.on ? 'on' : 'off'
  return (
    <Panel
      title="Heating"
      aside={
        <Link to={`/permits/${number}/heating`} className="link inline-block py-1 text-sm">
          {may.heating ? 'Say what you found' : 'What was said'}
        </Link>
      }
    >
      <p>
        <strong className={heating.on === true ? 'text-heat' : heating.on === null ? 'text-warn' : ''}>
          Heating is {word}.
        </strong>{' '}
        {heating.on === null && <strong className="font-semibold">Take it for on. </strong>}
        {heating.text}
      </p>
      {heating.since !== null && (
        <p className="text-sm text-ink-2">
          So since <Instant at={heating.since} age />
        </p>
      )}
    </Panel>
  )
}

export function RecentPanel({ number, recent }: PermitPageData) {
  return (
    <Panel
      title="Last acts"
      aside={
        <Link to={`/permits/${number}/history`} className="link inline-block py-1 text-sm">
          Whole story
        </Link>
      }
    >
      <ul>
        {recent.map(({ text, at }) => (
          <li key={`${at.toISOString()} ${text}`} className="border-b border-rule-2 py-1.5 last:border-b-0">
            {text}
            <Instant at={at} className="block text-sm text-ink-3" />
          </li>
        ))}
      </ul>
    </Panel>
  )
}
