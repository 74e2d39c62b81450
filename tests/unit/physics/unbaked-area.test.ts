import { describe, expect, test, vi } from 'vitest'
import { afterBake, holdToMeet } from '#app/physics/bake.ts'
import { bakeHoursToReach, predictPumpDown, type SegmentModel } from '#app/physics/predict.ts'
import { simulateSegment } from '#app/physics/simulate.ts'
import { cooledWater, waterCoverage } from '#app/physics/water.ts'

vi.setConfig({ testTimeout: 60_000 })

const ROOM_K = 293.15
const HOUR_S = 3600

/** The tube of the bake benchmark, 150 m by 1.2 m, unfired steel, pumped at one end. */
const bare: SegmentModel = {
  lengthM: 150,
  diameterM: 1.2,
  wallM: 3e-3,
  temperatureK: ROOM_K,
  pumps: [{ atM: 0, speedM3S: { H2: 1, H2O: 2, N2: 1 } }],
  hydrogen: { kind: 'diffusion', c0PerM3: 5e24, agedTauM2: 1e-9 },
  water: { state: 'unbaked', capacityPerM2: 5e19 },
}
const stubs = (share: number, followShare = 0): SegmentModel => ({
  ...bare,
  unbakedArea: { share, followShare },
})

function corners(bakeK: number, holdH: number) {
  const rampH = (bakeK - ROOM_K) / 5
  const hours = [24, 24 + rampH, 24 + rampH + holdH, 24 + 2 * rampH + holdH]
  const kelvin = [ROOM_K, bakeK, bakeK, ROOM_K]
  return { corners: hours.map((h, i) => ({ atS: h * HOUR_S, kelvin: kelvin[i]! })), coldH: hours[3]! }
}

function simulated(model: SegmentModel, bakeK: number, holdH: number) {
  const { corners: programme, coldH } = corners(bakeK, holdH)
  const run = simulateSegment(model, { corners: programme, hours: [coldH + 100], atM: 150 })
  expect(run.massError).toBeLessThan(1e-7)
  return run
}

describe('an area that the bake does not reach', () => {
  test('closed form: cold, the whole wall holds what both parts held hot', () => {
    const [hotPa, hotK, share, atK] = [1e-4, 353.15, 0.01, 303.15]
    const coldPa = cooledWater(hotPa, hotK, ROOM_K, undefined, { share, atK })
    const before = 0.99 * waterCoverage(hotPa, hotK).theta + 0.01 * waterCoverage(hotPa, atK).theta
    // On the plateau; the closed form of the tube itself is good to a thousandth there.
    expect(waterCoverage(coldPa, ROOM_K).theta / before).toBeCloseTo(1, 2)
    expect(coldPa).toBeGreaterThan(cooledWater(hotPa, hotK, ROOM_K))
  })

  test('closed form: a vanishing area changes nothing', () => {
    const alone = cooledWater(1e-6, 423.15, ROOM_K)
    const nearly = cooledWater(1e-6, 423.15, ROOM_K, undefined, { share: 1e-9, atK: ROOM_K })
    expect(nearly / alone).toBeCloseTo(1, 4)
  })

  test('leaves more water the larger and the cooler it is, by the full solution and by the closed form', () => {
    const bakeK = 423.15
    const of = (model: SegmentModel) => [
      simulated(model, bakeK, 24).byGasPa.H2O[0]!,
      afterBake(model, { bakeK, holdHours: 24, upKH: 5, coldHours: 100 }, 150).waterPa,
    ]
    const none = of(bare)
    const small = of(stubs(1e-3))
    const large = of(stubs(1e-2))
    const warm = of(stubs(1e-2, 0.7))
    for (const k of [0, 1]) {
      expect(small[k]! / none[k]!).toBeGreaterThan(1)
      expect(large[k]!).toBeGreaterThan(small[k]!)
      expect(warm[k]!).toBeLessThan(large[k]!)
      expect(warm[k]!).toBeGreaterThan(none[k]!)
    }
  })

  test('matters little after a mild bake: closed form and full solution agree within a third', () => {
    for (const share of [1e-3, 1e-2]) {
      const full = simulated(stubs(share), 363.15, 72).byGasPa.H2O[0]!
      const closed = afterBake(
        stubs(share),
        { bakeK: 363.15, holdHours: 72, upKH: 5, coldHours: 100 },
        150,
      ).waterPa
      expect(Math.abs(Math.log(closed / full))).toBeLessThan(Math.log(4 / 3))
      expect(full / simulated(bare, 363.15, 72).byGasPa.H2O[0]!).toBeLessThan(1.5)
    }
  })

  test('gives the hydrogen of its own cooler history', () => {
    const programme = { bakeK: 423.15, holdHours: 240, upKH: 5, coldHours: 100 }
    const share = 0.05
    const closed = afterBake(stubs(share), programme, 150).hydrogenPa
    // Five per cent of the wall never saw the bake; the rest is as without it.
    const baked = afterBake(bare, programme, 150).hydrogenPa
    const never = predictPumpDown(bare, { hours: [24 + 2 * 26 + 240 + 100], atM: 150 }).byGasPa.H2[0]!
    expect(closed / ((1 - share) * baked + share * never)).toBeCloseTo(1, 2)
    const full = simulated(stubs(share), 423.15, 240).byGasPa.H2[0]!
    expect(full / closed).toBeCloseTo(1, 1)
  })

  test('asks for a longer hold, and where it sets the pressure no hold does', () => {
    const quiet = { kind: 'low-hydrogen', qPaMS: 1e-15, atK: ROOM_K } as const
    const hold = (model: SegmentModel) =>
      holdToMeet({ ...model, hydrogen: quiet }, { bakeK: 393.15, upKH: 5 }, 3e-10, 150)?.holdHours ?? Infinity
    const bareHours = hold(bare)
    expect(hold(stubs(1e-3))).toBeGreaterThan(bareHours)
    expect(hold(stubs(1e-2))).toBeGreaterThan(hold(stubs(1e-3)))
    const options = { targetPa: 3e-9, bakeK: 373.15, atM: 150 }
    const reach = (model: SegmentModel) => bakeHoursToReach({ ...model, hydrogen: quiet }, options)!.hours
    expect(reach(stubs(1e-2))).toBeGreaterThan(reach(bare))
  })

  test('is refused where it cannot be', () => {
    const bad = { ...bare, unbakedArea: { share: 1.2, followShare: 0 } }
    expect(() => predictPumpDown(bad, { hours: [1], atM: 0 })).toThrow(
      'unbakedArea.share is 1.2; expected 0 to 1',
    )
  })
})
