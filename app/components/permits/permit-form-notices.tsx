/** What the permit form says about itself: what it lacks, what cannot be read, who changed it meanwhile, what is saved. */
import { useEffect, useRef } from 'react'
import type { MissingPart } from '#app/domain/permit-facts.ts'
import { PERMIT_SECTION_LABELS, PERMIT_SECTIONS } from '#app/domain/permit-words.ts'
import { useSite } from '#app/hooks/use-site.ts'
import type { PermitFormAnswer } from '#app/services/permit-form.server.ts'
import { ButtonLink } from '../ui/button.tsx'
import { Notice } from '../ui/notice.tsx'
import { offsetLabel, siteTimeText, timeText } from '../ui/site-time.ts'
import { fieldAddress } from './permit-fields.tsx'
import type { SaveStatus } from './use-permit-saving.ts'

export interface Fault {
  field: string
  text: string
}

/** Goes to a field by the browser's own link, so that it works without script and sets the focus. */
function FieldLink({ field, children }: { field: string; children: React.ReactNode }) {
  return (
    <a className="link inline-block min-h-6 py-0.5" href={`#${fieldAddress(field)}`}>
      {children}
    </a>
  )
}

/** What could not be saved and why, with a way to each field. It takes the focus when it appears. */
export function FaultList({ message, faults }: { message: string | undefined; faults: readonly Fault[] }) {
  const ref = useRef<HTMLDivElement>(null)
  useEffect(() => {
    if (message !== undefined || faults.length > 0) ref.current?.focus()
  }, [message, faults])
  if (message === undefined && faults.length === 0) return null
  const placed = faults.filter(({ field }) => field !== 'form')
  const count = new Set(placed.map(({ field }) => field)).size
  return (
    <div ref={ref} tabIndex={-1} role="alert" className="mb-4 border-l-4 border-bad bg-bad-soft px-3 py-2">
      <p className="font-medium">
        {message ??
          `${count === 1 ? 'One field needs' : `${count} fields need`} another look; nothing has been saved.`}
      </p>
      <ul className="list-disc pl-5">
        {faults.map(({ field, text }) => (
          <li key={`${field} ${text}`}>
            {field === 'form' ? text : <FieldLink field={field}>{text}</FieldLink>}
          </li>
        ))}
      </ul>
    </div>
  )
}

/** What a request still lacks. Whoever asked for it goes on from here. */
export function MissingList({ missing, number }: { missing: readonly MissingPart[]; number: string }) {
  const ref = useRef<HTMLDivElement>(null)
  useEffect(() => ref.current?.focus(), [])
  if (missing.length === 0) {
    return (
      <Notice announce="status" lead="Nothing is missing. ">
        Whether it is right is for you and for the officer.
        <span className="mt-2 block">
          <ButtonLink to={`/permits/${number}?act=request#act`}>Go on to request</ButtonLink>
        </span>
      </Notice>
    )
  }
  const sections = PERMIT_SECTIONS.filter((section) => missing.some((part) => part.section === section))
  return (
    <div ref={ref} tabIndex={-1} className="mb-4 border-l-4 border-warn bg-warn-soft px-3 py-2">
      <p className="font-medium">
        {missing.length === 1 ? 'One thing is' : `${missing.length} things are`} still missing for a request:
      </p>
      <div className="lg:columns-2">
        {sections.map((section) => (
          <div key={section} className="unbroken mt-2">
            <p className="text-sm font-medium">{PERMIT_SECTION_LABELS[section]}</p>
            <ul className="list-disc pl-5">
              {missing
                .filter((part) => part.section === section)
                .map(({ field, text }) => (
                  <li key={`${field} ${text}`}>
                    <FieldLink field={field}>{text}</FieldLink>
                  </li>
                ))}
            </ul>
          </div>
        ))}
      </div>
    </div>
  )
}

/** Somebody was faster: what they did, and that nothing typed has gone. */
export function ChangedMeanwhile({ answer }: { answer: Extract<PermitFormAnswer, { kind: 'changed' }> }) {
  const { zone } = useSite()
  const { since, differences, both } = answer
  return (
    <div role="alert" className="mb-4 border-l-4 border-warn bg-warn-soft px-3 py-2">
      <p className="font-medium">
        Not saved yet: this permit was changed since you opened it. What you typed stands in the form,
        together with what others saved in fields that you left alone. Look it through, then press Save.
      </p>
      <ul className="list-disc pl-5">
        {since.map(({ who, what, at }) => (
          <li key={`${who} ${what} ${at.toISOString()}`}>
            {who}: {what}, {siteTimeText(at, zone)} {offsetLabel(at, zone)}
          </li>
        ))}
        {differences.map(({ label, before, after }) => (
          <li key={label}>
            {label}: {before === '' ? 'nothing' : `“${before}”`} became{' '}
            {after === '' ? 'nothing' : `“${after}”`}
            {both.includes(label) && (
              <strong className="font-semibold"> (you changed this too: yours stands)</strong>
            )}
          </li>
        ))}
      </ul>
    </div>
  )
}

/** One line on whether what stands in the form is saved. */
export function SaveWords({ status, asTyped }: { status: SaveStatus; asTyped: boolean }) {
  const { zone } = useSite()
  return (
    <p role="status" className="text-sm text-ink-2">
      {wordsOf(status, asTyped, zone)}
    </p>
  )
}

function wordsOf(status: SaveStatus, asTyped: boolean, zone: string): string {
  switch (status.kind) {
    case 'as-loaded':
      return asTyped
        ? 'Saved as you type; without script, by the buttons.'
        : 'Saved when you press the button.'
    case 'typed':
      return asTyped ? 'Not saved yet.' : 'Not saved. What you typed is kept in this browser.'
    case 'saving':
      return 'Saving…'
    case 'saved':
      return `Saved ${timeText(status.at, zone)}.`
    case 'unreadable':
      return `Not saved yet: ${status.count === 1 ? 'one field' : `${status.count} fields`} cannot be read or is not finished. What you typed is kept in this browser.`
    case 'refused':
      return 'Not saved: see above. What you typed is kept in this browser.'
    case 'changed':
      return 'Not saved: somebody changed the permit. See above, then press Save.'
    case 'signed-out':
      return 'Not saved: you are signed out. What you typed is kept in this browser.'
    case 'offline':
      return 'Not saved: no connection. What you typed is kept in this browser and sent again by itself.'
  }
}
