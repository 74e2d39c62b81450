/** Whether a gauge moved when its own segment did: what known events say about two channels. Pure. */
import { meanOver } from './crossed-series.ts'

/** Something of which it is known when it happened, and to which segment. */
export interface KnownEvent {
  atMs: number
  segment: string
  kind: 'state' | 'log' | 'pump' | 'gauge-exchange'
  /** What it was, such as `set to Isolated test`. */
  text: string
}

export interface EventJudgement {
  event: KnownEvent
  /** Steps over the event, as factors of pressure: of the segments' other gauges, and of the two channels. */
  steps: { own: number; neighbour: number; x: number; y: number }
  /** `unclear`: one channel says this and the other that, or neither side. */
  verdict: 'straight' | 'crossed' | 'unclear'
}

/** Bins that a step is taken over on either side, and how many of them must have something. */
const SIDE_BINS = 3
const LEAST_OF_SIDE = 2
/** The segments must have moved apart by this, ln, for a channel's step to tell them apart: about a sixth. */
const LEAST_APART = 0.15
/** A step belongs to the segment that it misses by less than this share of what lies between the two. */
const NEAR = 0.35

interface Sides {
  x: { ln: readonly number[]; segment: string }
  y: { ln: readonly number[]; segment: string }
  fromMs: number
  binMs: number
  events: readonly KnownEvent[]
}

/**
 * Events of the two segments at which one of them moved and the other did not, or not alike, with what the channels
 * did; oldest first. Events at which nothing tells the segments apart, or data lack on a side, are left out: they say
 * nothing.
 *
 * @param own1 other gauges of x's segment, ln by bin
 * @param own2 those of y's
 */
export function judgeEvents(
  sides: Sides,
  own1: readonly number[],
  own2: readonly number[],
): EventJudgement[] {
  const { x, y, fromMs, binMs } = sides
  const stepOf = (ln: readonly number[], atMs: number) => {
    // The bin in which it happened is half before and half after, and belongs to neither.
    const index = Math.floor((atMs - fromMs) / binMs)
    return (
      meanOver(ln, index + 1, index + 1 + SIDE_BINS, LEAST_OF_SIDE) -
      meanOver(ln, index - SIDE_BINS, index, LEAST_OF_SIDE)
    )
  }
  return sides.events
    .filter(
      ({ segment, kind }) => kind !== 'gauge-exchange' && (segment === x.segment || segment === y.segment),
    )
    .sort((one, other) => one.atMs - other.atMs)
    .flatMap((event) => {
      const [s1, s2, sx, sy] = [own1, own2, x.ln, y.ln].map((ln) => stepOf(ln, event.atMs)) as [
        number,
        number,
        number,
        number,
      ]
      const between = Math.abs(s1 - s2)
      if (![s1, s2, sx, sy].every(Number.isFinite) || between < LEAST_APART) return []
      const near = (step: number, segmentStep: number) => Math.abs(step - segmentStep) < NEAR * between
      const verdict =
        near(sx, s1) && near(sy, s2) ? 'straight' : near(sx, s2) && near(sy, s1) ? 'crossed' : 'unclear'
      const steps = { own: Math.exp(s1), neighbour: Math.exp(s2), x: Math.exp(sx), y: Math.exp(sy) }
      return [{ event, steps, verdict } satisfies EventJudgement]
    })
}
