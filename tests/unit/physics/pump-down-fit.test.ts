import { levenbergMarquardt } from 'ml-levenberg-marquardt'
import { describe, expect, it } from 'vitest'
import {
  confidenceLimits,
  crossingTime,
  fitPumpDown,
  outgassingAtOneHour,
} from '#app/physics/pump-down-fit.ts'
import type { Censoring } from '#app/physics/trend.ts'

// Twenty readings of one run with its own small errors; the answers beside the checks were computed with the
// least-squares routine of scipy on ln k, alpha and ln floor.
const HOURS = [1, 1.5, 2, 3, 4, 6, 8, 12, 16, 24, 36, 48, 72, 96, 120, 150, 180, 220, 260, 300]
const PA = [
  2.06494e-4, 1.33323e-4, 9.58437e-5, 6.1646e-5, 4.6152e-5, 3.11677e-5, 2.36099e-5, 1.54451e-5, 1.12061e-5,
  7.29869e-6, 4.92879e-6, 3.84897e-6, 2.71646e-6, 2.10989e-6, 1.7096e-6, 1.40069e-6, 1.22449e-6, 1.09266e-6,
  1.00713e-6, 9.26323e-7,
]
const FIT = fitPumpDown({ hours: HOURS, pa: PA }, { independent: true })

function within(value: number, expected: number, relative: number): void {
  expect(Math.abs(value / expected - 1)).toBeLessThanOrEqual(relative)
}

describe('fitPumpDown on uncensored readings', () => {
  it('finds level, exponent and floor', () => {
    within(FIT.kPa, 2.0178050717763632e-4, 1e-4)
    within(FIT.alpha, 1.055085743332355, 1e-4)
    within(FIT.floorPa!, 4.208373997048677e-7, 1e-4)
    within(FIT.rmsLn, 0.022894686075679342, 1e-3)
  })

  it('gives the confidence limits by Student and the crossing by the delta method', () => {
    const limits = confidenceLimits(FIT)
    expect(limits.alpha[0]).toBeCloseTo(1.0426049931638046, 3)
    expect(limits.alpha[1]).toBeCloseTo(1.0675664935009055, 3)
    within(limits.floorPa![0], 3.7913863140062446e-7, 2e-3)
    within(limits.floorPa![1], 4.671223197068883e-7, 2e-3)
    const crossing = crossingTime(FIT, 6e-7)!
    within(crossing.hours, 780.3815134066898, 2e-3)
    within(crossing.lnSe, 0.08689257552274451, 2e-3)
    expect(crossingTime(FIT, 4e-7)).toBeNull()
  })

  it('agrees with an independent descent with finite differences', () => {
    const other = levenbergMarquardt(
      { x: HOURS.map(Math.log), y: PA.map(Math.log) },
      ([a, b, c]: number[]) =>
        (x: number) =>
          Math.log(Math.exp(a! - b! * x) + Math.exp(c!)),
      {
        initialValues: [-8, 1, -15],
        damping: 1e-2,
        gradientDifference: 1e-6,
        maxIterations: 500,
        errorTolerance: 1e-14,
      },
    )
    within(Math.exp(other.parameterValues[0]!), FIT.kPa, 1e-3)
    within(other.parameterValues[1]!, FIT.alpha, 1e-3)
    within(Math.exp(other.parameterValues[2]!), FIT.floorPa!, 5e-3)
  })

  it('keeps a floor that the data show, with an upper bound above it', () => {
    expect(FIT.floorTest.chance).toBeLessThan(1e-6)
    expect(FIT.floorUpperPa).toBeGreaterThan(FIT.floorPa!)
    // One-sided 95 % from the two-sided 90 % of the logarithm; the profile is not quite symmetrical.
    within(FIT.floorUpperPa, FIT.floorPa! * Math.exp(1.7396 * FIT.lnFloorSe!), 0.01)
  })

  it('gives a floor only as a bound where the data are a plain power law', () => {
    const wobble = (i: number) => 1 + 0.02 * Math.sin(i * 2.4)
    const hours = Array.from({ length: 40 }, (_, i) => 1.2 ** i / 1.2 + 0.2)
    const plain = fitPumpDown({ hours, pa: hours.map((t, i) => (1.6e-3 / t) * wobble(i)) })
    expect(plain.floorPa).toBeNull()
    within(plain.alpha, 1, 0.01)
    expect(plain.floorUpperPa).toBeGreaterThan(0)
    expect(plain.floorUpperPa).toBeLessThan(1.6e-3 / hours[39]!)
  })

  it('raises its errors where neighbours look alike', () => {
    const hours = Array.from({ length: 120 }, (_, i) => 5 + i / 2)
    const pa = hours.map((t) => (1e-3 / t) * Math.exp(0.03 * Math.sin((2 * Math.PI * t) / 24)))
    const naive = fitPumpDown({ hours, pa }, { floor: 'never', independent: true })
    const honest = fitPumpDown({ hours, pa }, { floor: 'never' })
    expect(honest.alpha).toBe(naive.alpha)
    expect(honest.rho).toBeGreaterThan(0.9)
    expect(honest.alphaSe / naive.alphaSe).toBeGreaterThan(4)
  })
})

describe('fitPumpDown on censored readings', () => {
  it('uses points below the range without taking the limit for a value', () => {
    const hours = Array.from({ length: 30 }, (_, i) => 1 + 3 * i)
    const truth = hours.map((t, i) => (1e-4 / t) * (1 + 0.03 * Math.sin(i * 1.9)))
    const limit = 2e-6
    const censored = truth.map((p): Censoring => (p < limit ? 'below' : null))
    const read = truth.map((p) => Math.max(p, limit))
    const right = fitPumpDown({ hours, pa: read, censored }, { floor: 'never' })
    const wrong = fitPumpDown({ hours, pa: read }, { floor: 'never' })
    expect(right.censoredPoints).toBe(censored.filter((c) => c !== null).length)
    within(right.alpha, 1, 0.02)
    expect(wrong.alpha).toBeLessThan(0.97)
  })

  it('lets a point "above" push the trend up', () => {
    const hours = [1, 2, 4, 8, 16, 32]
    const pa = hours.map((t) => 1e-4 / t)
    const censored: Censoring[] = ['above', null, null, null, null, null]
    const fit = fitPumpDown({ hours, pa: [2e-4, ...pa.slice(1)], censored }, { floor: 'never' })
    expect(fit.alpha).toBeGreaterThan(1.001)
  })
})

describe('fitPumpDown on series that carry nothing', () => {
  it('says what is wrong with them', () => {
    expect(() => fitPumpDown({ hours: [], pa: [] })).toThrow(/No reading/)
    expect(() => fitPumpDown({ hours: [0.1, 0.2], pa: [1, 1] })).toThrow(/at or after 1 h/)
    const all: Censoring[] = ['below', 'below', 'below']
    expect(() => fitPumpDown({ hours: [1, 2, 3], pa: [1, 1, 1], censored: all })).toThrow(/All 3 readings/)
    expect(() => fitPumpDown({ hours: [1, 2, 3], pa: [1, 1, 1] })).toThrow(/3 measured readings/)
    expect(() => fitPumpDown({ hours: [2, 2, 2, 2, 2], pa: [1, 2, 3, 4, 5] })).toThrow(/same time/)
    expect(() => fitPumpDown({ hours: [1, 2], pa: [1] })).toThrow(/as many values/)
    expect(() => fitPumpDown({ hours: [1, 2], pa: [1, 0] })).toThrow(/series.pa\[1\] is 0/)
  })
})

it('turns a level into outgassing', () => {
  // Arithmetic: 2e-4 Pa at 0.45 m3/s on 235.6 m2.
  within(outgassingAtOneHour(2e-4, 0.45, 235.6), 3.82e-7, 1e-3)
})
