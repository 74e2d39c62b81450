/** Shape and word of a permit's state. The shapes differ without colour; colour comes third. */
import { PERMIT_STATE_LABELS, type PermitState } from '#app/domain/permit-words.ts'

const LINE = { fill: 'none', strokeWidth: 1.5 }

/** A sheet of paper, which every permit is; what is on it says the state. */
function Sheet({ className, dashed = false }: { className: string; dashed?: boolean }) {
  return (
    <path
      {...LINE}
      d="M2.75 1.5h6l2.5 2.5v8.5h-8.5z"
      strokeDasharray={dashed ? '2 1.4' : undefined}
      className={className}
    />
  )
}

function shapeOf(state: PermitState): React.ReactNode {
  switch (state) {
    case 'draft':
      return <Sheet className="stroke-ink-3" dashed />
    case 'requested':
      return (
        <>
          <Sheet className="stroke-vac" />
          <circle cx="7" cy="8" r="1.8" className="fill-vac" />
        </>
      )
    case 'returned':
      return (
        <>
          <Sheet className="stroke-warn" />
          <path {...LINE} d="M9 8H5.2m1.6-1.8L5 8l1.8 1.8" className="stroke-warn" />
        </>
      )
    case 'approved':
      return (
        <>
          <Sheet className="stroke-vac" />
          <path {...LINE} d="M4.8 8l1.6 1.7 2.8-3.4" className="stroke-vac" />
        </>
      )
    case 'issued':
      return <path d="M2 .9h7l3 3v9.2H2z" className="fill-heat" />
    case 'suspended':
      return (
        <>
          <Sheet className="stroke-bad" />
          <path d="M4.7 6h1.7v4.6H4.7zM7.6 6h1.7v4.6H7.6z" className="fill-bad" />
        </>
      )
    case 'expired':
      return (
        <>
          <Sheet className="stroke-bad" />
          <path {...LINE} d="M4.8 5.8l4.4 4.6M9.2 5.8l-4.4 4.6" className="stroke-bad" />
        </>
      )
    case 'handed-back':
      return (
        <>
          <Sheet className="stroke-ink-2" />
          <path d="M3.5 7.4h7v4.3h-7z" className="fill-ink-2" />
        </>
      )
    case 'cancelled':
      return <path d="M2 .9h7l3 3v9.2H2z" className="fill-ink-3" />
    case 'refused':
    case 'lapsed':
    case 'withdrawn':
    case 'discarded':
      return (
        <>
          <Sheet className="stroke-ink-3" />
          <path {...LINE} d="M3 12.4L11 4" className="stroke-ink-3" />
        </>
      )
  }
}

/** Shape and word of a permit's state, on one line. */
export function PermitMark({ state }: { state: PermitState }) {
  return (
    <span className="whitespace-nowrap">
      <svg
        viewBox="0 0 14 14"
        width="14"
        height="14"
        aria-hidden="true"
        className="mr-1.5 inline-block align-[-0.12em]"
      >
        {shapeOf(state)}
      </svg>
      {PERMIT_STATE_LABELS[state]}
    </span>
  )
}
