/** The frame of the tablet pages at a heated segment: whose session it is, how the permit stands, and where to go. */
import { Form, Link } from 'react-router'
import { useOnline } from '#app/hooks/use-online.ts'
import type { SiteHead } from '#app/services/permit-site.server.ts'
import { Button } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'
import { Notice } from '../ui/notice.tsx'
import { DangerPanel } from './danger-panel.tsx'
import { PermitMark } from './permit-mark.tsx'

/** Every control at least 56 px high, in one column, with room between: it is used with gloves. */
const GLOVES =
  'mx-auto max-w-[40rem] [&_button]:min-h-14! [&_input:not([type=checkbox]):not([type=radio])]:min-h-14! [&_select]:min-h-14! [&_summary]:min-h-14 [&_textarea]:min-h-28!'

const OFFLINE =
  'This device has no network. What needs the register waits: nothing is approved, issued, signed or taken away from here until it is back. In danger stop the work and tell people by radio.'

const PAGES = [
  { path: '', label: 'Overview' },
  { path: '/locks', label: 'Locks' },
  { path: '/tests', label: 'Tests' },
  { path: '/rounds', label: 'Rounds' },
]

/**
 * @param here end of this page's address, such as `/locks`; empty for the overview
 * @param title what this page is for
 */
export function SiteFrame({
  head,
  here,
  title,
  children,
}: {
  head: SiteHead
  here: string
  title: string
  children: React.ReactNode
}) {
  const online = useOnline()
  const site = `/permits/${head.number}/site`
  return (
    <div className={GLOVES}>
      <Session name={head.actor.name} />
      <h1>
        <Link to={`/permits/${head.number}`} className="link">
          {head.number}
        </Link>{' '}
        <span className="block text-lg font-normal text-ink-2">{title}</span>
      </h1>
      <State head={head} />
      {!online && (
        <Notice tone="warn" announce="status" lead="Offline. ">
          {OFFLINE}
        </Notice>
      )}
      <DangerPanel events={head.dangers} mayTolerate={false} mayState={head.mayState} />
      <nav aria-label="At the segment" className="mb-4">
        <ul className="grid grid-cols-2 gap-2 sm:grid-cols-4">
          {PAGES.map(({ path, label }) => (
            <li key={path}>
              <Link
                to={`${site}${path}`}
                aria-current={path === here ? 'page' : undefined}
                className="flex min-h-14 items-center justify-center rounded-md border border-edge bg-sheet px-2 font-medium aria-[current]:border-2 aria-[current]:border-ink aria-[current]:font-semibold"
              >
                {label}
              </Link>
            </li>
          ))}
        </ul>
      </nav>
      {children}
      <p className="mt-6 text-sm text-ink-3">
        Ebbline writes down what people have done. It does not isolate, switch off or protect.
      </p>
    </div>
  )
}

/** A tablet is handed around: whoever signs has to see whose session it is. */
function Session({ name }: { name: string }) {
  return (
    <div className="mb-3 flex flex-wrap items-center justify-between gap-2 rounded-md border bg-sheet px-3 py-2 print:hidden">
      <p>
        Signed in: <strong className="font-semibold">{name}</strong>
      </p>
      <Form method="post" action="/sign-out">
        <Button>Not {name}? Sign out</Button>
      </Form>
    </div>
  )
}

function State({ head }: { head: SiteHead }) {
  const { state, segments, fromM, toM, holder, currentUntil } = head
  const place = fromM === null || toM === null ? '' : `, ${fromM} to ${toM} m`
  return (
    <div className="my-3 rounded-md border-2 border-ink bg-sheet px-3 py-3">
      <p className="text-2xl font-semibold">
        <PermitMark state={state} />
      </p>
      <p className="mt-1 text-lg">
        {segments.join(' + ')}
        {place}
      </p>
      <p className="text-ink-2">
        {holder === null ? 'Nobody holds it yet' : `Held by ${holder}`}
        {currentUntil !== null && (
          <>
            {', valid until '}
            <Instant at={currentUntil} age />
          </>
        )}
      </p>
    </div>
  )
}

/** Sends a form. Without a network it says why it cannot. */
export function SiteSubmit({
  children,
  kind = 'primary',
  sending,
}: {
  children: React.ReactNode
  kind?: 'primary' | 'plain' | 'danger'
  sending: boolean
}) {
  const online = useOnline()
  return (
    <>
      <Button kind={kind} disabled={sending || !online} className="w-full text-lg">
        {children}
      </Button>
      {!online && <p className="mt-1 text-sm text-warn">Not while this device is offline.</p>}
    </>
  )
}

/** A link to a place where something is signed; without a network it does not lead there. */
export function SiteLink({ to, children }: { to: string; children: React.ReactNode }) {
  const online = useOnline()
  const look =
    'flex min-h-14 w-full items-center justify-center rounded-md border px-3.5 py-2 text-center text-lg font-medium'
  if (!online) {
    return (
      <p aria-disabled="true" className={`${look} border-rule bg-rule-2 text-ink-2`}>
        {children}: not while offline
      </p>
    )
  }
  return (
    <Link to={to} className={`${look} border-ink bg-sheet`}>
      {children}
    </Link>
  )
}

/** A step that opens when it is wanted, or when what was typed into it was refused. */
export function SiteStep({
  label,
  open,
  children,
}: {
  label: string
  open: boolean
  children: React.ReactNode
}) {
  return (
    <details open={open} className="group mb-2 rounded-md border border-edge">
      <summary className="flex items-center px-3 font-medium marker:content-none">
        <span aria-hidden="true" className="mr-2 group-open:rotate-90">
          ▸
        </span>
        {label}
      </summary>
      <div className="border-t px-3 py-3">{children}</div>
    </details>
  )
}
