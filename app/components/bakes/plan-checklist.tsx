/** The checklist of a plan. What records show cannot be ticked; each tick is a form of its own, so that it needs no script. */
import { Form } from 'react-router'
import type { ReadinessItem } from '#app/domain/bake-plan-readiness.ts'
import { Button } from '../ui/button.tsx'
import { Instant } from '../ui/instant.tsx'

export function PlanChecklist({ items, mayTick }: { items: readonly ReadinessItem[]; mayTick: boolean }) {
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
                <Item key={item.key} item={item} mayTick={mayTick} />
              ))}
          </ul>
        </section>
      ))}
    </div>
  )
}

function Item({ item, mayTick }: { item: ReadinessItem; mayTick: boolean }) {
  const { key, label, kind, met, blocking, detail, at } = item
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
