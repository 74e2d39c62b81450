import { describe, expect, it } from 'vitest'
import { descend, invertPositive } from '#app/physics/gauss-newton.ts'
import {
  chiSquareQuantile,
  fisherQuantile,
  fisherTail,
  logNormalCdf,
  median,
  normalHazard,
  normalQuantile,
  studentQuantile,
  variancePenalty,
  weightedQuantile,
} from '#app/physics/statistics.ts'

// Printed tables of the quantiles (any book of statistical tables; from memory, not verified here), 4 digits.
describe('quantiles', () => {
  it('agrees with the printed tables', () => {
    expect(studentQuantile(0.975, 17)).toBeCloseTo(2.1098, 3)
    expect(studentQuantile(0.9, 5)).toBeCloseTo(1.4759, 3)
    expect(normalQuantile(0.975)).toBeCloseTo(1.96, 3)
    expect(chiSquareQuantile(0.05, 1)).toBeCloseTo(3.8415, 3)
    expect(fisherQuantile(0.05, 1, 10)).toBeCloseTo(4.9646, 3)
    expect(fisherQuantile(0.01, 4, 20)).toBeCloseTo(4.4307, 3)
  })

  it('ties Fisher with one degree of freedom to Student squared', () => {
    const t = studentQuantile(0.975, 23)
    expect(fisherTail(t * t, 1, 23)).toBeCloseTo(0.05, 8)
  })

  it('names the argument it cannot use', () => {
    expect(() => studentQuantile(1.2, 5)).toThrow(/probability is 1.2; expected/)
    expect(() => fisherTail(-1, 1, 5)).toThrow(/value is -1/)
  })
})

describe('the left tail of the normal law', () => {
  it('keeps ln Phi and its slope continuous where the method changes', () => {
    // Reference values by 30-digit arithmetic: ln Phi(-6) = -20.736768883, ln Phi(-10) = -53.231285151.
    expect(logNormalCdf(-6)).toBeCloseTo(-20.736769, 5)
    expect(logNormalCdf(-10)).toBeCloseTo(-53.231285, 5)
    expect(logNormalCdf(-6.0000001)).toBeCloseTo(logNormalCdf(-5.9999999), 4)
    expect(normalHazard(-6.0000001)).toBeCloseTo(normalHazard(-5.9999999), 4)
    const slope = (logNormalCdf(-7.99) - logNormalCdf(-8.01)) / 0.02
    expect(normalHazard(-8)).toBeCloseTo(slope, 4)
    expect(normalHazard(-300)).toBeCloseTo(300.00333, 4)
  })
})

describe('order statistics', () => {
  it('takes the middle', () => {
    expect(median([3, 1, 2])).toBe(2)
    expect(median([4, 1, 2, 3])).toBe(2.5)
  })

  it('interpolates between weights and sorts infinity last', () => {
    expect(weightedQuantile([1, 2, 3], [1, 1, 1], 0.5)).toBe(2)
    expect(weightedQuantile([1, 2], [1, 3], 0.5)).toBeCloseTo(1.75, 10)
    expect(weightedQuantile([1, Infinity], [1, 1], 0.9)).toBe(Infinity)
    expect(weightedQuantile([Infinity, 1, 5], [0, 1, 0], 0.9)).toBe(1)
  })
})

describe('variancePenalty', () => {
  it('finds nothing in alternating residuals and much in a slow wave', () => {
    const alternating = Array.from({ length: 200 }, (_, i) => (i % 2 === 0 ? 1 : -1))
    expect(variancePenalty(alternating, 2).factor).toBe(1)
    const wave = Array.from({ length: 200 }, (_, i) => Math.sin(i / 15))
    expect(variancePenalty(wave, 2).factor).toBeGreaterThan(20)
  })

  it('recovers the correlation of a first-order chain', () => {
    let state = 12345
    const uniform = () => {
      state = (state * 1103515245 + 12345) % 2147483648
      return state / 2147483648 - 0.5
    }
    let last = 0
    const chain = Array.from({ length: 4000 }, () => {
      last = 0.6 * last + uniform() + uniform() + uniform()
      return last
    })
    expect(variancePenalty(chain, 2).rho).toBeGreaterThan(0.55)
    expect(variancePenalty(chain, 2).rho).toBeLessThan(0.65)
  })
})

describe('descend', () => {
  it('finds the bottom of a bent valley and stays inside its bounds', () => {
    // Rosenbrock's valley as a sum of squares: bottom at (1, 1), a classical trial for descents.
    const valley = ([x = 0, y = 0]: readonly number[]) => {
      const r1 = 10 * (y - x * x)
      const r2 = 1 - x
      return {
        cost: (r1 * r1 + r2 * r2) / 2,
        gradient: Float64Array.from([-20 * x * r1 - r2, 10 * r1]),
        curvature: Float64Array.from([400 * x * x + 1, -200 * x, -200 * x, 100]),
      }
    }
    const free = descend(valley, [-1.2, 1])
    expect(free.converged).toBe(true)
    expect(free.parameters[0]).toBeCloseTo(1, 6)
    expect(free.parameters[1]).toBeCloseTo(1, 6)
    const held = descend(valley, [-1.2, 1], { upper: [0.5, 10] })
    expect(held.parameters[0]).toBeLessThanOrEqual(0.5)
  })

  it('refuses a start without a finite cost', () => {
    const broken = () => ({ cost: NaN, gradient: new Float64Array(1), curvature: new Float64Array(1) })
    expect(() => descend(broken, [0])).toThrow(/finite/)
  })

  it('inverts matrices whose rows differ by many decades, and says when it cannot', () => {
    const inverse = invertPositive(Float64Array.from([1e20, 1e8, 1e8, 1e-2]), 2)
    expect(inverse).not.toBeNull()
    expect(inverse![0]! * 1e20 + inverse![1]! * 1e8).toBeCloseTo(1, 6)
    expect(invertPositive(Float64Array.from([1, 1, 1, 1]), 2)).toBeNull()
  })
})
