/** Ion currents by mass: of the analyser RG-A at the cross of SG-06, and of RG-B on the closed SG-13. */
import { ION_SENSITIVITY } from '../../app/physics/gauges.ts'
import { at } from '../demo-time.ts'
import { GETTER_ION } from '../register/pump-speeds.ts'
import { segmentOf } from '../register/segments.ts'
import { OPEN_LEAK } from '../scenario/events.ts'
import { scatter, wander } from './noise.ts'
import { pressureAt } from './pressures.ts'
import { hydrogenReading } from './segment-gas.ts'
import { outgassingSwing } from './tunnel-air.ts'

export const MASSES = [2, 4, 18, 28, 32, 40, 44] as const
export type Mass = (typeof MASSES)[number]

/** What the analyser gives for nitrogen, A/Pa; a figure of the demo's own instrument. */
const A_PER_PA = 2e-6
/** Noise of its multiplier, A. */
const FLOOR_A = 3e-16
/** Shares of dry air by volume: nitrogen, oxygen, argon. */
const AIR = { 28: 0.781, 32: 0.209, 40: 0.0093 } as const
/** Partial pressures that are always there, Pa: residues of the analyser itself. */
const ALWAYS: Record<Mass, number> = {
  2: 0,
  4: 2e-13,
  18: 3e-10,
  28: 1.1e-9,
  32: 4e-12,
  40: 9e-12,
  44: 2.4e-10,
}
const LEAK_OPENS_MS = 40 * 60_000
/** Helium at the last bag on the afternoon of 6 November: a slow answer. */
const BAGGED = { fromMs: at('2026-11-06 12:50').getTime(), tauMs: 25 * 60_000, pa: 4e-9 }

const HYDROGEN_PA = hydrogenReading(segmentOf('SG-06'), 'own', 2).B / ION_SENSITIVITY.H2

function airPa(mass: 28 | 32 | 40, atMs: number): number {
  const open = Math.min(1, Math.max(0, (atMs - OPEN_LEAK.opensAt.getTime()) / LEAK_OPENS_MS))
  const speed = { 28: GETTER_ION.N2, 32: GETTER_ION.O2, 40: GETTER_ION.Ar }[mass]
  return (open * OPEN_LEAK.sizePaM3S * AIR[mass]) / speed
}

function heliumPa(atMs: number): number {
  const since = atMs - BAGGED.fromMs
  if (since < 0) return 0
  const x = since / BAGGED.tauMs
  return BAGGED.pa * x * Math.exp(1 - x)
}

function partialPa(mass: Mass, atMs: number): number {
  if (mass === 2) return HYDROGEN_PA * outgassingSwing(atMs, OPEN_LEAK.opensAt.getTime())
  if (mass === 4) return heliumPa(atMs)
  return mass === 28 || mass === 32 || mass === 40 ? airPa(mass, atMs) : 0
}

/** Mass that a channel such as RG-A-40 or RG-B-40 follows; null for any other channel. */
export function massOf(channel: string): Mass | null {
  return (
    MASSES.find((mass) => /^RG-[AB]-(\d\d)$/.exec(channel)?.[1] === String(mass).padStart(2, '0')) ?? null
  )
}

const SENSITIVITY: Record<Mass, number> = {
  2: ION_SENSITIVITY.H2,
  4: ION_SENSITIVITY.He,
  18: ION_SENSITIVITY.H2O,
  28: ION_SENSITIVITY.N2,
  32: ION_SENSITIVITY.O2,
  40: ION_SENSITIVITY.Ar,
  44: ION_SENSITIVITY.CO2,
}

/** Ion current at a mass, A; never below the noise of the multiplier. `noise` is drawn anew for every row. */
export function ionCurrentA(mass: Mass, atMs: number, noise = scatter): number {
  const name = `RG-A ${mass}`
  const current = A_PER_PA * SENSITIVITY[mass] * (ALWAYS[mass] + partialPa(mass, atMs))
  const said = current * (1 + 0.02 * noise(name, atMs) + 0.02 * wander(name, atMs, 4 * 3_600_000))
  return Math.max(FLOOR_A / 10, said + FLOOR_A * noise(`${name}/floor`, atMs))
}

/** Argon that RG-B brings along and that its own filament keeps level, Pa. */
const RG_B_ARGON_PA = 2e-9

/**
 * Ion current of RG-B on the closed SG-13, A: hydrogen rises with the gauges, and argon stays, because nothing leaks in.
 * Of the air that would make the same rise, argon would be three hundred times as much by the morning.
 */
export function closedIonCurrentA(mass: Mass, atMs: number, noise: typeof scatter): number {
  const name = `RG-B ${mass}`
  const gauge = pressureAt('SG-13', 'B', atMs)
  if (typeof gauge !== 'number') throw new Error(`SG-13 says "${gauge}" while RG-B watches it`)
  const pa = mass === 2 ? gauge / ION_SENSITIVITY.H2 : mass === 40 ? RG_B_ARGON_PA : ALWAYS[mass]
  const current = A_PER_PA * SENSITIVITY[mass] * pa
  return Math.max(
    FLOOR_A / 10,
    current * (1 + 0.02 * noise(name, atMs)) + FLOOR_A * noise(`${name}/floor`, atMs),
  )
}
