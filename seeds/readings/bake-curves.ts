/** Pressure through a bake, by the full simulation of app/physics: once a bake, at the cross, an answer an hour. */
import { nitrogenEquivalent } from '../../app/physics/gauges.ts'
import { simulateSegment } from '../../app/physics/simulate.ts'
import { segmentOf } from '../register/segments.ts'
import type { DemoBake } from '../scenario/bakes.ts'
import { VENTS } from '../scenario/events.ts'
import { bakeModel } from './segment-gas.ts'
import { wallC } from './wall-temperature.ts'

const HOUR_MS = 3_600_000
/** Segments not opened within the register's time have been pumped cold for about this long, h. */
const LONG_PUMPED_H = 2 * 8766
/** Share of the water that dry nitrogen lets in. */
const DRY_SHARE = 0.2

export interface BakeCurve {
  /** Reading at the cross, Pa nitrogen-equivalent, for steel with so many times the hydrogen that the register says. */
  at: (atMs: number, steel: number) => number
}

/** Readings at the cross from the ramp to `untilMs`. */
export function bakeCurve(bake: DemoBake, untilMs: number): BakeCurve {
  const segment = segmentOf(bake.segment)
  const rampMs = bake.rampAt.getTime()
  const vent = VENTS.findLast(
    (one) => one.segment === bake.segment && one.pumpingAt !== null && one.pumpingAt < bake.rampAt,
  )
  const coldH = vent?.pumpingAt == null ? LONG_PUMPED_H : (rampMs - vent.pumpingAt.getTime()) / HOUR_MS
  const hours = Math.ceil((untilMs - rampMs) / HOUR_MS)
  const steps = Array.from({ length: hours + 1 }, (_, index) => index)
  const simulation = simulateSegment(
    bakeModel(segment, { bakes: 1, steel: 1, waterShare: vent?.gas === 'dry nitrogen' ? DRY_SHARE : 1 }),
    {
      corners: steps.map((hour) => ({
        atS: (coldH + hour) * 3600,
        kelvin: wallC(bake.segment, rampMs + hour * HOUR_MS) + 273.15,
      })),
      hours: steps.map((hour) => coldH + hour),
      atM: (segment.endM - segment.startM) / 2,
    },
  )
  const { H2O, H2 } = simulation.byGasPa
  const logAt = (index: number, steel: number) =>
    Math.log(nitrogenEquivalent({ H2O: H2O[index] as number, H2: (H2[index] as number) * steel }))
  return {
    at: (atMs, steel) => {
      const hour = Math.min(hours, Math.max(0, (atMs - rampMs) / HOUR_MS))
      const before = Math.min(hours - 1, Math.floor(hour))
      const share = hour - before
      return Math.exp((1 - share) * logAt(before, steel) + share * logAt(before + 1, steel))
    },
  }
}
