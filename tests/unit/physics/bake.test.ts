import { describe, expect, it } from 'vitest'
import { afterBake, equivalentHold, holdToMeet } from '#app/physics/bake.ts'
import { bakeChoice } from '#app/physics/bake-options.ts'
import { bakeHoursToReach, type SegmentModel } from '#app/physics/predict.ts'
import { WATER_FLOOR_PA } from '#app/physics/water.ts'
import { checkValues, expectCheck } from '../../fixtures/physics/check-values.ts'

// A closed-ended tube of 150 m by 1.2 m, pumped at 0, of unfired steel.
const TUBE: SegmentModel = {
  lengthM: 150,
  diameterM: 1.2,
  wallM: 0.003,
  temperatureK: 293.15,
  pumps: [{ atM: 0, speedM3S: { H2: 1, H2O: 2, N2: 1 } }],
  hydrogen: { kind: 'diffusion', c0PerM3: 5e24, agedTauM2: 1e-9 },
  water: { state: 'unbaked', capacityPerM2: 5e19 },
}
const FIRED: SegmentModel = { ...TUBE, hydrogen: { kind: 'low-hydrogen', qPaMS: 5e-10, atK: 293.15 } }
const HEATED = { diameterM: 1.2, wallM: 0.003, lossWM2K: 0.7, ambientK: 293.15 }

describe('afterBake', () => {
  // Reference: the full transport equations along the tube, solved with the BDF routine of scipy.
  const transported = checkValues.filter((c) => c.id.startsWith('plan.after.'))

  it('meets the transport solution while the front lies inside the energies', () => {
    let compared = 0
    for (const { id, inputs, expected } of transported) {
      const { bakeT, hold_d } = inputs as { bakeT: number; hold_d: number }
      const hot = hold_d * 24 + (2 * (bakeT - 293.15)) / 5
      const coldHours = Math.max(480, 24 + hot + 164) - hot
      const found = afterBake(TUBE, { bakeK: bakeT, holdHours: hold_d * 24, upKH: 5, coldHours }, 150)
      if (bakeT < 420) {
        expectCheck(id, [found.waterPa, found.hydrogenPa])
        compared++
      } else {
        // Beyond the highest binding energy the closed form stays above the exponential of the transport.
        const [water, hydrogen] = expected as [number, number]
        expect(found.waterPa).toBeGreaterThan(water)
        expect(Math.abs(found.hydrogenPa / hydrogen - 1)).toBeLessThan(0.02)
      }
    }
    expect(compared).toBe(9)
  })

  it('says "at the floor" instead of absurd numbers', () => {
    const found = afterBake(FIRED, { bakeK: 433.15, holdHours: 720, upKH: 5 }, 150)
    expect(found.waterPa).toBe(WATER_FLOOR_PA)
    expect(found.waterAtFloor).toBe(true)
    expect(found.limitedBy).toBe('hydrogen')
  })

  it('knows which gas limits', () => {
    expect(afterBake(FIRED, { bakeK: 333.15, holdHours: 24, upKH: 5 }, 150).limitedBy).toBe('water')
    const leaky: SegmentModel = { ...FIRED, airLeaks: [{ atM: 100, qPaM3S: 1e-5 }] }
    const found = afterBake(leaky, { bakeK: 393.15, holdHours: 240, upKH: 5 }, 150)
    expect(found.limitedBy).toBe('air')
    expect(found.airPa).toBeGreaterThan(1e-5)
  })

  it('leaves less after a longer, hotter or slower bake', () => {
    const base = { bakeK: 373.15, holdHours: 48, upKH: 10 }
    const total = (p: typeof base) => afterBake(TUBE, p, 150).n2EquivalentPa
    expect(total({ ...base, holdHours: 96 })).toBeLessThan(total(base))
    expect(total({ ...base, bakeK: 393.15 })).toBeLessThan(total(base))
    expect(total({ ...base, upKH: 5 })).toBeLessThan(total(base))
    // A bake of no kelvins and no hours is no bake.
    const none = afterBake(TUBE, { bakeK: 293.15, holdHours: 100, upKH: 10 }, 150)
    expect(none.waterPa).toBeGreaterThan(1e-6)
  })
})

describe('pumps that take over after the bake', () => {
  const programme = { bakeK: 353.15, holdHours: 48, upKH: 10 }
  const getter = [{ atM: 0, speedM3S: { H2: 4, H2O: 8, N2: 4 } }]

  it('lower hydrogen as they pump it, and leave the water that the wall still holds', () => {
    const stay = afterBake(TUBE, programme, 0)
    const change = afterBake(TUBE, { ...programme, afterPumps: getter }, 0)
    // At the pump itself the pressure is the whole load over the speed.
    expect(change.hydrogenPa / stay.hydrogenPa).toBeCloseTo(1 / 4, 6)
    expect(change.waterPa / stay.waterPa).toBeCloseTo(1, 6)
    const muchLater = afterBake(TUBE, { ...programme, coldHours: 87_660, afterPumps: getter }, 0)
    expect(muchLater.waterPa).toBeLessThan(
      0.9 * afterBake(TUBE, { ...programme, coldHours: 87_660 }, 0).waterPa,
    )
  })

  it('must be pumps', () => {
    expect(() => afterBake(TUBE, { ...programme, afterPumps: [] }, 0)).toThrow(/number of pumps/)
  })
})

describe('holdToMeet', () => {
  it('meets the holds found by bisection on the transport solution', () => {
    // Target for water alone: hydrogen set to nothing, the gauge factor of water (0.93) taken off.
    const dry: SegmentModel = { ...TUBE, hydrogen: { kind: 'low-hydrogen', qPaMS: 1e-20, atK: 293.15 } }
    const soaks = checkValues.filter((c) => c.id.startsWith('plan.soak.'))
    expect(soaks.length).toBe(5)
    for (const { id, inputs } of soaks) {
      const { bakeT, target_Pa } = inputs as { bakeT: number; target_Pa: number }
      const found = holdToMeet(dry, { bakeK: bakeT, upKH: 5, coldHours: 188 }, 0.93 * target_Pa, 150)
      expectCheck(id, found!.holdHours / 24)
    }
  })

  it('inverts afterBake', () => {
    const programme = { bakeK: 373.15, upKH: 10, downKH: 20 }
    const total = (holdHours: number) => afterBake(FIRED, { ...programme, holdHours }, 75).n2EquivalentPa
    const targetPa = (total(0) + total(1000)) / 2
    const { holdHours } = holdToMeet(FIRED, programme, targetPa, 75)!
    expect(holdHours).toBeGreaterThan(0)
    expect(total(holdHours) / targetPa).toBeCloseTo(1, 6)
  })

  it('asks no hold where the ramps do, and admits what no hold can do', () => {
    expect(holdToMeet(TUBE, { bakeK: 423.15, upKH: 5 }, 1e-5, 150)!.holdHours).toBe(0)
    expect(holdToMeet(FIRED, { bakeK: 423.15, upKH: 5 }, 1e-9, 150)).toBeNull()
  })

  it('needs less than the estimate without ramps', () => {
    const options = { targetPa: 3e-6, bakeK: 373.15, atM: 150 }
    const bare = bakeHoursToReach(TUBE, options)!
    const ramped = holdToMeet(TUBE, { bakeK: 373.15, upKH: 5 }, 3e-6, 150)!
    expect(ramped.holdHours).toBeLessThan(bare.hours)
    expect(ramped.holdHours).toBeGreaterThan(0.8 * bare.hours)
  })

  it('refuses a bake colder than the tube and ramps of no speed', () => {
    expect(() => holdToMeet(TUBE, { bakeK: 280, upKH: 5 }, 1e-6, 0)).toThrow(/bakeK is 280/)
    expect(() => holdToMeet(TUBE, { bakeK: 400, upKH: 0 }, 1e-6, 0)).toThrow(/upKH is 0/)
  })
})

describe('equivalentHold', () => {
  it('has two different exchange rates for the two gases', () => {
    expectCheck('water.equiv_time', equivalentHold('water', 393.15, 2 * 86400, 373.15, 282.7) / 86400)
    // Equal age: 10 d at 150 degrees are 32 d at 120 (Arrhenius with 53.9 kJ/mol).
    expect(equivalentHold('hydrogen', 423.15, 10, 393.15, 1)).toBeCloseTo(32.2, 0)
  })
})

describe('bakeChoice', () => {
  const question = {
    model: FIRED,
    atM: 150,
    targetPa: 2.5e-7,
    tube: HEATED,
    coolestC: 60,
    hottestC: 160,
    upKH: 10,
  }
  // The hydrogen of this tube alone reads just under this.
  const floor = afterBake(FIRED, { bakeK: 433.15, holdHours: 720, upKH: 10 }, 150).n2EquivalentPa
  const asked = { ...question, targetPa: 1.02 * floor }

  it('trades temperature for time, and keeps nothing that another option beats', () => {
    const { options, left } = bakeChoice(asked)
    expect(options.length).toBeGreaterThan(2)
    for (let i = 1; i < options.length; i++) {
      expect(options[i]!.celsius).toBeGreaterThan(options[i - 1]!.celsius)
      const cheaper = options[i]!.energyJ < options[i - 1]!.energyJ
      const sooner = options[i]!.totalHours < options[i - 1]!.totalHours
      expect(cheaper || sooner).toBe(true)
    }
    expect(options.length + left.length).toBe(21)
    for (const option of options)
      expect(option.outcome.n2EquivalentPa).toBeLessThanOrEqual(asked.targetPa * 1.000001)
  })

  it('drops bakes that only add heat once the ramps are enough', () => {
    const { options, left } = bakeChoice({ ...asked, targetPa: 5 * floor })
    const beaten = left.filter((l) => l.reason === 'beaten').map((l) => l.celsius)
    expect(beaten).toContain(160)
    expect(options.some((o) => o.celsius === 160)).toBe(false)
  })

  it('keeps to the power cap by the power at the end of the climb', () => {
    const free = bakeChoice(asked)
    const hottest = free.options.at(-1)!
    expect(hottest.peakW).toBeGreaterThan(hottest.holdW)
    const cap = (hottest.peakW + hottest.holdW) / 2
    const capped = bakeChoice({ ...asked, powerCapW: cap })
    expect(capped.options.some((o) => o.celsius === hottest.celsius)).toBe(false)
    expect(capped.left).toContainEqual({ celsius: hottest.celsius, reason: 'over-power-cap' })
  })

  it('names temperatures at which the target stays out of reach', () => {
    const { options, left } = bakeChoice({ ...asked, targetPa: 0.9 * floor })
    expect(options).toEqual([])
    expect(left.every((l) => l.reason === 'target-out-of-reach')).toBe(true)
  })

  it('pays for a heated way down', () => {
    const off = bakeChoice({ ...asked, coolestC: 120, hottestC: 120, downKH: 2 }).options[0]!
    const on = bakeChoice({ ...asked, coolestC: 120, hottestC: 120, downKH: 2, heatedDown: true }).options[0]!
    expect(on.energyJ).toBeGreaterThan(off.energyJ)
    // At most the mean loss over the 50 h down, less the heat the steel itself gives back.
    const meanLoss = (0.7 * Math.PI * 1.2 * 100 * 150) / 2
    expect(on.energyJ - off.energyJ).toBeLessThan(meanLoss * 50 * 3600)
    expect(on.energyJ - off.energyJ).toBeGreaterThan(0.3 * meanLoss * 50 * 3600)
  })
})
