/** What a run of one gas is made of: walls, pumps, leaks and valves that change at known times. Data only. */
import { BOLTZMANN } from './constants.ts'
import type { Gas } from './gases.ts'
import { lowHydrogenRate, type Sheet, slabAtomFlux } from './hydrogen.ts'
import { type PowerLaw, powerLawRate } from './outgassing.ts'
import { hydrogenAge, type Programme } from './programme.ts'
import type { PumpCurve } from './pumps.ts'
import type { WaterIsotherm } from './water.ts'

/** What the wall gives off, per geometric area. */
export type WallSource =
  | { readonly kind: 'power-law'; readonly law: PowerLaw; readonly leadS: number; readonly gasK: number }
  | { readonly kind: 'sheet'; readonly sheet: Sheet; readonly agedTauM2: number }
  | { readonly kind: 'low-hydrogen'; readonly qPaMS: number; readonly atK: number }

/** Something that changes at known times; before its first step it is off. */
export type Steps<Value> = readonly { readonly fromS: number; readonly value: Value }[]

export interface PointPump {
  readonly node: number
  /** Null while the pump is shut off. */
  readonly curve: Steps<PumpCurve | null>
  /** Gas temperature at the pump, K, where it is not that of the wall. */
  readonly mouthK?: number
}

export interface PointLeak {
  readonly node: number
  /** Leak into the tube, Pa m3/s at `gasK` (20 degrees unless given). */
  readonly loadPaM3S: Steps<number>
  readonly gasK?: number
}

export interface GasRun {
  readonly gas: Gas
  /** Pressure at the start, everywhere or node by node, Pa. */
  readonly startPa: number | Float64Array
  readonly flow?: 'molecular' | 'transitional'
  /** Overrides the viscosity of the table in transitional flow. */
  readonly viscosityPaS?: number
  /** Gas held by the wall in equilibrium with the local pressure. */
  readonly isotherm?: WaterIsotherm
  readonly walls?: readonly WallSource[]
  readonly pumps: readonly PointPump[]
  readonly leaks?: readonly PointLeak[]
}

/** Wall temperatures by zone, and the zone of each node (all in zone 0 unless given). */
export interface ThermalState {
  readonly programmes: readonly Programme[]
  readonly zoneOfNode?: Int32Array
}

/** Valves that move; a valve not named here is open. */
export interface ValveMotion {
  readonly name: string
  readonly open: Steps<boolean>
}

/** Value that holds at a time: that of the last step at or before it. */
export function stepAt<Value>(steps: Steps<Value>, atS: number, before: Value): Value {
  let value = before
  for (const step of steps) if (step.fromS <= atS) value = step.value
  return value
}

/** Molecules per m2 and s from the wall, as a function of time and the temperature then. */
export function wallRate(
  walls: readonly WallSource[],
  programme: Programme,
  fromS: number,
): (atS: number, kelvin: number) => number {
  const parts = walls.map((wall): ((atS: number, kelvin: number) => number) => {
    if (wall.kind === 'power-law') {
      return (atS) => powerLawRate(wall.law, atS, wall.leadS) / (BOLTZMANN * wall.gasK)
    }
    if (wall.kind === 'low-hydrogen') {
      return (_atS, kelvin) => lowHydrogenRate(wall.qPaMS, wall.atK, kelvin) / (BOLTZMANN * wall.atK)
    }
    const age = hydrogenAge(programme, fromS, wall.sheet.law)
    return (atS, kelvin) => slabAtomFlux(wall.sheet, kelvin, wall.agedTauM2 + age(atS)) / 2
  })
  return (atS, kelvin) => parts.reduce((sum, part) => sum + part(atS, kelvin), 0)
}
