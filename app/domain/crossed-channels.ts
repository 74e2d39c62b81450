/**
 * Whether two gauge channels of neighbouring segments carry each other's gauge. Pure; it suspects and never corrects:
 * a person decides, and records a channel map.
 *
 * All gauges of a segment see the same gas, so a gauge keeps its distance (in log p) from the others of its segment. Where
 * two cables are exchanged, both channels leave their distance in the same moment, and each takes up exactly the distance
 * that the other gauge had from the gauges of the neighbour. A drifting or exchanged gauge does the first alone.
 */
import { median } from '../physics/statistics.ts'
import { type EventJudgement, judgeEvents, type KnownEvent } from './crossed-events.ts'
import { correlation, type GaugeSeries, together } from './crossed-series.ts'

/** A channel under test, with the other gauges of the segment it is labelled for. */
interface TestedChannel extends GaugeSeries {
  segment: string
  others: readonly GaugeSeries[]
}

export interface PairInput {
  x: TestedChannel
  y: TestedChannel
  /** Start of the first bin, ms UTC, and length of each. */
  fromMs: number
  binMs: number
  events: readonly KnownEvent[]
}

interface Correlations {
  /** Of each channel's log pressure with the others of its own segment, and with those of the neighbour. */
  xOwn: number
  xNeighbour: number
  yOwn: number
  yNeighbour: number
}

/** Root mean square departures in ln p since the beginning, from what each arrangement of the cables would give. */
interface Departures {
  xStraight: number
  xCrossed: number
  yStraight: number
  yCrossed: number
}

export interface Suspicion {
  kind: 'suspected'
  /** It began after the one and was so from the other on, ms UTC; `afterMs` null: it was so before the data begin. */
  begin: { afterMs: number | null; byMs: number }
  confidence: 'strong' | 'moderate'
  /** What first gave it away: levels that were exchanged, movements that belong to the neighbour, or known events. */
  by: 'levels' | 'movements' | 'events'
  departures: Departures
  correlations: Correlations
  events: readonly EventJudgement[]
}

export type PairJudgement =
  | Suspicion
  | { kind: 'clear' /** How far apart the two arrangements are, ln. */; apart: number }
  | { kind: 'not-evaluable'; reason: string }

/** Bins that must lie before the begin, so that the distances are known, and after it, so that a day is no accident. */
const LEAST_BEFORE = 36
const LEAST_AFTER = 12
/** Departures are capped (ln): one vent must not outweigh weeks. */
const CAP = 0.5
/** The least departure that is called one: gauges wander by some per cent by themselves (common practice, no source). */
const LEAST_DEPARTURE = 0.06
/** Crossed must explain a channel this much better than straight. */
const BETTER = 0.4
/** Departures this much larger than what is left are called strong. */
const STRONG = 0.25

/** Judges one pair of channels. Needs at least four days of bins of two hours in which all four sides speak. */
export function judgePair(input: PairInput): PairJudgement {
  const { x, y } = input
  if (x.others.length === 0 || y.others.length === 0) {
    const alone = x.others.length === 0 ? x : y
    return unable(`${alone.segment} has no other gauge to compare ${alone.tag} with`)
  }
  const own1 = together(x.others)
  const own2 = together(y.others)
  const at = x.ln.flatMap((_, index) =>
    [x.ln, y.ln, own1, own2].every((ln) => Number.isFinite(ln[index])) ? [index] : [],
  )
  if (at.length < LEAST_BEFORE + LEAST_AFTER) return unable(whatLacks(input, own1, own2, at.length))
  const distances = distancesOf(at, x.ln, y.ln, own1, own2)
  const events = judgeEvents(input, own1, own2)

  const found = likelier(byLevels(distances), byMovements(distances)) ?? byEvents(events, distances)
  if (found === null) return clearOrAlike(input, distances, events)
  const { start, by } = found
  const startMs = input.fromMs + (at[start] as number) * input.binMs
  const begin =
    found.begin ??
    (start === 0
      ? { afterMs: null, byMs: startMs }
      : { afterMs: input.fromMs + (at[start - 1] as number) * input.binMs, byMs: startMs })
  const since = at.slice(start)
  const pick = (ln: readonly number[]) => since.map((index) => ln[index] as number)
  const departures = departuresFrom(distances, start, found)
  const later = events.filter(({ event }) => event.atMs >= begin.byMs)
  const against = later.filter(({ verdict }) => verdict === 'straight').length
  // A gauge that was exchanged at that very time has a reason of its own to read otherwise.
  const excused = input.events.some(
    ({ kind, atMs }) => kind === 'gauge-exchange' && Math.abs(atMs - begin.byMs) < 86_400_000,
  )
  if (
    by !== 'events' &&
    against > 0 &&
    against >= later.filter(({ verdict }) => verdict === 'crossed').length
  )
    return { kind: 'clear', apart: apartOf(distances) }
  const clearCut =
    departures.xCrossed <= STRONG * departures.xStraight &&
    departures.yCrossed <= STRONG * departures.yStraight
  return {
    kind: 'suspected',
    begin,
    confidence:
      against === 0 && !excused && (clearCut || later.some(({ verdict }) => verdict === 'crossed'))
        ? 'strong'
        : 'moderate',
    by,
    departures,
    correlations: {
      xOwn: correlation(pick(x.ln), pick(own1)),
      xNeighbour: correlation(pick(x.ln), pick(own2)),
      yOwn: correlation(pick(y.ln), pick(own2)),
      yNeighbour: correlation(pick(y.ln), pick(own1)),
    },
    events: later,
  }
}

/** Distances in ln of the two channels from both segments' other gauges, in the bins in which all four sides speak. */
interface Distances {
  /** x from its own, y from its own: what stays the same while the cables are as labelled. */
  u: number[]
  v: number[]
  /** x from the neighbour's, y from the neighbour's: what stays the same while they are crossed. */
  p: number[]
  q: number[]
}

interface Found {
  start: number
  a: number
  b: number
  by: Suspicion['by']
  /** Distances while crossed; those from before, except where there is no before. */
  crossedA: number
  crossedB: number
  /** Sum of capped squares that this leaves over all bins. */
  cost: number
  begin?: { afterMs: number | null; byMs: number }
}

function likelier(one: Found | null, other: Found | null): Found | null {
  if (one === null || other === null) return one ?? other
  return one.cost <= other.cost ? one : other
}

function distancesOf(
  at: readonly number[],
  x: readonly number[],
  y: readonly number[],
  own1: readonly number[],
  own2: readonly number[],
): Distances {
  const from = (ln: readonly number[], own: readonly number[]) =>
    at.map((index) => (ln[index] as number) - (own[index] as number))
  return { u: from(x, own1), v: from(y, own2), p: from(x, own2), q: from(y, own1) }
}

const capped = (departure: number): number => Math.min(departure ** 2, CAP ** 2)

/** Cost of having been straight up to each bin and crossed from it on; the start with the least, by its index. */
function leastCost(
  { u, v, p, q }: Distances,
  a: number,
  b: number,
  from: number,
  to: number,
): { start: number; cost: number } {
  const straight = (i: number) => capped((u[i] as number) - a) + capped((v[i] as number) - b)
  const crossed = (i: number) => capped((p[i] as number) - b) + capped((q[i] as number) - a)
  let cost = 0
  for (let i = 0; i < u.length; i += 1) cost += i < from ? straight(i) : crossed(i)
  let best = { start: from, cost }
  for (let i = from; i < to; i += 1) {
    cost += straight(i) - crossed(i)
    if (cost < best.cost) best = { start: i + 1, cost }
  }
  return best
}

/** An exchange within the data, by the levels before it: first by half-days, then by bins. */
function byLevels(distances: Distances): Found | null {
  const { u, v } = distances
  const n = u.length
  let best: { start: number; cost: number; a: number; b: number } | null = null
  for (let start = LEAST_BEFORE; start <= n - LEAST_AFTER; start += LEAST_AFTER / 2) {
    const [a, b] = [median(u.slice(0, start)), median(v.slice(0, start))]
    const { cost } = leastCost(distances, a, b, start, start)
    if (best === null || cost < best.cost) best = { start, cost, a, b }
  }
  if (best === null) return null
  const { a, b } = best
  const near = leastCost(
    distances,
    a,
    b,
    Math.max(LEAST_BEFORE, best.start - LEAST_AFTER),
    Math.min(n - LEAST_AFTER, best.start + LEAST_AFTER),
  )
  const found: Found = { start: near.start, a, b, crossedA: a, crossedB: b, by: 'levels', cost: near.cost }
  // In most bins, not only in some: an exchange that only an event shows may have begun at any time before it.
  const usual = (values: readonly number[], level: number) =>
    median(values.slice(found.start).map((one) => Math.abs(one - level)))
  const lasting = usual(u, a) >= LEAST_DEPARTURE && usual(v, b) >= LEAST_DEPARTURE
  return lasting && isExchange(departuresFrom(distances, found.start, found)) ? found : null
}

/** Crossed all along: each follows the neighbour's movements, at whatever distance. */
function byMovements(distances: Distances): Found | null {
  const { u, v, p, q } = distances
  const [a, b, crossedA, crossedB] = [median(u), median(v), median(q), median(p)]
  const { cost } = leastCost(distances, crossedA, crossedB, 0, 0)
  const found: Found = { start: 0, a, b, crossedA, crossedB, by: 'movements', cost }
  return isExchange(departuresFrom(distances, 0, found)) ? found : null
}

/** Quiet segments at like levels: only what happened at known events can tell. */
function byEvents(events: readonly EventJudgement[], { u, v }: Distances): Found | null {
  const lastStraight = events.findLastIndex(({ verdict }) => verdict === 'straight')
  const wrong = events.slice(lastStraight + 1).filter(({ verdict }) => verdict === 'crossed')
  const [first] = wrong
  if (first === undefined) return null
  const [a, b] = [median(u), median(v)]
  const afterMs = lastStraight < 0 ? null : (events[lastStraight]?.event.atMs ?? null)
  return {
    start: 0,
    a,
    b,
    crossedA: a,
    crossedB: b,
    by: 'events',
    // Asked only where levels and movements have found nothing, so it is compared with no other.
    cost: Number.POSITIVE_INFINITY,
    begin: { afterMs, byMs: first.event.atMs },
  }
}

function departuresFrom({ u, v, p, q }: Distances, start: number, found: Omit<Found, 'by'>): Departures {
  const rms = (values: readonly number[], level: number) => {
    const since = values.slice(start)
    return Math.sqrt(since.reduce((sum, one) => sum + capped(one - level), 0) / since.length)
  }
  return {
    xStraight: rms(u, found.a),
    xCrossed: rms(p, found.crossedB),
    yStraight: rms(v, found.b),
    yCrossed: rms(q, found.crossedA),
  }
}

/** Both channels must have left their places, and both must be at home in the other's: one alone is a gauge's fault. */
function isExchange({ xStraight, xCrossed, yStraight, yCrossed }: Departures): boolean {
  return (
    Math.min(xStraight, yStraight) >= LEAST_DEPARTURE &&
    xCrossed <= BETTER * xStraight &&
    yCrossed <= BETTER * yStraight
  )
}

/** By how much an exchange would have shown, ln: in most bins the two arrangements lie at least this far apart. */
function apartOf({ u, v, p, q }: Distances): number {
  const [a, b] = [median(u), median(v)]
  return median(u.map((_, i) => Math.max(Math.abs((p[i] as number) - b), Math.abs((q[i] as number) - a))))
}

function clearOrAlike(
  { x, y }: PairInput,
  distances: Distances,
  events: readonly EventJudgement[],
): PairJudgement {
  const apart = apartOf(distances)
  if (apart >= LEAST_DEPARTURE || events.some(({ verdict }) => verdict === 'straight'))
    return { kind: 'clear', apart }
  const percent = Math.max(1, Math.round((Math.exp(apart) - 1) * 100))
  return unable(
    `${x.tag} and ${y.tag} would read alike to about ${percent} % if they were exchanged, and nothing has happened that moved only one of the segments`,
  )
}

function whatLacks(
  { x, y }: PairInput,
  own1: readonly number[],
  own2: readonly number[],
  both: number,
): string {
  const sides = [
    { name: x.tag, ln: x.ln },
    { name: y.tag, ln: y.ln },
    { name: `the other gauges of ${x.segment}`, ln: own1 },
    { name: `the other gauges of ${y.segment}`, ln: own2 },
  ].map(({ name, ln }) => ({ name, count: ln.filter(Number.isFinite).length }))
  const least = sides.reduce((low, side) => (side.count < low.count ? side : low))
  return `only ${both} stretches of time have usable readings of both channels and of both segments' other gauges, and ${LEAST_BEFORE + LEAST_AFTER} are needed; fewest come from ${least.name}`
}

function unable(reason: string): PairJudgement {
  return { kind: 'not-evaluable', reason }
}
