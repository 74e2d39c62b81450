/**
 * The curve of a trial, by the full solution of transport and wall. Browser, worker and server run this same code; it
 * hands itself over in slices, so that none of them has to stand still for it.
 */
import { ZERO_CELSIUS_K } from '../physics/constants.ts'
import { nitrogenEquivalent } from '../physics/gauges.ts'
import { pumpSpeed, type SegmentModel } from '../physics/segment-gas.ts'
import { simulationSlices } from '../physics/simulate.ts'
import { WATER_FLOOR_PA } from '../physics/water.ts'
import { speedOf, type WhatIfGround, type WhatIfState, wallAreaOf } from './what-if.ts'

const HOUR_S = 3600
/** The first half hour is about roughing and switching pumps, which the solution does not know. */
const FIRST_HOUR = 0.5
/** A bake is followed for so long after it has cooled, h. */
const AFTER_H = 96

/**
 * While a hand moves, a coarse solution is good enough (within 2 % of the one at rest, see the tests); at rest the
 * mesh is as fine as the server's.
 */
export type WhatIfGrade = 'moving' | 'at-rest'
const GRADES: Record<WhatIfGrade, { cells: number; tolerance: number }> = {
  moving: { cells: 24, tolerance: 1e-2 },
  'at-rest': { cells: 150, tolerance: 1e-3 },
}

/** Pressures in Pa at the gauge, by hours since the start of high vacuum. */
export interface WhatIfCurve {
  hours: number[]
  /** As an ion gauge shows the sum, nitrogen-equivalent. */
  pa: number[]
  waterPa: number[]
  hydrogenPa: number[]
  airPa: number[]
  wallC: number[]
}

/** Corners of the wall's temperature in a trial, h and °C; one corner for pumping alone. */
export function whatIfCorners(
  { model }: WhatIfGround,
  state: WhatIfState,
): { hour: number; celsius: number }[] {
  const coldC = model.temperatureK - ZERO_CELSIUS_K
  if (state.mode === 'pump-down') return [{ hour: 0, celsius: coldC }]
  const { wait, bakeC, ramp, soak } = state.numbers
  const rampH = (bakeC - coldC) / ramp
  const hot = wait + rampH
  return [
    { hour: 0, celsius: coldC },
    { hour: wait, celsius: coldC },
    { hour: hot, celsius: bakeC },
    { hour: hot + soak, celsius: bakeC },
    { hour: hot + soak + rampH, celsius: coldC },
  ]
}

/** Why a trial has no answer, in a sentence; null where it has one. */
export function whatIfRefusal(ground: WhatIfGround, state: WhatIfState): string | null {
  const { model } = ground
  const takes = (gas: 'H2O' | 'N2') => model.pumps.some((pump) => pumpSpeed(pump, gas) > 0)
  if (state.wall === 'wet' && !takes('H2O')) {
    return 'The register gives no pump of this segment a speed for water, so water from a wet wall would stay in it. Give the pump its speed for water in the register, or try the dry wall.'
  }
  if (state.numbers.leak > 0 && !takes('N2')) {
    return 'The register gives no pump of this segment a speed for nitrogen, so air from a leak would rise without end. Give the pump its speed for nitrogen in the register, or try without a leak.'
  }
  return null
}

/** The model of a trial: the register's with its numbers changed. */
export function whatIfModel(ground: WhatIfGround, state: WhatIfState): SegmentModel {
  const { model } = ground
  const { speed, area, water, hydrogen, leak, leakAt } = state.numbers
  const faster = speed / speedOf(model).speedM3S
  // More wall per metre of the same bore gives and holds in proportion, which the model takes as a richer wall.
  const richer = area / wallAreaOf(model)
  return {
    ...model,
    pumps: model.pumps.map(({ atM, speedM3S }) => ({
      atM,
      speedM3S: Object.fromEntries(Object.entries(speedM3S).map(([gas, value]) => [gas, value * faster])),
    })),
    hydrogen:
      model.hydrogen.kind === 'diffusion'
        ? { ...model.hydrogen, c0PerM3: hydrogen * richer }
        : { ...model.hydrogen, qPaMS: hydrogen * richer },
    water:
      state.wall === 'wet'
        ? { state: 'unbaked', capacityPerM2: water * richer }
        : { state: 'baked', floorPa: model.water.state === 'baked' ? model.water.floorPa : WATER_FLOOR_PA },
    airLeaks: leak > 0 ? [{ atM: leakAt, qPaM3S: leak }] : [],
  }
}

/**
 * Solves a trial. Each `next` takes a few steps; the last gives the curve. Throws `PhysicsError` or `TransportError`
 * for numbers that no solution meets.
 */
export function* whatIfSlices(
  ground: WhatIfGround,
  state: WhatIfState,
  grade: WhatIfGrade,
): Generator<undefined, WhatIfCurve, undefined> {
  const corners = whatIfCorners(ground, state)
  const hours = hoursOf(corners, state)
  const run = yield* simulationSlices(whatIfModel(ground, state), {
    corners: corners.map(({ hour, celsius }) => ({ atS: hour * HOUR_S, kelvin: celsius + ZERO_CELSIUS_K })),
    hours,
    atM: state.numbers.at,
    ...GRADES[grade],
  })
  return {
    hours,
    pa: Array.from(run.n2EquivalentPa),
    waterPa: Array.from(run.byGasPa.H2O),
    hydrogenPa: Array.from(run.byGasPa.H2),
    airPa: Array.from(run.byGasPa.N2),
    wallC: Array.from(run.wallK, (kelvin) => kelvin - ZERO_CELSIUS_K),
  }
}

/** Hours at which a curve is kept: close where it bends. */
function hoursOf(corners: readonly { hour: number }[], state: WhatIfState): number[] {
  if (state.mode === 'pump-down') return spread(FIRST_HOUR, state.numbers.days * 24, 72)
  const [, cold, hot, held, cooled] = corners.map(({ hour }) => hour) as [
    number,
    number,
    number,
    number,
    number,
  ]
  const even = (from: number, to: number, count: number) =>
    Array.from({ length: count }, (_, at) => from + ((at + 1) / count) * (to - from))
  return [
    ...spread(FIRST_HOUR, cold, 16),
    ...even(cold, hot, 16),
    // Into the soak the fall is steep at first.
    ...spread(0.02, 1, 20).map((share) => hot + share * (held - hot)),
    ...even(held, cooled, 14),
    ...even(cooled, cooled + AFTER_H, 6),
  ]
}

/** Even steps in the logarithm from the first to the last. */
function spread(from: number, to: number, count: number): number[] {
  return Array.from({ length: count }, (_, at) =>
    at === count - 1 ? to : from * (to / from) ** (at / (count - 1)),
  )
}

export interface WhatIfReading {
  /** At the end of the curve. */
  endHour: number
  endPa: number
  /** Gas that is most of it, as a gauge shows it. */
  mostly: 'water' | 'hydrogen' | 'air'
  /** Highest on the way, once a quarter of an hour of pumping has gone by. */
  peak: { hour: number; pa: number }
  /** First hour from which the curve stays at the target or below it; null where it does not, or without a target. */
  targetHour: number | null
}

/** What is read off a curve. */
export function readOff(curve: WhatIfCurve, targetPa: number | null): WhatIfReading {
  const last = curve.hours.length - 1
  const shares = {
    water: nitrogenEquivalent({ H2O: curve.waterPa[last] ?? 0 }),
    hydrogen: nitrogenEquivalent({ H2: curve.hydrogenPa[last] ?? 0 }),
    air: curve.airPa[last] ?? 0,
  }
  const mostly = (['water', 'hydrogen', 'air'] as const).reduce((a, b) => (shares[b] > shares[a] ? b : a))
  const top = curve.pa.reduce((best, pa, at) => (pa > (curve.pa[best] ?? 0) ? at : best), 0)
  return {
    endHour: curve.hours[last] ?? 0,
    endPa: curve.pa[last] ?? 0,
    mostly,
    peak: { hour: curve.hours[top] ?? 0, pa: curve.pa[top] ?? 0 },
    targetHour: targetPa === null ? null : staysBelow(curve, targetPa),
  }
}

function staysBelow({ hours, pa }: WhatIfCurve, targetPa: number): number | null {
  const above = pa.findLastIndex((value) => value > targetPa)
  const [from, to] = [hours[above], hours[above + 1]]
  const [high, low] = [pa[above], pa[above + 1]]
  if (above < 0) return hours[0] ?? null
  if (from === undefined || to === undefined || high === undefined || low === undefined) return null
  // Straight between the two in the logarithms, as a pump-down falls.
  return from * (to / from) ** (Math.log(high / targetPa) / Math.log(high / low))
}
