/** Where a segment lies along the tube: a thin strip to scale, each piece a way to its own page. */
import { Link } from 'react-router'
import { SEGMENT_STATES, type SegmentState } from '#app/domain/segment-states.ts'

interface Piece {
  tag: string
  lineCode: string
  startM: number
  endM: number
  state: SegmentState
}

export function Locator({ along, here }: { along: readonly Piece[]; here: string }) {
  return (
    <nav aria-label="Segments along the tube" className="print:hidden">
      <ol className="flex gap-0.5">
        {along.map((piece, index) => (
          <li
            key={piece.tag}
            className={`min-w-0 ${along[index - 1] !== undefined && along[index - 1]?.lineCode !== piece.lineCode ? 'ml-3' : ''}`}
            style={{ flexGrow: piece.endM - piece.startM, flexBasis: 0 }}
          >
            <Link
              to={`/segments/${piece.tag}`}
              aria-current={piece.tag === here ? 'page' : undefined}
              title={`${piece.tag}, ${SEGMENT_STATES[piece.state].label}`}
              className="group block py-2"
            >
              <span
                className={`block h-2 ${piece.tag === here ? 'bg-ink' : SEGMENT_STATES[piece.state].hot ? 'bg-heat' : 'bg-rule group-hover:bg-ink-3'}`}
              />
              <span className="sr-only">
                {piece.tag}, {SEGMENT_STATES[piece.state].label}
              </span>
            </Link>
          </li>
        ))}
      </ol>
    </nav>
  )
}
