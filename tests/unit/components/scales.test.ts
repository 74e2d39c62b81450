import { describe, expect, test } from 'vitest'
import { chainageScale, decadesAround, decadeTicks, roundStep } from '#app/components/charts/scales.ts'

describe('decades around values', () => {
  test('enclose them in whole powers of ten', () => {
    expect(decadesAround([4.7e-8, 2.2e-4])).toEqual({ low: -8, high: -3 })
    expect(decadeTicks({ low: -8, high: -5 })).toEqual([-8, -7, -6, -5])
  })

  test('are never fewer than two, however close the values lie', () => {
    expect(decadesAround([2e-7, 2.1e-7])).toEqual({ low: -7, high: -5 })
    expect(decadesAround([1e-7])).toEqual({ low: -7, high: -5 })
  })

  test('leave out what has no logarithm instead of stretching to it', () => {
    expect(decadesAround([0, -3e-4, Number.NaN, 5e-8, 3e-6])).toEqual({ low: -8, high: -5 })
    expect(decadesAround([])).toEqual({ low: -8, high: -6 })
  })

  test('stop at nine, so that atmosphere in one segment does not flatten the rest', () => {
    expect(decadesAround([5e-8, 1e5])).toEqual({ low: -8, high: 1 })
  })
})

test.each([
  [2400, 6, 400],
  [90, 3, 40],
  [30, 6, 5],
])('a length of %d in about %d steps takes steps of %d', (length, wanted, step) => {
  expect(roundStep(length, wanted)).toBe(step)
})

describe('chainage along several lines', () => {
  const { place, perMetre } = chainageScale(
    [
      { code: 'main', lengthM: 2400 },
      { code: 'spur', lengthM: 90 },
    ],
    1000,
    0.02,
  )

  test('has the same metres to the unit on each', () => {
    expect(perMetre).toBeCloseTo((1000 - 20) / 2490, 12)
    expect((place('main', 1200) ?? 0) - (place('main', 0) ?? 0)).toBeCloseTo(1200 * perMetre, 9)
    expect((place('spur', 90) ?? 0) - (place('spur', 0) ?? 0)).toBeCloseTo(90 * perMetre, 9)
  })

  test('fills the width from the first metre to the last, with a gap between lines', () => {
    expect(place('main', 0)).toBe(0)
    expect(place('spur', 90)).toBeCloseTo(1000, 9)
    expect((place('spur', 0) ?? 0) - (place('main', 2400) ?? 0)).toBeCloseTo(20, 9)
  })

  test('is no place for a line that is not drawn', () => {
    expect(place('other', 3)).toBeNull()
  })
})
