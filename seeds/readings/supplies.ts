/** Heating current and voltage, energy meters, ion pumps and fans of the demo. */
import {
  currentFor,
  type HeatedTube,
  insulationLoss,
  rampPower,
  seriesVolts,
} from '../../app/physics/thermal.ts'
import { at } from '../demo-time.ts'
import { SEGMENTS, segmentOf } from '../register/segments.ts'
import { BAKES, FAN_STOP } from '../scenario/bakes.ts'
import { ISOLATIONS } from '../scenario/events.ts'
import { scatter } from './noise.ts'
import { pressureAt } from './pressures.ts'
import { isHeated, wallC } from './wall-temperature.ts'

const HOUR_MS = 3_600_000
const ROOM_C = 18
/** Supports and ends lose this much on top of the insulated tube. */
const SUPPORTS = 1.3
const BLANKET_KW = 6
/** Fans, carts and lights of each side, kW; 18 together. */
const BASE_KW = { W: 8, E: 10 } as const
/** The air film takes little against 100 mm of insulation. */
const FILM_W_M2K = 1000

function tubeOf(tag: string): HeatedTube & { lengthM: number } {
  const { diameterM, wallM, startM, endM } = segmentOf(tag)
  const layer = { thicknessM: 0.1, conductivityWMK: 0.045, filmWM2K: FILM_W_M2K }
  return {
    diameterM,
    wallM,
    lossWM2K: SUPPORTS * insulationLoss(diameterM, layer),
    ambientK: ROOM_C + 273.15,
    lengthM: endM - startM,
  }
}

/** Resistance of a segment from end to end with its wall at a temperature, Ω. */
export function endToEndOhm(segment: string, celsius: number): number {
  const tube = tubeOf(segment)
  return seriesVolts(tube, 1, celsius + 273.15, tube.lengthM, 1)
}

export interface SupplyOutput {
  volts: number
  amps: number
}

/** What holds or raises a segment's temperature at an instant; null while its heating is off. */
export function heatingOf(segment: string, atMs: number): SupplyOutput | null {
  if (!isHeated(segment, atMs)) return null
  const stopped =
    segment === FAN_STOP.segment && atMs >= FAN_STOP.fromAt.getTime() && atMs < FAN_STOP.untilAt.getTime()
  if (stopped) return null
  const tube = tubeOf(segment)
  const tubeK = wallC(segment, atMs) + 273.15
  const rateKS = Math.max(0, wallC(segment, atMs + 300_000) - wallC(segment, atMs)) / 300
  const amps = currentFor(tube, rampPower(tube, tubeK, rateKS), tubeK)
  return { amps, volts: seriesVolts(tube, amps, tubeK, tube.lengthM, 1) }
}

/** What a supply set's meters show at an instant, volts to a tenth and whole amperes; null when it is off. */
export function supplyOutput(supply: string, atMs: number): SupplyOutput | null {
  const bake = BAKES.find(
    (one) =>
      one.supply === supply &&
      isHeated(one.segment, atMs) &&
      atMs >= one.rampAt.getTime() &&
      (one.offAt === null || atMs < one.offAt.getTime()),
  )
  const output = bake === undefined ? null : heatingOf(bake.segment, atMs)
  if (output === null) return null
  const ripple = 1 + 0.001 * scatter(supply, atMs)
  return { volts: Math.round(output.volts * ripple * 10) / 10, amps: Math.round(output.amps * ripple) }
}

const METERS_SINCE_MS = at('2025-09-01 00:00').getTime()
/** Six digits: after 999 999 kWh a meter begins again. */
const METER_WRAPS_AT = 1_000_000
const METER_START = { W: 951_240, E: 412_870 } as const
export type Feeder = keyof typeof METER_START
const USED: Record<Feeder, number[]> = { W: [0], E: [0] }

function powerKw(side: Feeder, atMs: number): number {
  let power: number = BASE_KW[side]
  for (const { segment } of BAKES) {
    if (segmentOf(segment).id <= 8 !== (side === 'W') || !isHeated(segment, atMs)) continue
    const output = heatingOf(segment, atMs)
    power += BLANKET_KW + (output === null ? 0 : (output.volts * output.amps) / 1000)
  }
  return power
}

/** Sums by the hour, kept; within an hour the power is taken as even. */
function usedKwh(side: Feeder, atMs: number): number {
  const hour = Math.floor((atMs - METERS_SINCE_MS) / HOUR_MS)
  const sums = USED[side]
  for (let done = sums.length; done <= hour + 1; done += 1) {
    sums.push((sums[done - 1] as number) + powerKw(side, METERS_SINCE_MS + (done - 0.5) * HOUR_MS))
  }
  const share = (atMs - METERS_SINCE_MS) / HOUR_MS - hour
  return (sums[hour] as number) * (1 - share) + (sums[hour + 1] as number) * share
}

/** What an energy meter shows, whole kWh. */
export function meterKwh(side: Feeder, atMs: number): number {
  return Math.floor(METER_START[side] + usedKwh(side, atMs)) % METER_WRAPS_AT
}

/** Ion current for a pressure, A/Pa, and what flows without gas, A; figures of the demo's own pumps. */
const ION_PUMP_A_PER_PA = 0.6
const LEAKAGE_A = 1e-7

/** Current of the ion part of a segment's pump; null when it is switched off. */
export function ionPumpA(segment: string, atMs: number): number | null {
  if (segment === 'SG-11') return null
  const onCart = BAKES.some(
    (one) =>
      one.segment === segment &&
      atMs >= one.cartAt.getTime() &&
      (one.coldAt === null || atMs < one.coldAt.getTime()),
  )
  const shut = ISOLATIONS.some(
    (one) =>
      one.segment === segment &&
      atMs >= one.fromAt.getTime() &&
      (one.untilAt === null || atMs < one.untilAt.getTime()),
  )
  const pressure = pressureAt(segment, 'B', atMs)
  const pa = pressure === 'gone' ? 5e-8 : pressure
  if (onCart || shut || typeof pa !== 'number' || pa > 1e-4) return null
  const ripple = 1 + 0.01 * scatter(`IP ${segment}`, atMs)
  return Number(((ION_PUMP_A_PER_PA * pa + LEAKAGE_A) * ripple).toPrecision(3))
}

/** Bay fans run by day, and day and night beside a heated segment. */
export function fanIsOn(chainageM: number, localHour: number, atMs: number): boolean {
  if (localHour >= 6 && localHour < 20) return true
  return SEGMENTS.some(
    ({ tag, startM, endM, lineId }) =>
      lineId === 1 && chainageM >= startM - 150 && chainageM <= endM + 150 && wallC(tag, atMs) > 40,
  )
}
