/** What the thermocouples of the demo say, °C. */
import { at } from '../demo-time.ts'
import { POSITIONS } from '../register/positions.ts'
import { SEGMENTS } from '../register/segments.ts'
import { scatter, wander } from './noise.ts'
import { tunnelAirC } from './tunnel-air.ts'
import { currentBake, wallC } from './wall-temperature.ts'

const HOUR_MS = 3_600_000
/** Temperature over the air at which the shape of a hot tube is given. */
const FULL_RISE_K = 132
/** The ends of a heated tube lose to valve boxes, K; further in it is even within this. */
const END_DROP_K = 6
const UNEVEN_K = 1.2

/** Full scale, which the logger shows for a broken wire. */
export const OPEN_WIRE_C = 1372
const BROKEN = { tag: 'TH-12-07', fromMs: at('2026-11-03 09:20').getTime() }

/** Insulation that slipped: the tube cools under it to a new balance. */
const SLIPPED = [
  {
    tag: 'TH-05-09',
    fromMs: at('2026-11-09 02:14').getTime(),
    untilMs: Number.POSITIVE_INFINITY,
    dropK: 22.3,
    tauH: 1.2,
  },
  {
    tag: 'TH-14-04',
    fromMs: at('2026-07-17 11:50').getTime(),
    untilMs: at('2026-07-19 12:00').getTime(),
    dropK: 34,
    tauH: 1.6,
  },
] as const

/** The flange at 1 195 m holds its heat longer than the tube beside it. */
const SLOW_FLANGE = { tag: 'TH-08-12', fromMs: at('2026-11-08 23:30').getTime(), restK: 13 }

export interface Thermocouple {
  tag: string
  segment: string
  /** 0 at the west end, 1 at the east end. */
  place: number
}

/** All thermocouples in the order of the register. */
export const THERMOCOUPLES: readonly Thermocouple[] = POSITIONS.filter(
  ({ kind }) => kind === 'thermocouple',
).map(({ tag, segmentId, chainageM }) => {
  const segment = SEGMENTS.find(({ id }) => id === segmentId)
  if (segment === undefined || chainageM === null) throw new Error(`${tag} is nowhere on the tube`)
  return { tag, segment: segment.tag, place: (chainageM - segment.startM) / (segment.endM - segment.startM) }
})

/** What a thermocouple says at an instant, °C to a tenth. */
export function thermocoupleC(one: Thermocouple, atMs: number): number {
  if (one.tag === BROKEN.tag && atMs >= BROKEN.fromMs) return OPEN_WIRE_C
  const own = 0.15 * scatter(one.tag, 0)
  const noise = 0.05 * scatter(one.tag, atMs)
  if (currentBake(one.segment, atMs) === null) return tenth(tunnelAirC(atMs) + own + noise)
  const mean = wallC(one.segment, atMs)
  const hot = (mean - tunnelAirC(atMs)) / FULL_RISE_K
  const unevenness = UNEVEN_K * scatter(`${one.tag}/shape`, 0) + 0.4 * wander(one.tag, atMs, 3 * HOUR_MS)
  return tenth(
    mean +
      hot * (endShape(one.place) + unevenness) -
      slipped(one.tag, atMs) * hot +
      flange(one.tag, atMs) +
      own +
      noise,
  )
}

/** Cooler at the ends, warmer in between, nothing in the mean. */
function endShape(place: number): number {
  return END_DROP_K * (1 / 6 - (2 * place - 1) ** 4 * (5 / 6))
}

function slipped(tag: string, atMs: number): number {
  const fault = SLIPPED.find((one) => one.tag === tag && atMs >= one.fromMs && atMs < one.untilMs)
  return fault === undefined
    ? 0
    : fault.dropK * (1 - Math.exp(-(atMs - fault.fromMs) / (fault.tauH * HOUR_MS)))
}

function flange(tag: string, atMs: number): number {
  if (tag !== SLOW_FLANGE.tag || atMs < SLOW_FLANGE.fromMs) return 0
  return SLOW_FLANGE.restK * (1 - Math.exp(-(atMs - SLOW_FLANGE.fromMs) / (4 * HOUR_MS)))
}

const tenth = (value: number) => Math.round(value * 10) / 10
