/** What a run of one gas is made of: walls, pumps, leaks and valves that change at known times. Data only. */
import { requirePositive, requireWithin } from './argument-checks.ts'
import { BOLTZMANN } from './constants.ts'
import { PhysicsError } from './errors.ts'
import type { Gas } from './gases.ts'
import { lowHydrogenRate, type Sheet, slabAtomFlux } from './hydrogen.ts'
import { type PowerLaw, powerLawRate } from './outgassing.ts'
import { hydrogenAge, type Programme } from './programme.ts'
import { type PumpCurve, requirePumpCurve } from './pumps.ts'
import { requireIsotherm, type WaterIsotherm } from './water.ts'

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
  /** What a getter takes of this gas until it is full, Pa m3 at 20 degrees; its speed falls in step. None: no end. */
  readonly capacityPaM3?: number
}

/** A getter film on the wall. Taken gas stays; noble gases and methane are not for it (sticking 0). */
export interface WallGetter {
  /** Chance that a molecule that strikes the film stays, 0 to 1, when it is fresh. */
  readonly sticking: number
  /** Molecules per m2 of film that fill it; the sticking falls in step (from memory, not verified: 5e18 to 5e19). */
  readonly capacityPerM2: number
  /** Share of the wall that is coated, everywhere or node by node; all of it unless given. */
  readonly wallShare?: number | Float64Array
}

/**
 * The part of the wall that a bake does not reach: valve bonnets, gauge stubs, the ends of spurs. It sees the pressure
 * of the tube but stays cooler, so it keeps water and hydrogen while the rest loses them.
 */
export interface UnbakedArea {
  /** Share of the wall, 1e-3 to 1e-2 on an ordinary line (common practice, no source). */
  readonly share: number
  /** How far it follows the tube's rise above the room: 0 not at all, 1 wholly. */
  readonly followShare: number
  readonly roomK: number
  /** Age of its hydrogen at the start where it differs from that of the tube, m2. */
  readonly agedTauM2?: number
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
  readonly unbaked?: UnbakedArea
  readonly getter?: WallGetter
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

// Molecules per m2 and s from the wall, as a function of time and the temperature then.
function wallRate(
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

/**
 * Rate of a wall of which a part may stay cooler: each part gives its own, by its own history, weighted by area.
 * Molecules per m2 and s as a function of time and the temperature of the tube.
 */
export function wholeWallRate(
  run: GasRun,
  programme: Programme,
  fromS: number,
): (atS: number, kelvin: number) => number {
  const walls = run.walls ?? []
  const tube = wallRate(walls, programme, fromS)
  const area = run.unbaked
  if (!area) return tube
  const cooler = (kelvin: number): number => unbakedKelvin(area, kelvin)
  const ownAge = area.agedTauM2
  const own = wallRate(
    walls.map((wall) =>
      wall.kind === 'sheet' && ownAge !== undefined ? { ...wall, agedTauM2: ownAge } : wall,
    ),
    { cornersS: programme.cornersS, cornersK: programme.cornersK.map(cooler) },
    fromS,
  )
  return (atS, kelvin) => (1 - area.share) * tube(atS, kelvin) + area.share * own(atS, cooler(kelvin))
}

/** Temperature of the unbaked area beside a tube at `tubeK`, K. */
export function unbakedKelvin(area: UnbakedArea, tubeK: number): number {
  return area.roomK + area.followShare * (tubeK - area.roomK)
}

/** Throws on a number of the run that no gas can have, naming it. `nodes` is the size of the mesh. */
export function requireGasRun(run: GasRun, nodes: number): void {
  const { isotherm, unbaked, getter, viscosityPaS } = run
  for (const { node } of [...run.pumps, ...(run.leaks ?? [])]) requireWithin('node', node, 0, nodes - 1)
  if (viscosityPaS !== undefined) requirePositive('viscosityPaS', viscosityPaS)
  for (const wall of run.walls ?? []) requireWall(wall)
  for (const { capacityPaM3, mouthK, curve } of run.pumps) {
    for (const { value, fromS } of curve) {
      requireStart(fromS)
      if (value) requirePumpCurve(value)
    }
    if (capacityPaM3 !== undefined) requirePositive('capacityPaM3', capacityPaM3)
    if (mouthK !== undefined) requireWithin('mouthK', mouthK, 4, 1300)
  }
  for (const leak of run.leaks ?? []) {
    if (leak.gasK !== undefined) requirePositive('gasK', leak.gasK)
    for (const { value, fromS } of leak.loadPaM3S) {
      requireStart(fromS)
      requireWithin('loadPaM3S', value, 0, 1e6)
    }
  }
  if (isotherm) {
    requireIsotherm(isotherm)
  }
  if (unbaked) {
    requireWithin('unbaked.share', unbaked.share, 0, 1)
    requireWithin('unbaked.followShare', unbaked.followShare, 0, 1)
    requireWithin('unbaked.roomK', unbaked.roomK, 200, 400)
    if (unbaked.agedTauM2 !== undefined) requirePositive('unbaked.agedTauM2', unbaked.agedTauM2)
  }
  if (getter) {
    requireWithin('getter.sticking', getter.sticking, 0, 1)
    requirePositive('getter.capacityPerM2', getter.capacityPerM2)
    const shares = typeof getter.wallShare === 'number' ? [getter.wallShare] : (getter.wallShare ?? [])
    for (const share of shares) requireWithin('getter.wallShare', share, 0, 1)
  }
}

// Minus infinity is as good a start as any: it has always been so.
function requireStart(fromS: number): void {
  if (!(fromS < Infinity)) throw new PhysicsError('fromS', fromS, 'a time, or -Infinity for always')
}

function requireWall(wall: WallSource): void {
  if (wall.kind === 'power-law') {
    requirePositive('oneHourPaMS', wall.law.oneHourPaMS)
    requireWithin('exponent', wall.law.exponent, 0, 10)
    requireWithin('leadS', wall.leadS, 0, 1e12)
    requirePositive('gasK', wall.gasK)
  } else if (wall.kind === 'sheet') {
    requireWithin('c0PerM3', wall.sheet.c0PerM3, 0, 1e30)
    requirePositive('wallM', wall.sheet.wallM)
    requirePositive('agedTauM2', wall.agedTauM2)
  } else {
    requireWithin('qPaMS', wall.qPaMS, 0, 1e3)
    requirePositive('atK', wall.atK)
  }
}
