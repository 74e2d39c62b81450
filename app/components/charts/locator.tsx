/** A thin strip of the tube to scale, with one place picked out: where in all those metres a page is about. */
import { useEffect, useRef } from 'react'
import { Link } from 'react-router'
import { SEGMENT_STATES, type SegmentState } from '#app/domain/segment-states.ts'
import { chainageScale } from './scales.ts'

interface LocatorSegment {
  tag: string
  lineCode: string
  startM: number
  endM: number
  state: SegmentState
}

/** Per cent of the strip left free between two segments. */
const GAP = 0.15

/** @param here tag of the segment that the page is about, or tags where it is about several */
export function Locator({
  along,
  here,
}: {
  along: readonly LocatorSegment[]
  here: string | readonly string[]
}) {
  const marked = [here].flat()
  const scrollerRef = useRef<HTMLElement>(null)
  const ends = new Map<string, number>()
  for (const { lineCode, endM } of along) ends.set(lineCode, Math.max(ends.get(lineCode) ?? 0, endM))
  const { place } = chainageScale(
    [...ends].map(([code, lengthM]) => ({ code, lengthM })),
    100,
  )
  const own = along.find(({ tag }) => marked.includes(tag))
  const middle = own === undefined ? 0 : (place(own.lineCode, (own.startM + own.endM) / 2) ?? 0) / 100

  // Narrower than its links need, the strip scrolls; it then opens on the segment the page is about.
  useEffect(() => {
    const scroller = scrollerRef.current
    if (scroller !== null) scroller.scrollLeft = scroller.scrollWidth * middle - scroller.clientWidth / 2
  }, [middle])

  return (
    <nav ref={scrollerRef} aria-label="Segments along the tube" className="overflow-x-auto print:hidden">
      <ol className="relative h-8 min-w-[46rem]">
        {along.map(({ tag, lineCode, startM, endM, state }) => {
          const [from, to] = [place(lineCode, startM) ?? 0, place(lineCode, endM) ?? 0]
          return (
            <li
              key={tag}
              className="absolute inset-y-0.5"
              style={{ left: `${from}%`, width: `${to - from - GAP}%` }}
            >
              <Link
                to={`/segments/${tag}`}
                aria-label={`${tag}, ${SEGMENT_STATES[state].label}`}
                aria-current={marked.includes(tag) ? (tag === here ? 'page' : 'location') : undefined}
                title={`${tag}, ${SEGMENT_STATES[state].label}`}
                className="group flex h-full items-center focus-visible:-outline-offset-2"
              >
                <span
                  className={`block h-2 w-full group-hover:h-3.5 group-aria-[current]:h-4 ${barClass(state, marked.includes(tag))}`}
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
