/** Pressure in one segment over fourteen months: the cold wall, and what happened on top of it. */

import { type DemoSegment, segmentOf } from '../register/segments.ts'
import { bakesOf, type DemoBake } from '../scenario/bakes.ts'
import { type DemoLeak, LEAKS, OPEN_LEAK, VENTS } from '../scenario/events.ts'
import { bakeCurve } from './bake-curves.ts'
import { MORNING, NIGHT_END_MS } from './morning.ts'
import {
  type AtGauges,
  type Gauge,
  hydrogenReading,
  leakReading,
  mapGauges,
  type PumpAtCross,
  waterHours,
  waterReading,
} from './segment-gas.ts'
import { outgassingSwing } from './tunnel-air.ts'
import { wallC } from './wall-temperature.ts'

const HOUR_MS = 3_600_000
export const hoursBetween = (fromMs: number, toMs: number): number => (toMs - fromMs) / HOUR_MS

/** A pressure in Pa, or why there is none; `gone` means that the logger writes no row. */
export type Said = number | 'off' | 'starting' | 'over' | 'gone'
export type Curve = (gauge: Gauge, atMs: number) => Said

/** One law from an instant on. Of all that have begun the last in the list holds. */
export interface Phase {
  fromMs: number
  untilMs: number
  curve: Curve
}

/** A leak opens within this time. */
const LEAK_OPENS_MS = 40 * 60_000
/** Upper end of what the ionisation gauges measure, Pa. */
const GAUGE_TOP_PA = 1e-2
/** Hot cathodes are switched on this long after the cross-over to high vacuum. */
const GAUGES_ON_MS = 5 * 60_000

interface OpenLeak {
  opensMs: number
  mendedMs: number
  own: AtGauges
  cart: AtGauges
}

/** Pressure of the cold segment by its pump, its bakes, its leaks and the water of its last vent. */
export class ColdSegment {
  readonly segment: DemoSegment
  /** Hydrogen in the steel against what the register says, so that the morning comes out. */
  readonly steel: number
  /** What each gauge says against a true one. */
  readonly gaugeFactor: AtGauges
  readonly #leaks: readonly OpenLeak[]
  readonly #hydrogen: Record<PumpAtCross, AtGauges>[]
  readonly #bakes: readonly DemoBake[]

  constructor(tag: string) {
    const segment = segmentOf(tag)
    this.segment = segment
    this.#bakes = bakesOf(tag)
    const baked = segment.lastBakeYear === null ? 0 : 1
    this.#hydrogen = [0, 1].map((more) => ({
      own: hydrogenReading(segment, 'own', baked + more),
      cart: hydrogenReading(segment, 'cart', baked + more),
    }))
    this.#leaks = leaksOf(segment)
    const morning = MORNING[tag]
    if (morning === undefined) throw new Error(`The demo has no pressures for ${tag}`)
    const hot = morning.C === 0 || tag === 'SG-11'
    const clean = mapGauges(morning, (pa, gauge) => pa - this.#leakAt(gauge, NIGHT_END_MS, 'own'))
    const hydrogen = this.#hydrogenAt(NIGHT_END_MS).own
    this.steel = hot ? 1 : clean.B / hydrogen.B
    this.gaugeFactor = hot
      ? { A: 1, B: 1, C: 1 }
      : mapGauges(morning, (pa, gauge) => pa / (hydrogen[gauge] * this.steel + morning[gauge] - clean[gauge]))
  }

  /** Reading of a gauge, Pa nitrogen-equivalent. */
  at(gauge: Gauge, atMs: number): number {
    const pump = this.#pumpAt(atMs)
    const hydrogen = this.#hydrogenAt(atMs)[pump][gauge] * this.steel
    const true_ = hydrogen * outgassingSwing(atMs, NIGHT_END_MS) + this.#leakAt(gauge, atMs, pump)
    return true_ * this.gaugeFactor[gauge]
  }

  #hydrogenAt(atMs: number): Record<PumpAtCross, AtGauges> {
    const done = this.#bakes.some(
      ({ outcome, offAt }) => outcome === 'complete' && offAt !== null && atMs >= offAt.getTime(),
    )
    return this.#hydrogen[done ? 1 : 0] as Record<PumpAtCross, AtGauges>
  }

  #pumpAt(atMs: number): PumpAtCross {
    const onCart = this.#bakes.some(
      ({ cartAt, coldAt }) => atMs >= cartAt.getTime() && (coldAt === null || atMs < coldAt.getTime()),
    )
    return onCart ? 'cart' : 'own'
  }

  #leakAt(gauge: Gauge, atMs: number, pump: PumpAtCross): number {
    let sum = 0
    for (const one of this.#leaks) {
      if (atMs < one.opensMs || atMs >= one.mendedMs) continue
      sum += one[pump][gauge] * Math.min(1, (atMs - one.opensMs) / LEAK_OPENS_MS)
    }
    return sum
  }
}

function leaksOf(segment: DemoSegment): OpenLeak[] {
  const found = LEAKS.filter((one) => one.segment === segment.tag).map((one: DemoLeak) => ({
    ...one,
    mendedMs: one.mendedAt.getTime(),
  }))
  const open = OPEN_LEAK.segment === segment.tag ? [{ ...OPEN_LEAK, mendedMs: Number.POSITIVE_INFINITY }] : []
  return [...found, ...open].map((one) => ({
    opensMs: one.opensAt.getTime(),
    mendedMs: one.mendedMs,
    own: leakReading(segment, 'own', one),
    cart: leakReading(segment, 'cart', one),
  }))
}

/** Gauges off while the segment is open; then the water of the vent falls as 1/t until the bake. */
export function ventPhases(cold: ColdSegment): Phase[] {
  const { segment } = cold
  return VENTS.filter((one) => one.segment === segment.tag).flatMap((vent) => {
    const offFrom = vent.ventedAt.getTime() - 15 * 60_000
    const startMs = vent.pumpingAt?.getTime() ?? Number.POSITIVE_INFINITY
    const open: Phase = { fromMs: offFrom, untilMs: startMs + GAUGES_ON_MS, curve: () => 'off' }
    if (vent.pumpingAt === null) return [open]
    const bake = bakesOf(segment.tag).find(({ rampAt }) => rampAt.getTime() > startMs)
    const water = waterReading(segment, 'cart', vent.gas === 'dry nitrogen')
    const falling: Curve = (gauge, atMs) => {
      const hours = hoursBetween(startMs, atMs)
      const said =
        segment.tag === 'SG-11' ? sg11(gauge, hours) : water[gauge] / waterHours(hours) + cold.at(gauge, atMs)
      return said > GAUGE_TOP_PA ? 'over' : said
    }
    return [
      open,
      {
        fromMs: startMs + GAUGES_ON_MS,
        untilMs: bake?.rampAt.getTime() ?? Number.POSITIVE_INFINITY,
        curve: falling,
      },
    ]
  })
}

/** SG-11 goes as 1/t through the morning's values at 66 h, which the model meets within a tenth. */
function sg11(gauge: Gauge, hours: number): number {
  return ((MORNING['SG-11'] as AtGauges)[gauge] * 66) / hours
}

/** The cold cathode is off in a bake; the hot ones follow the simulation, brought to the morning where it shows them. */
export function bakePhases(cold: ColdSegment): Phase[] {
  const tag = cold.segment.tag
  return bakesOf(tag).map((bake) => {
    const curve = bakeCurve(bake)
    const atEnds = endsOverCross(cold.segment)
    const morning = bake.coldAt === null ? (MORNING[tag] as AtGauges) : null
    const steel = morning !== null && bake.offAt === null ? steelFor(curve.at, morning.B) : cold.steel
    const shape = (gauge: Gauge) => (morning === null ? atEnds[gauge] : morning[gauge] / morning.B)
    const simulated = (gauge: Gauge, atMs: number) => curve.at(atMs, steel) * shape(gauge)
    const offMs = bake.offAt?.getTime() ?? Number.POSITIVE_INFINITY
    const said: Curve = (gauge, atMs) => {
      if (gauge === 'C') return 'off'
      if (morning === null || atMs <= offMs) return simulated(gauge, atMs)
      return cooling(tag, { fromMs: offMs, from: simulated(gauge, offMs), to: morning[gauge] }, atMs)
    }
    return {
      fromMs: bake.rampAt.getTime(),
      untilMs: bake.coldAt?.getTime() ?? Number.POSITIVE_INFINITY,
      curve: said,
    }
  })
}

function endsOverCross(segment: DemoSegment): AtGauges {
  const hydrogen = hydrogenReading(segment, 'cart', 1)
  return mapGauges(hydrogen, (pa) => pa / hydrogen.B)
}

/** The reading is linear in the hydrogen of the steel. */
function steelFor(at: (atMs: number, steel: number) => number, wanted: number): number {
  const [none, one] = [at(NIGHT_END_MS, 0), at(NIGHT_END_MS, 1)]
  return (wanted - none) / (one - none)
}

/**
 * SG-08 cools to the morning's values along log p over 1/T of its wall. Hydrogen alone would fall more slowly (about
 * 54 kJ/mol, ten times more on the morning): what goes here is mostly water.
 */
function cooling(tag: string, ends: { fromMs: number; from: number; to: number }, atMs: number): number {
  const inverse = (ms: number) => 1 / (wallC(tag, ms) + 273.15)
  const start = inverse(ends.fromMs)
  return ends.from * (ends.to / ends.from) ** ((inverse(atMs) - start) / (inverse(NIGHT_END_MS) - start))
}
