/** Temperature of the segments' wall: the tunnel's air, or the programme of a bake. */
import { BAKES, bakesOf, type DemoBake, FAN_STOP } from '../scenario/bakes.ts'
import { tunnelAirC } from './tunnel-air.ts'

const HOUR_MS = 3_600_000
const SOAK_C = 150
/**
 * Cooling under the insulation, h. Longer than the bare tube's: valve boxes, cross and supports give back their heat.
 * It leaves SG-08 at 62 °C on the morning, eight and a half hours after its heating went off.
 */
const COOLING_TAU_H = 7.74
const MOST_RAMP_K_PER_H = 10

/** Mean wall temperature, °C. */
export function wallC(segment: string, atMs: number): number {
  const air = tunnelAirC(atMs)
  const bake = currentBake(segment, atMs)
  return bake === null ? air : hotC(bake, atMs, air)
}

/** The bake that a segment's wall is warm from, if any. */
export function currentBake(segment: string, atMs: number): DemoBake | null {
  for (const bake of BAKES) {
    if (bake.segment !== segment || atMs < bake.rampAt.getTime()) continue
    const { coldAt } = bake
    if (coldAt === null || atMs < coldAt.getTime() + 72 * HOUR_MS) return bake
  }
  return null
}

function hotC(bake: DemoBake, atMs: number, air: number): number {
  const offMs = bake.offAt?.getTime() ?? Number.POSITIVE_INFINITY
  if (atMs <= offMs) return heatedC(bake, atMs)
  return air + (heatedC(bake, offMs) - air) * Math.exp(-(atMs - offMs) / (COOLING_TAU_H * HOUR_MS))
}

function heatedC(bake: DemoBake, atMs: number): number {
  const rampMs = bake.rampAt.getTime()
  const from = tunnelAirC(rampMs)
  // Without a soak the ramp was broken off under way.
  const rate =
    bake.soakAt === null ? MOST_RAMP_K_PER_H : (SOAK_C - from) / ((bake.soakAt.getTime() - rampMs) / HOUR_MS)
  const heated = Math.min(SOAK_C, from + (rate * (atMs - rampMs)) / HOUR_MS)
  return bake.segment === FAN_STOP.segment ? heated - fanStopDip(atMs) : heated
}

/** The tube cools while the supply stands still and is brought back at the usual rate. */
function fanStopDip(atMs: number): number {
  const [from, until] = [FAN_STOP.fromAt.getTime(), FAN_STOP.untilAt.getTime()]
  if (atMs < from) return 0
  const lost = (ms: number) => (SOAK_C - 18) * (1 - Math.exp(-(ms - from) / (COOLING_TAU_H * HOUR_MS)))
  if (atMs <= until) return lost(atMs)
  return Math.max(0, lost(until) - (MOST_RAMP_K_PER_H * (atMs - until)) / HOUR_MS)
}

/** Hours that a segment has been heated within a stretch, for the energy meters. */
export function isHeated(segment: string, atMs: number): boolean {
  return bakesOf(segment).some(
    ({ rampAt, offAt }) => atMs >= rampAt.getTime() && (offAt === null || atMs < offAt.getTime()),
  )
}
