/**
 * Shape and word of a segment's state. Fourteen shapes that differ without colour: what belongs to a bake is
 * round, everything else is square, what nobody can say is hatched. Colour comes third.
 */
import { SEGMENT_STATES, type SegmentState } from '#app/domain/segment-states.ts'

const INK = 'fill-ink-2 stroke-ink-2'
const VAC = 'stroke-vac'
const HEAT = 'stroke-heat'

function Square({ className }: { className: string }) {
  return (
    <rect x="1.75" y="1.75" width="10.5" height="10.5" rx="1.5" strokeWidth="1.5" className={className} />
  )
}

function Round({ className }: { className: string }) {
  return <circle cx="7" cy="7" r="5.25" strokeWidth="1.5" className={className} />
}

function shapeOf(state: SegmentState): React.ReactNode {
  switch (state) {
    case 'not-assembled':
      return (
        <path
          d="M4.5 1.75H1.75V12.25H4.5M9.5 1.75H12.25V12.25H9.5"
          fill="none"
          strokeWidth="1.5"
          className="stroke-ink-2"
        />
      )
    case 'vented':
      return (
        <>
          <Square className="fill-none stroke-ink-3" />
          <path d="M5 2v10M9 2v10" strokeWidth="1.2" className="stroke-ink-3" />
        </>
      )
    case 'roughing':
      return (
        <>
          <Square className={`fill-none ${VAC}`} />
          <rect x="2" y="9.2" width="10" height="2.8" className="fill-vac" />
        </>
      )
    case 'pumping':
      return (
        <>
          <Square className={`fill-none ${VAC}`} />
          <rect x="2" y="2" width="5" height="10" className="fill-vac" />
        </>
      )
    case 'isolated-test':
      return (
        <>
          <Square className="fill-none stroke-ink-2" />
          <rect
            x="4.6"
            y="4.6"
            width="4.8"
            height="4.8"
            fill="none"
            strokeWidth="1.2"
            className="stroke-ink-2"
          />
        </>
      )
    case 'leak-hunt':
      return (
        <>
          <Square className="fill-none stroke-warn" />
          <circle cx="7" cy="7" r="2.1" className="fill-warn" />
        </>
      )
    case 'in-service':
      return <Square className={INK} />
    case 'bake-prep':
      return <Round className={`fill-none ${HEAT}`} />
    case 'heating':
      return (
        <>
          <Round className={`fill-none ${HEAT}`} />
          <path d="M1.75 7a5.25 5.25 0 0 0 10.5 0z" className="fill-heat" />
        </>
      )
    case 'soak':
      return <Round className={`fill-heat ${HEAT}`} />
    case 'cooling':
      return (
        <>
          <Round className={`fill-none ${HEAT}`} />
          <path d="M1.75 7a5.25 5.25 0 0 1 10.5 0z" className="fill-heat" />
        </>
      )
    case 'post-bake-test':
      return (
        <>
          <Round className="fill-none stroke-ink-2" />
          <circle cx="7" cy="7" r="2.1" className="fill-ink-2" />
        </>
      )
    case 'maintenance':
      return (
        <>
          <Square className="fill-none stroke-ink-2" />
          <path d="M3.5 3.5l7 7M10.5 3.5l-7 7" strokeWidth="1.4" className="stroke-ink-2" />
        </>
      )
    case 'unknown':
      return (
        <>
          <Square className="fill-none stroke-ink-3" />
          <path d="M2 6l4-4M2 10.5l8.5-8.5M4 12l8-8M8 12l4-4" strokeWidth="1.2" className="stroke-ink-3" />
        </>
      )
  }
}

/** The shape alone, for a legend or a drawing that says the word itself. */
export function StateShape({ state, className = '' }: { state: SegmentState; className?: string }) {
  return (
    <svg
      viewBox="0 0 14 14"
      width="14"
      height="14"
      aria-hidden="true"
      className={`inline-block shrink-0 ${className}`}
    >
      {shapeOf(state)}
    </svg>
  )
}

/**
 * Shape and word.
 *
 * @param detail what follows the word, such as "150 °C, day 4 of 7"
 */
export function StateMark({ state, detail }: { state: SegmentState; detail?: React.ReactNode }) {
  return (
    <span>
      {/* Shape and word stay together, also where a table on paper squeezes its columns. */}
      <span className="whitespace-nowrap">
        <StateShape state={state} className="mr-1.5 align-[-0.12em]" />
        {SEGMENT_STATES[state].label}
      </span>
      {detail !== undefined && <>, {detail}</>}
    </span>
  )
}
