/** The checklist of a plan. What records show cannot be ticked; each tick is a form of its own, so that it needs no script. */
import { Form, Link } from 'react-router'
import type { ReadinessItem } from '#app/domain/bake-plan-readiness.ts'
import { Button } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'

interface PlanChecklistProps {
  planId: number
  items: readonly ReadinessItem[]
  /** Whether the reader works at the tube: ticks, tests and log entries are theirs. */
  mayTick: boolean
  mayPlan: boolean
}

export function PlanChecklist({ items, ...who }: PlanChecklistProps) {
  const parts = [
    { kind: 'computed', title: 'What the records show' },
    { kind: 'ticked', title: 'What is done by hand' },
  ] as const
  return (
    <div className="grid gap-x-8 gap-y-4 lg:grid-cols-2">
      {parts.map(({ kind, title }) => (
        <section key={kind} aria-label={title} className="min-w-0">
          <h3 className="mb-1 font-medium">{title}</h3>
          <ul>
            {items
              .filter((item) => item.kind === kind)
              .map((item) => (
                <Item key={item.key} item={item} {...who} />
              ))}
          </ul>
        </section>
      ))}
    </div>
  )
}

/** Where a missing item is mended; null where that is no page, or not for this reader. */
function remedyOf(key: string, { planId, mayTick, mayPlan }: Omit<PlanChecklistProps, 'items'>) {
  const [, what, tag] = /^(leak-checked|isolation-test)-(.+)$/.exec(key) ?? []
  if (what === 'leak-checked' && mayTick)
    return { to: `/logbook/new?segment=${tag}`, words: 'Write the entry' }
  if (what === 'isolation-test' && mayTick)
    return { to: `/segments/${tag}/isolation-tests/new`, words: `Test ${tag}` }
  if (['supply', 'cart-named', 'electrician'].includes(key) && mayPlan)
    return { to: `/bakes/plans/new?of=${planId}`, words: 'Change the plan' }
  return null
}

function Item({ item, ...who }: { item: ReadinessItem } & Omit<PlanChecklistProps, 'items'>) {
  const { key, label, kind, met, blocking, detail, at } = item
  const { mayTick } = who
  const remedy = met ? null : remedyOf(key, who)
  return (
    <li className="flex gap-2.5 border-b border-rule-2 py-2">
      <Mark met={met} blocking={blocking} />
      <div className="min-w-0 flex-1">
        <p className="font-medium">{label}</p>
        {(detail !== '' || at !== null) && (
          <p className={`text-sm ${met || !blocking ? 'text-ink-2' : 'text-warn'}`}>
            {detail}
            {at !== null && (
              <>
                {detail === '' ? '' : ' '}
                <Instant at={at} />
              </>
            )}
          </p>
        )}
        {remedy !== null && (
          <Link to={remedy.to} className="link text-sm print:hidden">
            {remedy.words}
          </Link>
        )}
      </div>
      {kind === 'ticked' && mayTick && (
        <Form method="post" preventScrollReset className="shrink-0 print:hidden">
          <input type="hidden" name="act" value="tick" />
          <input type="hidden" name="item" value={key} />
          <input type="hidden" name="done" value={met ? 'no' : 'yes'} />
          <Button aria-label={met ? `Take back: ${label}` : `Tick: ${label}`}>
            {met ? 'Take back' : 'Tick'}
          </Button>
        </Form>
      )}
    </li>
  )
}

function Mark({ met, blocking }: { met: boolean; blocking: boolean }) {
  const word = met ? 'Done: ' : blocking ? 'Missing: ' : 'To be judged: '
  return (
    <span className="mt-0.5 shrink-0">
      <svg viewBox="0 0 18 18" width="18" height="18" aria-hidden="true">
        <rect
          x="1.5"
          y="1.5"
          width="15"
          height="15"
          rx="2"
          strokeWidth="1.5"
          className={met ? 'fill-vac-soft stroke-vac' : 'fill-none stroke-warn'}
        />
        {met ? (
          <path d="M4.5 9.5l3 3 6-7" fill="none" strokeWidth="2" className="stroke-vac" />
        ) : (
          !blocking && <path d="M5 9h8" strokeWidth="2" className="stroke-warn" />
        )}
      </svg>
      <span className="sr-only">{word}</span>
    </span>
  )
}
