/** A thin strip of the tube to scale, with one place picked out: where in all those metres a page is about. */
import { Link } from 'react-router'
import { SEGMENT_STATES, type SegmentState } from '#app/domain/segment-states.ts'
import { chainageScale } from './scales.ts'

export interface LocatorSegment {
  tag: string
  lineCode: string
  startM: number
  endM: number
  state: SegmentState
}

const GAP = 0.15

/** @param here tag of the segment the page is about */
export function Locator({ along, here }: { along: readonly LocatorSegment[]; here: string }) {
  const ends = new Map<string, number>()
  for (const { lineCode, endM } of along) ends.set(lineCode, Math.max(ends.get(lineCode) ?? 0, endM))
  const { place } = chainageScale(
    [...ends].map(([code, lengthM]) => ({ code, lengthM })),
    100,
  )
  return (
    <nav aria-label="Segments along the tube" className="print:hidden">
      <ol className="relative h-6">
        {along.map(({ tag, lineCode, startM, endM, state }) => {
          const [from, to] = [place(lineCode, startM) ?? 0, place(lineCode, endM) ?? 0]
          return (
            <li
              key={tag}
              className="absolute inset-y-0"
              style={{ left: `${from}%`, width: `${to - from - GAP}%` }}
            >
              <Link
                to={`/segments/${tag}`}
                aria-label={`${tag}, ${SEGMENT_STATES[state].label}`}
                aria-current={tag === here ? 'page' : undefined}
                title={`${tag}, ${SEGMENT_STATES[state].label}`}
                className="group flex h-full items-center focus-visible:outline-offset-0"
              >
                <span
                  className={`block h-2 w-full group-hover:h-3.5 group-aria-[current]:h-4 ${barClass(state, tag === here)}`}
                />
              </Link>
            </li>
          )
        })}
      </ol>
    </nav>
  )
}

function barClass(state: SegmentState, here: boolean): string {
  if (SEGMENT_STATES[state].hot) return 'bg-heat'
  return here ? 'bg-ink' : 'bg-edge/45'
}
