/** A bake of the demo by the full simulation of app/physics: partial pressures at the cross, once an hour. */
import { simulateSegment } from '../../app/physics/simulate.ts'
import { segmentOf } from '../register/segments.ts'
import type { DemoBake } from '../scenario/bakes.ts'
import { VENTS } from '../scenario/events.ts'
import { NIGHT_END_MS } from './morning.ts'
import { bakeModel } from './segment-gas.ts'
import { wallC } from './wall-temperature.ts'

const HOUR_MS = 3_600_000
/** Segments not opened within the register's time have been pumped cold for about this long, h. */
const LONG_PUMPED_H = 2 * 8766
/** Share of the water that dry nitrogen lets in. */
const DRY_SHARE = 0.2

/** Water and hydrogen at the cross by the hour from the start of the ramp, Pa, for steel as the register has it. */
export interface BakeTable {
  water: number[]
  hydrogen: number[]
}

/** Simulates a bake until its segment is cold, or to the end of the last night. */
export function simulateBake(bake: DemoBake): BakeTable {
  const segment = segmentOf(bake.segment)
  const rampMs = bake.rampAt.getTime()
  const untilMs = bake.coldAt?.getTime() ?? NIGHT_END_MS
  const vent = VENTS.findLast(
    (one) => one.segment === bake.segment && one.pumpingAt !== null && one.pumpingAt < bake.rampAt,
  )
  const coldH = vent?.pumpingAt == null ? LONG_PUMPED_H : (rampMs - vent.pumpingAt.getTime()) / HOUR_MS
  const waterShare = vent?.gas === 'dry nitrogen' ? DRY_SHARE : 1
  const hours = Array.from({ length: Math.ceil((untilMs - rampMs) / HOUR_MS) + 1 }, (_, hour) => hour)
  const { byGasPa } = simulateSegment(bakeModel(segment, { bakes: 1, steel: 1, waterShare }), {
    corners: hours.map((hour) => ({
      atS: (coldH + hour) * 3600,
      kelvin: wallC(bake.segment, rampMs + hour * HOUR_MS) + 273.15,
    })),
    hours: hours.map((hour) => coldH + hour),
    atM: (segment.endM - segment.startM) / 2,
  })
  return { water: [...byGasPa.H2O], hydrogen: [...byGasPa.H2] }
}

/** Name of a bake in the table of tables. */
export function bakeName({ segment, rampAt }: Pick<DemoBake, 'segment' | 'rampAt'>): string {
  return `${segment} ${rampAt.toISOString().slice(0, 10)}`
}
