/** What every gauge of the demo would say without noise, Pa nitrogen-equivalent. */
import { at } from '../demo-time.ts'
import { segmentOf } from '../register/segments.ts'
import { bakesOf } from '../scenario/bakes.ts'
import { EXCHANGES, ISOLATIONS, POWER_DIP } from '../scenario/events.ts'
import { HC07A_LOW, MORNING, NIGHT_END_MS, SG13_AT_12H, SG15_LAST } from './morning.ts'
import { type AtGauges, type Gauge, isolatedRise } from './segment-gas.ts'
import {
  bakePhases,
  ColdSegment,
  type Curve,
  hoursBetween,
  type Phase,
  type Said,
  ventPhases,
} from './segment-history.ts'

export type { Gauge } from './segment-gas.ts'
export type { Said } from './segment-history.ts'

const ALWAYS = { fromMs: Number.NEGATIVE_INFINITY, untilMs: Number.POSITIVE_INFINITY }
const WEEK_H = 7 * 24

/** Changes a number and leaves words alone. */
const scaled =
  (curve: Curve, factor: (gauge: Gauge, atMs: number) => number): Curve =>
  (gauge, atMs) => {
    const said = curve(gauge, atMs)
    return typeof said === 'number' ? said * factor(gauge, atMs) : said
  }

/** HC-07A loses sensitivity from mid-October and has all but settled by November. */
function drift07A(gauge: Gauge, atMs: number): number {
  if (gauge !== 'A') return 1
  const fault = HC07A_LOW / (MORNING['SG-07'] as AtGauges).A
  const began = at('2026-10-14 00:00').getTime()
  const left = (ms: number) => (ms < began ? 1 : Math.exp(-hoursBetween(began, ms) / 90))
  return fault ** ((1 - left(atMs)) / (1 - left(NIGHT_END_MS)))
}

/** The getter of SG-16 tires: six per cent a week since 9 September, next to nothing before. */
function growth16(_gauge: Gauge, atMs: number): number {
  const began = at('2026-09-09 06:00').getTime()
  const fast = hoursBetween(Math.max(atMs, began), NIGHT_END_MS) / WEEK_H
  const slow = hoursBetween(Math.min(atMs, began), began) / WEEK_H
  return 1.06 ** -fast * 1.002 ** -slow
}

const OF_ONE: Record<string, (gauge: Gauge, atMs: number) => number> = {
  'SG-07': drift07A,
  'SG-16': growth16,
}

/** What a filament that has just come on adds to the reading of its gauge, and how fast, h. */
const FILAMENT_ADDS = 0.25
const FILAMENT_HOURS = 0.3

/** Pump port shut: hydrogen, and next to nothing else, rises in proportion to time. */
function isolationPhases(cold: ColdSegment): Phase[] {
  const { tag, lastBakeYear } = cold.segment
  return ISOLATIONS.filter(({ segment }) => segment === tag).map(({ fromAt, untilAt, filamentAt }) => {
    const fromMs = fromAt.getTime()
    const fresh = bakesOf(tag).some(
      ({ outcome, offAt }) => outcome === 'complete' && offAt !== null && offAt <= fromAt,
    )
    const rise = isolatedRise(cold.segment, (lastBakeYear === null ? 0 : 1) + (fresh ? 1 : 0)) * cold.steel
    const filament = (atMs: number) =>
      filamentAt === undefined || atMs < filamentAt.getTime()
        ? 1
        : 1 + FILAMENT_ADDS * (1 - Math.exp(-hoursBetween(filamentAt.getTime(), atMs) / FILAMENT_HOURS))
    const curve: Curve = (gauge, atMs) => {
      const before = cold.at(gauge, fromMs)
      if (untilAt !== null)
        return (before + rise * hoursBetween(fromMs, atMs)) * (gauge === 'B' ? filament(atMs) : 1)
      return before + ((SG13_AT_12H[gauge] - before) * hoursBetween(fromMs, atMs)) / 12
    }
    return { fromMs, untilMs: untilAt?.getTime() ?? Number.POSITIVE_INFINITY, curve }
  })
}

/** Gauges that were exchanged said something else before. */
const OLD_GAUGES = new Map(
  EXCHANGES.map((one) => [one.position, { untilMs: one.at.getTime(), factor: one.oldOverNew }]),
)

function tagOf(short: string, gauge: Gauge): string {
  return gauge === 'C' ? `CC-${short}` : `HC-${short}${gauge}`
}

class SegmentPressures {
  readonly #phases: readonly Phase[]
  readonly #short: string
  readonly #backMs: number

  constructor(tag: string) {
    const { short, id } = segmentOf(tag)
    this.#short = short
    // Gauges were switched on again one segment after the other.
    const dipMs = POWER_DIP.at.getTime()
    this.#backMs = dipMs + ((POWER_DIP.gaugesBackAt.getTime() - dipMs) * (id + 3)) / 20
    const cold = new ColdSegment(tag)
    const quiet: Curve = (gauge, atMs) => cold.at(gauge, atMs)
    const own = OF_ONE[tag]
    const phases: Phase[] = [
      { ...ALWAYS, curve: own === undefined ? quiet : scaled(quiet, own) },
      ...ventPhases(cold),
      ...bakePhases(cold),
      ...isolationPhases(cold),
    ]
    if (tag === 'SG-15') phases.push({ ...ALWAYS, fromMs: SG15_LAST.getTime() + 1, curve: () => 'gone' })
    this.#phases = phases
  }

  at(gauge: Gauge, atMs: number): Said {
    const said = this.#curveAt(atMs)(gauge, atMs)
    if (typeof said !== 'number') return said
    const dip = this.#powerDip(atMs)
    if (typeof dip !== 'number') return dip
    const old = OLD_GAUGES.get(tagOf(this.#short, gauge))
    return said * dip * (old !== undefined && atMs < old.untilMs ? old.factor : 1)
  }

  #curveAt(atMs: number): Curve {
    for (let index = this.#phases.length - 1; index > 0; index -= 1) {
      const phase = this.#phases[index] as Phase
      if (atMs >= phase.fromMs && atMs < phase.untilMs) return phase.curve
    }
    return (this.#phases[0] as Phase).curve
  }

  #powerDip(atMs: number): number | 'off' | 'starting' {
    const hours = hoursBetween(POWER_DIP.at.getTime(), atMs)
    if (hours < 0 || hours > 48) return 1
    if (atMs < this.#backMs) return 'off'
    if (atMs < this.#backMs + 10 * 60_000) return 'starting'
    return 1 + (POWER_DIP.rise - 1) * Math.exp(-hours / POWER_DIP.hoursToSettle)
  }
}

const SEGMENTS_MADE = new Map<string, SegmentPressures>()

/** What a gauge of a segment would say at an instant, without noise. */
export function pressureAt(segment: string, gauge: Gauge, atMs: number): Said {
  let made = SEGMENTS_MADE.get(segment)
  if (made === undefined) {
    made = new SegmentPressures(segment)
    SEGMENTS_MADE.set(segment, made)
  }
  return made.at(gauge, atMs)
}
