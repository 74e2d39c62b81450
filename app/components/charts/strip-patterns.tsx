import { useId } from 'react'
import type { SegmentState } from '#app/domain/segment-states.ts'

/** Patterns for segments that are not simply under vacuum; each differs in its lines, not only in its colour. */
export function StripPatterns({ id }: { id: string }) {
  return (
    <defs>
      <pattern
        id={`${id}-hot`}
        width="7"
        height="7"
        patternUnits="userSpaceOnUse"
        patternTransform="rotate(45)"
      >
        <rect width="7" height="7" className="fill-heat-soft" />
        <rect width="2" height="7" className="fill-heat" opacity="0.55" />
      </pattern>
      <pattern id={`${id}-gas`} width="6" height="6" patternUnits="userSpaceOnUse">
        <rect width="6" height="6" className="fill-rule-2" />
        <rect width="1.2" height="6" className="fill-edge" opacity="0.55" />
      </pattern>
      <pattern id={`${id}-unknown`} width="7" height="7" patternUnits="userSpaceOnUse">
        <rect width="7" height="7" className="fill-sheet" />
        <path d="M0 0l7 7M7 0l-7 7" className="stroke-edge" strokeWidth="0.8" />
      </pattern>
    </defs>
  )
}

/** Fill of a segment by its state; null where it is under vacuum and cold. */
export function fillFor(state: SegmentState, id: string): string | null {
  switch (state) {
    case 'heating':
    case 'soak':
    case 'cooling':
      return `url(#${id}-hot)`
    case 'vented':
    case 'roughing':
    case 'not-assembled':
    case 'maintenance':
      return `url(#${id}-gas)`
    case 'unknown':
      return `url(#${id}-unknown)`
    default:
      return null
  }
}

/** What the marks of the drawing mean. */
export function StripKeys() {
  const id = useId()
  const key = 'flex items-center gap-1.5'
  return (
    <ul className="mb-2 flex flex-wrap gap-x-4 gap-y-1 text-sm text-ink-2">
      <li className={key}>
        <KeyShape>
          <circle cx="9" cy="6" r="4" className="fill-ink" />
        </KeyShape>
        reading
      </li>
      <li className={key}>
        <KeyShape>
          <path d="M9 0l5.5 6l-5.5 6l-5.5-6z" className="fill-warn" />
        </KeyShape>
        over target
      </li>
      <li className={key}>
        <KeyShape>
          <circle cx="9" cy="6" r="3.75" className="fill-sheet stroke-ink-2" strokeWidth="1.8" />
        </KeyShape>
        old reading
      </li>
      <li className={key}>
        <KeyShape>
          <path d="M0 6h18" className="stroke-vac" strokeWidth="2" />
        </KeyShape>
        predicted
      </li>
      <li className={key}>
        <KeyShape>
          <path d="M0 6h18" className="stroke-ink-3" strokeWidth="1.5" strokeDasharray="4 3" />
        </KeyShape>
        target
      </li>
      <li className={key}>
        <KeyShape>
          <path d="M9 0v3M5.5 3h7v6h-7z" className="fill-ink-2 stroke-ink-2" />
        </KeyShape>
        pump
      </li>
      <li className={key}>
        <KeyShape>
          <path d="M9 0v3M5.5 3h7v6h-7z" className="fill-sheet stroke-ink-2" />
        </KeyShape>
        mobile pump
      </li>
      {(
        [
          ['soak', 'heated'],
          ['vented', 'gas inside'],
          ['unknown', 'state unknown'],
        ] as const
      ).map(([state, word]) => (
        <li key={state} className={key}>
          <KeyShape>
            <StripPatterns id={`${id}-${state}`} />
            <rect y="0.5" width="18" height="11" fill={fillFor(state, `${id}-${state}`) ?? undefined} />
          </KeyShape>
          {word}
        </li>
      ))}
    </ul>
  )
}

function KeyShape({ children }: { children: React.ReactNode }) {
  return (
    <svg viewBox="0 0 18 12" width="18" height="12" aria-hidden="true" className="shrink-0">
      {children}
    </svg>
  )
}
