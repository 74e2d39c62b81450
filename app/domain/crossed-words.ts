/** What a suspicion of crossed channels rests on, in sentences. Pure. */
import type { Suspicion } from './crossed-channels.ts'
import type { EventJudgement } from './crossed-events.ts'

interface CrossedNames {
  x: { tag: string; segment: string }
  y: { tag: string; segment: string }
}

/** A correlation must differ by this between the two segments to say which one a channel follows. */
const TELLING = 0.3
/** A correlation from which on a channel is said to follow a segment (own choice). */
const FOLLOWING = 0.5

/**
 * The evidence in words, strongest first.
 *
 * @param written an instant, ms UTC, in site time
 */
export function evidenceOf(
  suspicion: Suspicion,
  names: CrossedNames,
  written: (ms: number) => string,
): string[] {
  const { by, events } = suspicion
  return [
    ...(by === 'levels' ? [levelWords(suspicion, names)] : []),
    ...(by === 'movements' ? [movementWords(suspicion, names)] : []),
    ...events.map((one) => eventWords(one, names, written)),
    ...(events.length === 0
      ? ['No known event since then moved one of the segments alone, so none could confirm or refute it.']
      : []),
    correlationWords(suspicion, names),
  ]
}

/** Since when, in words that say how closely it is known. */
export function beginWords({ begin }: Suspicion, written: (ms: number) => string): string {
  if (begin.afterMs === null) return `at ${written(begin.byMs)} already, perhaps for longer`
  return `since between ${written(begin.afterMs)} and ${written(begin.byMs)}`
}

function levelWords({ departures }: Suspicion, { x, y }: CrossedNames): string {
  const { xStraight, yStraight, xCrossed, yCrossed } = departures
  const left = Math.max(xCrossed, yCrossed)
  return `In one moment ${x.tag} left its place among the gauges of ${x.segment} by ${percent(xStraight)} and ${y.tag} its place in ${y.segment} by ${percent(yStraight)}. With the two exchanged, both fit to ${percent(left)}. A fault of one gauge would not move the other.`
}

function movementWords({ departures }: Suspicion, { x, y }: CrossedNames): string {
  const { xStraight, yStraight, xCrossed, yCrossed } = departures
  return `${x.tag} strays from the other gauges of ${x.segment} by ${percent(xStraight)}, from those of ${y.segment} by only ${percent(xCrossed)}; ${y.tag} strays from ${y.segment} by ${percent(yStraight)}, from ${x.segment} by ${percent(yCrossed)}.`
}

function eventWords(
  { event, steps, verdict }: EventJudgement,
  { x, y }: CrossedNames,
  written: (ms: number) => string,
): string {
  const moved = `the other gauges of ${x.segment} went to ${times(steps.own)}, those of ${y.segment} to ${times(steps.neighbour)}, ${x.tag} to ${times(steps.x)}, ${y.tag} to ${times(steps.y)}`
  const said = {
    crossed: 'each channel did what the other segment did',
    straight: 'each channel did what its own segment did, which speaks against it',
    unclear: 'which decides nothing',
  }[verdict]
  return `${written(event.atMs)}, ${event.text}: ${moved}; ${said}.`
}

function correlationWords({ correlations }: Suspicion, { x, y }: CrossedNames): string {
  const { xOwn, xNeighbour, yOwn, yNeighbour } = correlations
  const figures = `Log pressure of ${x.tag} goes with that of the other gauges of ${x.segment} by r = ${coefficient(xOwn)} and with ${y.segment} by ${coefficient(xNeighbour)}; ${y.tag} with ${y.segment} by ${coefficient(yOwn)} and with ${x.segment} by ${coefficient(yNeighbour)}`
  const leans = [
    [xOwn, xNeighbour],
    [yOwn, yNeighbour],
  ].flatMap(([own = Number.NaN, neighbour = Number.NaN]) => {
    // Two weak ones differ by chance.
    const follows = Math.max(own, neighbour) >= FOLLOWING && Math.abs(neighbour - own) >= TELLING
    return follows ? [neighbour - own] : []
  })
  if (leans.length > 0 && leans.every((lean) => lean > 0))
    return `${figures}: what moves follows the neighbour.`
  if (leans.length > 0 && leans.every((lean) => lean < 0))
    return `${figures}: what moves follows its own segment, which speaks against it.`
  return `${figures}: too much alike to tell which segment they follow.`
}

/** ln of a factor as per cent. */
function percent(ln: number): string {
  return `${Math.max(1, Math.round((Math.exp(ln) - 1) * 100))} %`
}

function times(factor: number): string {
  return `${factor >= 10 ? factor.toPrecision(2).replace(/e\+?/, 'e') : factor.toFixed(2)} times`
}

function coefficient(r: number): string {
  return Number.isFinite(r) ? r.toFixed(2) : 'unknown'
}
