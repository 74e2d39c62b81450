import { describe, expect, it } from 'vitest'
import { steelConductivity } from '#app/physics/steel.ts'
import {
  bakeEnergyPerM,
  coolSeconds,
  currentFor,
  expansionM,
  type HeatedTube,
  heatUpSeconds,
  holdPower,
  insulationLoss,
  joulePower,
  radiationLoss,
  rampPower,
  seriesVolts,
  storedHeatPerM,
  transpirationRatio,
} from '#app/physics/thermal.ts'
import { marchLine } from '#app/physics/thermal-line.ts'

const TUBE: HeatedTube = { diameterM: 0.6, wallM: 0.003, lossWM2K: 0.7, ambientK: 293.15 }
const CONSTANT: HeatedTube = { ...TUBE, specificHeatJKgK: 500 }

function near(value: number, expected: number, relative: number): void {
  expect(Math.abs(value / expected - 1)).toBeLessThanOrEqual(relative)
}

describe('heat per metre', () => {
  it('needs more power to climb than to hold', () => {
    expect(rampPower(TUBE, 423.15, 10 / 3600)).toBeGreaterThan(holdPower(TUBE, 423.15))
    expect(rampPower(TUBE, 423.15, 0)).toBe(holdPower(TUBE, 423.15))
    expect(rampPower(TUBE, 300, -10 / 3600)).toBeLessThan(0)
  })

  it('warms as the exponential of one time constant when the heat capacity is constant', () => {
    const tau = (7930 * Math.PI * 0.6 * 0.003 * 500) / (0.7 * Math.PI * 0.6)
    const final = 230 / (0.7 * Math.PI * 0.6)
    near(heatUpSeconds(CONSTANT, 230, 293.15, 423.15), -tau * Math.log(1 - 130 / final), 1e-9)
    near(coolSeconds(CONSTANT, 423.15, 313.15), tau * Math.log(130 / 20), 1e-9)
  })

  it('refuses power that would not get there and cooling below the surroundings', () => {
    expect(() => heatUpSeconds(TUBE, 170, 293.15, 423.15)).toThrow(/more than the 171\.5 W\/m of loss/)
    expect(() => coolSeconds(TUBE, 423.15, 293.15)).toThrow(/above the surroundings/)
  })

  it('counts all energy of a slow ramp: stored heat, half the loss on the way, the whole while holding', () => {
    const ramp = { fromK: 293.15, toK: 423.15, rateKS: 10 / 3600, holdSeconds: 7 * 86400 }
    const parts = storedHeatPerM(TUBE, 293.15, 423.15) + holdPower(TUBE, 423.15) * (7 * 86400 + 13 * 1800)
    near(bakeEnergyPerM(TUBE, ramp), parts, 1e-12)
  })

  it('finds the current for a power and the volts of a pair', () => {
    const current = currentFor(TUBE, 200, 423.15)
    near(joulePower(TUBE, current, 423.15), 200, 1e-12)
    // Both tubes of the pair take the same power: volts times amperes is 2 x 150 m x 200 W/m.
    near(seriesVolts(TUBE, current, 423.15, 150) * current, 2 * 150 * 200, 1e-12)
  })

  it('puts 0.45 to 0.9 W/(m2 K) on a tube in 100 mm of wool', () => {
    // Common practice, no source: 0.45 for the bare layer, 0.6 to 0.9 with supports.
    const loss = insulationLoss(0.6, { thicknessM: 0.1, conductivityWMK: 0.045, filmWM2K: 8 })
    expect(loss).toBeGreaterThan(0.4)
    expect(loss).toBeLessThan(0.6)
  })

  it('loses far more where the tube is bare', () => {
    near(radiationLoss(0.2, 423.15, 293.15), 279.84282966670435, 1e-6)
  })

  it('stretches by 33 mm per 15 m on the way to 150 degrees', () => {
    near(expansionM(15, 293.15, 423.15), 0.0327, 0.01)
  })
})

describe('transpiration', () => {
  const line = { gas: 'N2' as const, diameterM: 0.04 }

  it('is the root of the temperatures in molecular flow and gone in viscous flow', () => {
    // sqrt(423.15/293.15) = 1.2014 (Knudsen 1910).
    near(transpirationRatio(423.15, 293.15, { ...line, pressurePa: 1e-6 }), 1.2014, 1e-4)
    near(transpirationRatio(423.15, 293.15, { ...line, pressurePa: 1e4 }), 1, 1e-3)
    // A gauge head at 45 degrees reads at most 3.6 % high at 23 degrees.
    near(transpirationRatio(318.15, 296.15, { ...line, pressurePa: 0 }), 1.036, 1e-3)
  })
})

describe('marchLine', () => {
  it('follows the single exponential where nothing varies along the line', () => {
    const line = { tube: CONSTANT, lengthM: 10, intervals: 10, startK: 293.15 }
    const history = marchLine(line, () => 230, [0, 23273.10968249237], 300)
    expect(history.kelvin[0]![5]).toBe(293.15)
    for (const k of history.kelvin[1]!) expect(Math.abs(k - 423.15)).toBeLessThan(0.01)
  })

  it('is of second order in the step', () => {
    const line = { tube: CONSTANT, lengthM: 10, intervals: 2, startK: 293.15 }
    const error = (h: number) =>
      Math.abs(marchLine(line, () => 230, [23273.10968249237], h).kelvin[0]![1]! - 423.15)
    const ratio = error(6000) / error(3000)
    expect(ratio).toBeGreaterThan(3)
    expect(ratio).toBeLessThan(5.5)
  })

  it('ends on the fin law beside a cold flange', () => {
    // Fin equation w (k T')' = U (T - Tfar). Its first integral is w (k T')2 / 2 = U times the integral of k (T - Tfar)
    // over T, and k is linear in T, so the heat flow q(T) has a closed form and the place of every T a quadrature.
    const line = { tube: TUBE, lengthM: 6, intervals: 1200, startK: 423.15, leftK: 293.15 }
    const hold = holdPower(TUBE, 423.15)
    const T = marchLine(line, () => hold, [20 * 86400], 3600).kelvin[0]!
    const flow = (kelvin: number): number => {
      const u = 423.15 - kelvin
      return Math.sqrt(
        ((2 * 0.7) / 0.003) * ((steelConductivity(423.15) * u ** 2) / 2 - (0.0127 * u ** 3) / 3),
      )
    }
    const placeOf = (kelvin: number): number => {
      const step = (kelvin - 293.15) / 4000
      let x = 0
      for (let i = 0; i < 4000; i++) {
        const middle = 293.15 + (i + 0.5) * step
        x += (steelConductivity(middle) / flow(middle)) * step
      }
      return x
    }
    expect(T[0]).toBe(293.15)
    for (const x of [0.1, 0.2, 0.5, 1]) near(placeOf(T[Math.round(x / 0.005)]!), x, 1e-3)
    const flange = Math.PI * 0.6 * 0.003 * flow(293.15)
    const lost = T.reduce(
      (sum, k, i) => sum + holdPower(TUBE, k) * (i === 0 || i === 1200 ? 0.0025 : 0.005),
      0,
    )
    near(hold * 6 - lost, flange, 1e-4)
  })

  it('is the same seen from the other end', () => {
    const left = marchLine(
      {
        tube: TUBE,
        lengthM: 3,
        intervals: 60,
        startK: 293.15,
        leftK: 300,
        parts: [{ atM: 1, lossWK: 5, capacityJK: 2e4 }],
      },
      () => 200,
      [40_000],
    )
    const right = marchLine(
      {
        tube: TUBE,
        lengthM: 3,
        intervals: 60,
        startK: 293.15,
        rightK: 300,
        parts: [{ atM: 2, lossWK: 5, capacityJK: 2e4 }],
      },
      () => 200,
      [40_000],
    )
    for (let i = 0; i <= 60; i++) expect(left.kelvin[0]![i]).toBeCloseTo(right.kelvin[0]![60 - i]!, 8)
  })

  it('balances the heat with a cold part', () => {
    const parts = [{ atM: 5, lossWK: 3, capacityJK: 0 }]
    const steady = marchLine(
      { tube: TUBE, lengthM: 10, intervals: 200, startK: 400, parts },
      () => 171,
      [60 * 86400],
      7200,
    )
    const T = steady.kelvin[0]!
    const spacing = 0.05
    let lost = 3 * (T[100]! - 293.15)
    for (let i = 0; i <= 200; i++) {
      lost += holdPower(TUBE, T[i]!) * (i === 0 || i === 200 ? spacing / 2 : spacing)
    }
    near(lost, 1710, 1e-6)
    expect(T[100]).toBeLessThan(T[0]! - 20)
  })

  it('says when the tube would melt or the times run backwards', () => {
    const line = { tube: TUBE, lengthM: 1, intervals: 2, startK: 293.15 }
    expect(() => marchLine(line, () => 1e5, [86400])).toThrow(/temperature of node 0/)
    expect(() => marchLine(line, () => 0, [100, 50])).toThrow(/outputSeconds is 50/)
  })
})
