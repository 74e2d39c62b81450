import { describe, expect, test } from 'vitest'
import {
  apertureConductance,
  apertureContinuumFlow,
  apertureFlow,
  apertureThroughput,
  chokedRatio,
  crossSection,
  effectiveSpeed,
  inParallel,
  inSeries,
  molecularScale,
  molecularSpecific,
  transitionalFlow,
  transitionalSlope,
  transitionalSpecific,
  transmission,
  transmissionBerman,
  tubeConductance,
  viscousSpecific,
} from '#app/physics/conductance.ts'
import { T20_K } from '#app/physics/constants.ts'
import { checkInput, checkValue, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'
import { flightTransmission } from '#tests/fixtures/physics/flight-transmission.ts'

// The solved values of the integral equation, by length over diameter.
const solved = checkValues
  .filter((entry) => entry.id.startsWith('W.tube.'))
  .map((entry) => ({ x: entry.inputs.L_over_d as number, w: entry.expected as number }))

const worst = (formula: (x: number) => number, limit = Infinity): number =>
  Math.max(...solved.filter(({ x }) => x <= limit).map(({ x, w }) => Math.abs(formula(x) / w - 1)))

describe('transmission of a round tube', () => {
  test('the closed form in use stays within 0.64 % of the solved values', () => {
    expect(solved.length).toBeGreaterThan(20)
    expect(worst(transmission)).toBeLessThan(0.0065)
    expectCheck('W.santeler_err', worst(transmission))
    expectCheck('W.santeler_1', transmission(1))
  })

  test('the finer closed form stays within 0.07 %, and refuses where its digits are lost', () => {
    expectCheck('W.berman_20', transmissionBerman(10))
    expectCheck('W.berman_err', worst(transmissionBerman, 250))
    expect(() => transmissionBerman(1000)).toThrow('lengthOverDiameter is 1000; expected 0 to 250')
    expect(transmissionBerman(0)).toBe(1)
  })

  test('a series of aperture and long tube is off by a tenth: why it is not used', () => {
    expectCheck(
      'W.dushman_err',
      worst((x) => 1 / (1 + 0.75 * x)),
    )
  })

  test.each([0.5, 2, 10])(
    'single flights through L/d = %f agree with the solved value and the formula',
    (x) => {
      const [share, error] = flightTransmission(x, 100_000, 20261109)
      const exact = solved.find((entry) => entry.x === x)!.w
      expect(Math.abs(share - exact)).toBeLessThan(3.5 * error)
      expect(Math.abs(share / transmission(x) - 1)).toBeLessThan(0.0065 + 3.5 * (error / exact))
    },
  )
})

describe('molecular flow', () => {
  test('apertures and tubes', () => {
    expectCheck('C.aperture.H2', apertureConductance('H2', 1, T20_K))
    expectCheck('C.tube.air_handbook', molecularSpecific('air', 0.05, T20_K))
    expectCheck('C.tube.air', molecularSpecific('air', 0.05, T20_K))
    expectCheck('C.tube.He', molecularSpecific('He', 0.05, T20_K))
    // The handbook's worked example with the rounded 12.1 d3/L, and what the solved transmission gives instead.
    expectCheck('C.short.entrance', (1e-3 * 12.1 * 5 ** 3) / 30 / (1 + (4 * 5) / (3 * 30)))
    const near = tubeConductance('air', 0.05, 0.3, T20_K)
    expect(near / (checkValue('C.short.exact').expected as number)).toBeCloseTo(1, 2)
    expectCheck('C.short.exact', 0.16589901 * apertureConductance('air', crossSection(0.05), T20_K))
  })

  test('scales with the root of temperature over mass', () => {
    expectCheck('C.Tscale', molecularScale({ gas: 'air', atK: 293.15 }, { gas: 'air', atK: 423.15 }))
    expectCheck('C.gas_scale.H2', molecularScale({ gas: 'air', atK: T20_K }, { gas: 'H2', atK: T20_K }))
  })
})

describe('transitional and viscous flow', () => {
  const flow = transitionalFlow('air', 0.1, T20_K, 1.82e-5)
  test.each(checkValues.map((e) => e.id).filter((id) => id.startsWith('C.knudsen.air.')))('%s', (id) => {
    expectCheck(id, transitionalSpecific(flow, checkInput(id, 'p_mean')))
  })

  test('laminar flow', () => {
    const specific = viscousSpecific(0.01, 100, 1.82e-5) / 0.01
    expectCheck('C.visc.air_handbook', specific)
    expectCheck('C.visc.air', specific)
  })

  test('has its minimum of 0.951 near 4.4e-3 Pa m, and the slope changes sign there', () => {
    const pressures = Array.from({ length: 4000 }, (_, i) => 10 ** (-5 + i / 1000))
    const values = pressures.map((p) => transitionalSpecific(flow, p))
    const least = Math.min(...values)
    expectCheck('C.knudsen.min', least / flow.molecular)
    const at = pressures[values.indexOf(least)]!
    expect(at * 0.1).toBeGreaterThan(4e-3)
    expect(at * 0.1).toBeLessThan(4.8e-3)
    expect(transitionalSlope(flow, at / 1.1)).toBeLessThan(0)
    expect(transitionalSlope(flow, at * 1.1)).toBeGreaterThan(0)
  })

  test('the slope is the derivative of the value', () => {
    for (const p of [1e-3, 0.05, 3, 400]) {
      const h = p * 1e-5
      const difference = (transitionalSpecific(flow, p + h) - transitionalSpecific(flow, p - h)) / (2 * h)
      expect(transitionalSlope(flow, p) / difference).toBeCloseTo(1, 6)
    }
  })
})

describe('choked flow', () => {
  test('sets in at about half the upstream pressure and is 199 m/s for air', () => {
    expectCheck('C.choked.ratio', chokedRatio(1.4))
    expectCheck('C.choked.subcritical', apertureContinuumFlow('air', 1, T20_K, 0.8))
    expect(apertureContinuumFlow('air', 1, T20_K, 0.1)).toBe(apertureContinuumFlow('air', 1, T20_K, 0.5))
    expect(apertureContinuumFlow('air', 1, T20_K, 0)).toBeCloseTo(198.6, 1)
    expect(apertureContinuumFlow('air', 1, T20_K, 1)).toBe(0)
  })
})

describe('the bore of a valve', () => {
  const flow = apertureFlow('air', 0.1, T20_K)
  const area = crossSection(0.1)

  test('far below a pascal passes molecular flow, into vacuum from an atmosphere the choked flow', () => {
    const thin = apertureThroughput(flow, 1e-6, 4e-7)
    expect(thin / (apertureConductance('air', area, T20_K) * 6e-7)).toBeCloseTo(1, 3)
    expect(
      apertureThroughput(flow, 1e5, 0) / (1e5 * apertureContinuumFlow('air', area, T20_K, 0)),
    ).toBeCloseTo(1, 2)
    expect(apertureThroughput(flow, 5, 5)).toBe(0)
  })
  test('between, it rises from 1 to 1.7 times molecular flow and never falls with the pressure', () => {
    const over = (p: number) => apertureThroughput(flow, p, 0) / (flow.molecular * p)
    const pressures = Array.from({ length: 90 }, (_, i) => 10 ** (-4 + i / 10))
    for (const [i, p] of pressures.entries()) {
      expect(over(p)).toBeGreaterThanOrEqual(1)
      expect(over(p)).toBeLessThan(1.72)
      if (i > 0) expect(over(p)).toBeGreaterThan(over(pressures[i - 1]!))
    }
  })
  test('subcritical flow is within 1 % of de Saint-Venant and Wantzel', () => {
    for (let ratio = 0.5; ratio < 0.975; ratio += 0.025) {
      const exact = 1e6 * apertureContinuumFlow('air', area, T20_K, ratio)
      expect(Math.abs(apertureThroughput(flow, 1e6, 1e6 * ratio) / exact - 1)).toBeLessThan(0.01)
    }
  })
  test('more pressure behind means less flow', () => {
    for (const up of [1e-3, 1, 1e3, 1e5]) {
      const flows = [0, 0.3, 0.6, 0.9, 0.999, 1].map((ratio) => apertureThroughput(flow, up, up * ratio))
      for (let i = 1; i < flows.length; i++) expect(flows[i]!).toBeLessThanOrEqual(flows[i - 1]!)
    }
  })
})

describe('parts together', () => {
  test('series, parallel and the speed left behind a port', () => {
    expectCheck('C.series', inSeries(0.1, 0.05, 0.025))
    expectCheck('C.Seff', effectiveSpeed(1, 0.5))
    expect(inParallel(0.1, 0.05)).toBeCloseTo(0.15, 15)
    expect(effectiveSpeed(0, 0.5)).toBe(0)
    expect(() => inSeries(1, 0)).toThrow('conductance is 0; expected a finite number above 0')
  })
})
