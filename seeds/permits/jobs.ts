/** What sort of heating a permit of the demo is about, read from its few words, and where along the line it is. */

import { BOX_CHAINAGE, type DemoSegment, segmentOf } from '../register/segments.ts'
import { BAKES, type DemoBake } from '../scenario/bakes.ts'
import type { DemoPermit } from '../scenario/permits.ts'

export interface Job {
  kind: 'bake' | 'blanket' | 'trial'
  segments: DemoSegment[]
  /** Stretch that gets warm, metres. */
  fromM: number
  toM: number
  celsius: number
  /** The set that feeds the tube, or the circuit of the blanket. */
  supply: string
  amps: number
  volts: number
  openCircuitVolts: number
  /** Tag of what a blanket lies on; empty for heating by the tube's own resistance. */
  part: string
  /** The bake of the scenario, where there was one. */
  bake: DemoBake | null
}

/** A blanket heater of the register: 6 kW at 230 V. */
const BLANKET = { amps: 26, volts: 230, openCircuitVolts: 230 }
/** Metres to each side of a small part that its blanket warms. */
const BLANKET_REACH = 2
/** Amperes and volts of a set at the end of the ramp, for the 150 m of a segment, with a little to spare. */
const AT_FULL = { wide: { amps: 1300, volts: 28 }, narrow: { amps: 1100, volts: 28.5 } }
/** A set's open-circuit voltage stands across a joint that opens under load, whatever the load needs. */
const OPEN_CIRCUIT_VOLTS = 75

function feed(segments: readonly DemoSegment[], share = 1): Pick<Job, 'amps' | 'volts' | 'openCircuitVolts'> {
  const wide = (segments[0] as DemoSegment).diameterM > 0.55
  const full = wide ? AT_FULL.wide : AT_FULL.narrow
  const metres = segments.reduce((sum, { startM, endM }) => sum + endM - startM, 0)
  return {
    amps: Math.round(full.amps * share),
    volts: Number((((full.volts * metres) / 150) * share).toFixed(1)),
    openCircuitVolts: OPEN_CIRCUIT_VOLTS,
  }
}

/** Chainage of a part by its tag: valve boxes by their number, the rest by where such parts sit in a segment. */
function placeOf(part: string, segment: DemoSegment): number {
  const box = /^VB-(\d\d)$/.exec(part)?.[1]
  if (box !== undefined) return BOX_CHAINAGE[Number(box)] as number
  if (part.startsWith('CC-')) return segment.endM - 1
  if (part.startsWith('HC-')) return segment.startM + 1
  if (part.startsWith('NV-')) return segment.startM + 2
  return (segment.startM + segment.endM) / 2
}

function around(centreM: number, reachM: number, { startM, endM }: DemoSegment) {
  return { fromM: Math.max(startM, centreM - reachM), toM: Math.min(endM, centreM + reachM) }
}

/** The job behind a permit; null where its words are still missing. */
export function jobOf({ segments: tags, work, window }: DemoPermit): Job | null {
  if (work === '' || window === null) return null
  const segments = tags.map(segmentOf)
  const first = segments[0] as DemoSegment
  const last = segments.at(-1) as DemoSegment
  const whole = { segments, fromM: first.startM, toM: last.endM, part: '', bake: null }
  const degrees = Number(/(\d+) °C/.exec(work)?.[1] ?? Number.NaN)
  if (work.startsWith('Bake')) {
    const bake =
      BAKES.find(
        (one) => one.segment === first.tag && one.rampAt >= window.fromAt && one.rampAt < window.untilAt,
      ) ?? null
    // The pair that is only asked for stands in no list of bakes yet.
    return {
      ...whole,
      kind: 'bake',
      celsius: degrees,
      supply: bake?.supply ?? 'HX-3',
      bake,
      ...feed(segments),
    }
  }
  const trial = /^Trial of (HX-\d) at (\d+) %$/.exec(work)
  if (trial !== null) {
    const percent = Number(trial[2])
    const supply = trial[1] as string
    return {
      ...whole,
      kind: 'trial',
      celsius: percent > 20 ? 60 : 30,
      supply,
      ...feed(segments, percent / 100),
    }
  }
  const blanket = { kind: 'blanket' as const, segments, supply: `BH-${first.short}`, bake: null, ...BLANKET }
  if (work.startsWith('Drying')) {
    const centre = work.includes('west')
      ? first.startM
      : work.includes('cellar')
        ? first.endM
        : first.startM + 75
    return { ...blanket, ...around(centre, 10, first), celsius: degrees, part: '' }
  }
  const named = /^Blanket on ([A-Z]{2}-\w+),/.exec(work)?.[1]
  const part = named ?? `PX-${first.short}`
  return {
    ...blanket,
    ...around(placeOf(part, first), BLANKET_REACH, first),
    celsius: Number.isNaN(degrees) ? 60 : degrees,
    part,
  }
}
