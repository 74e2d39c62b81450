import { describe, expect, test } from 'vitest'
import { hydrogenDiffusivity } from '#app/physics/hydrogen.ts'
import { bakeHoursToReach, predictPumpDown, type SegmentModel } from '#app/physics/predict.ts'
import { simulateSegment } from '#app/physics/simulate.ts'
import { TransportError } from '#app/physics/transport.ts'

const ROOM_K = 291.15
const HOUR_S = 3600

/** A narrow segment before its first bake, on a cart of 450 l/s at the cross. */
const unbaked: SegmentModel = {
  lengthM: 150,
  diameterM: 0.5,
  wallM: 3e-3,
  temperatureK: ROOM_K,
  pumps: [{ atM: 75, speedM3S: { H2: 0.45, N2: 0.45 } }],
  hydrogen: { kind: 'diffusion', c0PerM3: 7e23, agedTauM2: 10 * 3.156e7 * hydrogenDiffusivity(ROOM_K) },
  water: { state: 'unbaked', capacityPerM2: 5.9e19 },
}

/** Corners of a ramp of 10 K/h to `bakeK`, a hold, and cooling of 10 K/h, from hour `startH` on. */
function bakeCorners(startH: number, bakeK: number, holdH: number) {
  const rampH = (bakeK - ROOM_K) / 10
  const hours = [startH, startH + rampH, startH + rampH + holdH, startH + 2 * rampH + holdH]
  const kelvin = [ROOM_K, bakeK, bakeK, ROOM_K]
  return { corners: hours.map((h, i) => ({ atS: h * HOUR_S, kelvin: kelvin[i]! })), hours, endH: hours[3]! }
}

describe('a segment by the full solution', () => {
  test('cold, it agrees with the closed form within 2 % from three hours on', () => {
    const hours = [3, 10, 66, 157]
    const run = simulateSegment(unbaked, { corners: [{ atS: 0, kelvin: ROOM_K }], hours, atM: 0 })
    const closed = predictPumpDown(unbaked, { hours, atM: 0 })
    run.n2EquivalentPa.forEach((p, k) => {
      expect(Math.abs(p / closed.n2EquivalentPa[k]! - 1)).toBeLessThan(0.02)
    })
    expect(run.massError).toBeLessThan(1e-8)
  })

  test('through a bake, the reading peaks on the ramp and ends far below the start', () => {
    const { corners, hours, endH } = bakeCorners(72, 423.15, 168)
    const run = simulateSegment(unbaked, {
      corners,
      hours: [72, 80, hours[1]!, hours[2]!, endH, endH + 24],
      atM: 75,
    })
    const [cold, , top, held, cooled] = run.n2EquivalentPa as unknown as [
      number,
      number,
      number,
      number,
      number,
    ]
    expect(Array.from(run.wallK)).toEqual([ROOM_K, ROOM_K + 80, 423.15, 423.15, ROOM_K, ROOM_K])
    expect(top).toBeGreaterThan(10 * cold)
    expect(held).toBeLessThan(top)
    expect(cooled).toBeLessThan(cold / 50)
    expect(run.massError).toBeLessThan(1e-8)
  })

  test('after cooling hydrogen is what the age of the sheet says', () => {
    const { corners, endH } = bakeCorners(24, 423.15, 168)
    const run = simulateSegment(unbaked, { corners, hours: [endH + 48], atM: 75 })
    // Age by hand over the hold, and by small steps over both ramps.
    let tau = 10 * 3.156e7 * hydrogenDiffusivity(ROOM_K) + 168 * HOUR_S * hydrogenDiffusivity(423.15)
    const parts = 20_000
    for (let i = 0; i < parts; i++) {
      tau += ((2 * 13.2 * HOUR_S) / parts) * hydrogenDiffusivity(ROOM_K + (132 * (i + 0.5)) / parts)
    }
    tau += 72 * HOUR_S * hydrogenDiffusivity(ROOM_K)
    const later: SegmentModel = { ...unbaked, hydrogen: { kind: 'diffusion', c0PerM3: 7e23, agedTauM2: tau } }
    const closed = predictPumpDown(later, { hours: [0], atM: 75 }).byGasPa.H2[0]!
    expect(Math.abs(run.byGasPa.H2[0]! / closed - 1)).toBeLessThan(3e-3)
  })

  test('the hold that the closed form names does reach the target, for water and for hydrogen', () => {
    for (const [targetPa, bakeK] of [
      [4e-7, 363.15],
      [1.2e-7, 423.15],
    ] as const) {
      const needed = bakeHoursToReach(unbaked, { targetPa, bakeK, atM: 0 })!
      const { corners, endH } = bakeCorners(24, bakeK, needed.hours)
      const reached = simulateSegment(unbaked, { corners, hours: [endH + 48], atM: 0 }).n2EquivalentPa[0]!
      expect(reached / targetPa).toBeLessThan(1.02)
      expect(reached / targetPa).toBeGreaterThan(0.5)
    }
  })

  test('hot for two months at 200 degrees, water stands at its floor and nothing breaks', () => {
    const { corners, endH } = bakeCorners(24, 473.15, 60 * 24)
    const run = simulateSegment(unbaked, { corners, hours: [endH - 100, endH, endH + 100], atM: 0 })
    for (const p of run.byGasPa.H2O) {
      expect(p).toBeGreaterThanOrEqual(1e-11)
      expect(p).toBeLessThan(1e-10)
    }
  })

  test('an air leak shows at the leak, and a baked wall stays at its floor', () => {
    const baked: SegmentModel = {
      ...unbaked,
      water: { state: 'baked', floorPa: 2e-11 },
      airLeaks: [{ atM: 150, qPaM3S: 5e-8 }],
    }
    const run = simulateSegment(baked, { corners: [{ atS: 0, kelvin: ROOM_K }], hours: [24], atM: 150 })
    const closed = predictPumpDown(baked, { hours: [24], atM: 150 })
    expect(run.byGasPa.N2[0]! / closed.byGasPa.N2[0]!).toBeCloseTo(1, 6)
    expect(run.byGasPa.H2O[0]! / 2e-11).toBeGreaterThanOrEqual(1)
    expect(run.byGasPa.H2O[0]! / 2e-11).toBeLessThan(1.5)
  })

  test('can be cancelled', () => {
    const options = { corners: [{ atS: 0, kelvin: ROOM_K }], hours: [100], atM: 0, cancelled: () => true }
    expect(() => simulateSegment(unbaked, options)).toThrow(TransportError)
  })
})
