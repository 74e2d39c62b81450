import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import {
  captureSpeed,
  getterLife,
  getterSpeedPerMetre,
  type PumpCurve,
  pumpDownSeconds,
  pumpThroughput,
  pumpThroughputSlope,
  saturatedIonPumpShare,
  speedFor,
  steadyPressure,
  turboUltimate,
} from '#app/physics/pumps.ts'
import { expectCheck } from '#tests/fixtures/physics/check-values.ts'

const ROOTS = {
  kind: 'roots',
  speedM3S: 0.5,
  backingM3S: 0.07,
  compression: 30,
  bypassPa: 5000,
  backingUltimatePa: 3,
} as const

describe('pumps', () => {
  test('pump-down of a volume, steady pressure and the life of a getter', () => {
    expectCheck('pump.exp', pumpDownSeconds(1, 0.01, 101325, 10))
    expectCheck('pump.exp_ult', pumpDownSeconds(1, 0.01, 101325, 10, 1))
    expectCheck('pump.ss', steadyPressure(3e-9 * 100, 0.5))
    expectCheck('pump.Q_ult', steadyPressure(1e-7, 1, 1e-8))
    expectCheck('pump.cap_life', getterLife(100, 1e-5))
    expect(() => pumpDownSeconds(1, 0.01, 101325, 0.5, 1)).toThrow('toPa is 0.5; expected 1 to 101325')
  })

  /** Where a curve bends: ultimate pressures, the bypass of the blower, the points of the ion pump. */
  const bypassOpensPa = (0.07 * 5000 + (0.1 * 0.5) / (1 + 0.5 / 2.1)) / (0.5 / (1 + 0.5 / 2.1) - 0.07)
  const CORNERS_PA = [1, 1e-6, 0.1, bypassOpensPa, 1e-9, 1e-8, 1e-7, 1e-5, 1e-4, 1e-3, 1e-2]
  const curves: PumpCurve[] = [
    { kind: 'constant', speedM3S: 0.4 },
    { kind: 'displacement', speedM3S: 0.02, ultimatePa: 1 },
    { kind: 'turbo', speedM3S: 0.3, halfSpeedPa: 1 },
    { kind: 'turbo', speedM3S: 0.3, halfSpeedPa: 1, ultimatePa: 1e-6 },
    ROOTS,
    { kind: 'ion', speedM3S: 0.4 },
  ]
  test('no pump gives gas back or takes less at a higher pressure, and the slope is the derivative', () => {
    fc.assert(
      fc.property(fc.double({ min: -9, max: 5, noNaN: true }), fc.constantFrom(...curves), (log, curve) => {
        const p = 10 ** log
        expect(pumpThroughput(curve, p)).toBeGreaterThanOrEqual(0)
        // An ion pump does: above some 1e-2 Pa its discharge fails.
        if (curve.kind !== 'ion' || p < 1e-2)
          expect(pumpThroughput(curve, p * 1.05)).toBeGreaterThanOrEqual(pumpThroughput(curve, p))
        if (CORNERS_PA.some((corner) => Math.abs(p / corner - 1) < 1e-3)) return
        const h = p * 1e-5
        const difference = (pumpThroughput(curve, p + h) - pumpThroughput(curve, p - h)) / (2 * h)
        expect(Math.abs(pumpThroughputSlope(curve, p) - difference)).toBeLessThanOrEqual(
          1e-5 * curve.speedM3S,
        )
      }),
    )
  })

  test('a blower multiplies the backing pump below its bypass, and hands over to it above', () => {
    const speed = (p: number) => pumpThroughput(ROOTS, p) / p
    // S/(1 + S/(K0 S_b)) by hand.
    expect(speed(50)).toBeCloseTo((0.5 / (1 + 0.5 / (30 * 0.07))) * (1 - 0.1 / 50), 9)
    expect(speed(1e5) / 0.07).toBeCloseTo(1.05, 9)
    expect(pumpThroughput(ROOTS, 0.1)).toBe(0)
  })

  test('light gases get away from turbo pumps, noble ones from ion pumps', () => {
    expect(turboUltimate(10, 1e5)).toBeCloseTo(1e-4, 15)
    expect(speedFor('ion', 'H2', 0.4)).toBeCloseTo(0.8, 12)
    expect(speedFor('ion', 'Ar', 0.4)).toBeLessThan(0.02)
    expect(() => speedFor('turbo', 'CO2', 1)).toThrow('share of CO2 for a turbo pump')
  })

  test('a saturated ion pump is strongest near 1e-4 Pa and stops above 0.1 Pa', () => {
    expect(saturatedIonPumpShare(1e-12)).toBe(0.35)
    expect(saturatedIonPumpShare(1e-4)).toBe(1)
    expect(saturatedIonPumpShare(Math.sqrt(1e-7 * 1e-6))).toBeCloseTo(0.7, 12)
    expect(saturatedIonPumpShare(1)).toBe(0)
  })

  test('surfaces that keep what strikes them', () => {
    // Water on a cold surface: 0.9 of 14.67 l/s per cm2, by hand.
    const diameter = Math.sqrt(4e-4 / Math.PI)
    expect(captureSpeed('H2O', diameter, 0.9, 293.15) * 1000).toBeCloseTo(13.2, 1)
    expect(getterSpeedPerMetre('H2', 0.6, 0.01, 293.15)).toBeCloseTo((0.01 * Math.PI * 0.6 * 1754.69) / 4, 3)
    expect(() => captureSpeed('H2O', diameter, 1.2, 293.15)).toThrow('capture is 1.2; expected 0 to 1')
  })
})
