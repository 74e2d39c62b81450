/** The curve of a trial: against the solution it hands over in slices, coarse against fine, and what moves it which way. */
import { describe, expect, test } from 'vitest'
import { usualState, type WhatIfGround, type WhatIfKey, type WhatIfState } from '#app/domain/what-if.ts'
import {
  readOff,
  type WhatIfCurve,
  type WhatIfGrade,
  whatIfCorners,
  whatIfModel,
  whatIfRefusal,
  whatIfSlices,
} from '#app/domain/what-if-solve.ts'
import { simulateSegment } from '#app/physics/simulate.ts'
import { bakedGround, wetGround } from '#tests/fixtures/what-if-grounds.ts'

function solve(ground: WhatIfGround, state: WhatIfState, grade: WhatIfGrade = 'at-rest'): WhatIfCurve {
  const slices = whatIfSlices(ground, state, grade)
  let slice = slices.next()
  while (!slice.done) slice = slices.next()
  return slice.value
}

function trial(
  ground: WhatIfGround,
  change: Partial<WhatIfState>,
  numbers: Partial<Record<WhatIfKey, number>> = {},
) {
  const usual = usualState(ground)
  return { ...usual, ...change, numbers: { ...usual.numbers, ...numbers } }
}

/** Largest share by which one curve misses another, where there is pressure that a gauge would show. */
function apart(one: WhatIfCurve, other: WhatIfCurve): number {
  return Math.max(...one.pa.map((pa, at) => Math.abs(pa / other.pa[at]! - 1)))
}

const TRIALS: [string, WhatIfGround, WhatIfState][] = [
  ['pumping as it is', wetGround, trial(wetGround, {})],
  ['a slow pump and a leak', wetGround, trial(wetGround, {}, { speed: 0.05, leak: 1e-7, leakAt: 10, at: 0 })],
  ['a bake at 150 °C', wetGround, trial(wetGround, { mode: 'bake' })],
  ['a long bake at 80 °C', wetGround, trial(wetGround, { mode: 'bake' }, { bakeC: 80, soak: 700, ramp: 2 })],
  ['a wide baked segment', bakedGround, trial(bakedGround, { mode: 'bake' }, { bakeC: 120 })],
]

describe.each(TRIALS)('%s', (_, ground, state) => {
  const rest = solve(ground, state)

  test('while the hand moves the curve is within 2 % of the one at rest', () => {
    expect(apart(solve(ground, state, 'moving'), rest)).toBeLessThan(0.02)
  })

  test('at rest it is within half a percent of a solution with a hundredth of the tolerance', () => {
    const corners = whatIfCorners(ground, state).map(({ hour, celsius }) => ({
      atS: hour * 3600,
      kelvin: celsius + 273.15,
    }))
    const close = simulateSegment(whatIfModel(ground, state), {
      corners,
      hours: rest.hours,
      atM: state.numbers.at,
      cells: 300,
      tolerance: 1e-5,
    })
    const worst = Math.max(...rest.pa.map((pa, at) => Math.abs(pa / close.n2EquivalentPa[at]! - 1)))
    expect(worst).toBeLessThan(0.005)
  })
})

describe('what moves the curve', () => {
  const end = (change: Partial<WhatIfState>, numbers: Partial<Record<WhatIfKey, number>> = {}) =>
    solve(wetGround, trial(wetGround, change, numbers)).pa.at(-1)!
  const usual = end({})

  test('twice the speed at the very gauge halves the pressure', () => {
    expect(end({}, { speed: 0.9 }) / usual).toBeCloseTo(0.5, 2)
  })

  test('twice the wall doubles it, as does twice the water with twice the hydrogen', () => {
    const wall = end({}, { area: 2 * usualState(wetGround).numbers.area })
    expect(wall / usual).toBeCloseTo(2, 2)
    expect(end({}, { water: 2 * 5.9e19, hydrogen: 2 * 7e23 })).toBeCloseTo(wall, 12)
  })

  test('a leak adds its load over the speed at the pump', () => {
    expect((end({}, { leak: 1e-6, leakAt: 75 }) - usual) / (1e-6 / 0.45)).toBeCloseTo(1, 3)
  })

  test('a bake takes the water away, and a hotter one more hydrogen', () => {
    const mild = end({ mode: 'bake' }, { bakeC: 120 })
    expect(mild).toBeLessThan(usual / 10)
    expect(end({ mode: 'bake' }, { bakeC: 180 })).toBeLessThan(mild)
  })
})

test('the numbers of the register, unmoved, give the model of the register', () => {
  const same = whatIfModel(wetGround, usualState(wetGround))
  expect(same).toEqual({ ...wetGround.model, airLeaks: [] })
})

test('a pump that takes no water cannot be tried on a wet wall, nor one that takes no air on a leak', () => {
  expect(whatIfRefusal(bakedGround, trial(bakedGround, {}))).toBeNull()
  expect(whatIfRefusal(bakedGround, trial(bakedGround, { wall: 'wet' }))).toContain('speed for water')
  expect(whatIfRefusal(bakedGround, trial(bakedGround, {}, { leak: 1e-9 }))).toContain('speed for nitrogen')
  expect(whatIfRefusal(wetGround, trial(wetGround, {}, { leak: 1e-9 }))).toBeNull()
})

describe('read off a curve', () => {
  const flat = {
    waterPa: [1, 1, 1, 1],
    hydrogenPa: [0, 0, 0, 0],
    airPa: [0, 0, 0, 0],
    wallC: [20, 20, 20, 20],
  }
  const curve: WhatIfCurve = { hours: [1, 10, 100, 1000], pa: [1e-3, 1e-4, 1e-5, 1e-6], ...flat }

  test('the target is found between two points, straight in the logarithms', () => {
    expect(readOff(curve, 1e-5)!.targetHour).toBeCloseTo(100, 9)
    expect(readOff(curve, Math.sqrt(1e-9))!.targetHour).toBeCloseTo(10 ** 1.5, 9)
    expect(readOff(curve, 1e-7).targetHour).toBeNull()
    expect(readOff(curve, 1e-2).targetHour).toBe(1)
    expect(readOff(curve, null).targetHour).toBeNull()
  })

  test('a rise above the target later on takes it back', () => {
    const bumped = { ...curve, pa: [1e-6, 1e-3, 1e-4, 1e-6] }
    expect(readOff(bumped, 1e-5).targetHour).toBeCloseTo(100 * 10 ** 0.5, 6)
    expect(readOff(bumped, null).peak).toEqual({ hour: 10, pa: 1e-3 })
  })

  test('the gas that is most of it is the one a gauge shows most of', () => {
    expect(readOff(curve, null).mostly).toBe('water')
    expect(readOff({ ...curve, airPa: [0, 0, 0, 2] }, null).mostly).toBe('air')
  })
})
