import fc from 'fast-check'
import { describe, expect, test, vi } from 'vitest'
import { afterBake } from '#app/physics/bake.ts'
import {
  inParallel,
  inSeries,
  transitionalFlow,
  transitionalSpecific,
  transmission,
} from '#app/physics/conductance.ts'
import { T20_K } from '#app/physics/constants.ts'
import type { GasRun } from '#app/physics/gas-run.ts'
import { GASES } from '#app/physics/gases.ts'
import { slabAtomFlux, slabRemaining } from '#app/physics/hydrogen.ts'
import { bakeHoursToReach, hoursToReach, predictPumpDown, type SegmentModel } from '#app/physics/predict.ts'
import { temperatureProgramme } from '#app/physics/programme.ts'
import { type GasHistory, runTransport } from '#app/physics/transport.ts'
import { buildMesh } from '#app/physics/tube.ts'
import { bakedWater, DEFAULT_WATER, waterCoverage } from '#app/physics/water.ts'
import { steadyPump } from '#tests/fixtures/physics/benchmark-runs.ts'

// Random runs of the solver share the machine with everything else.
vi.setConfig({ testTimeout: 60_000 })

const number = (min: number, max: number) => fc.double({ min, max, noNaN: true })
/** Spread evenly over the decades. */
const decades = (min: number, max: number) => number(Math.log10(min), Math.log10(max)).map((log) => 10 ** log)

describe('conductance', () => {
  test('a longer tube lets less through, and never more than its mouth', () => {
    fc.assert(
      fc.property(decades(1e-3, 1e4), number(1.001, 3), (x, factor) => {
        expect(transmission(x * factor)).toBeLessThan(transmission(x))
        expect(transmission(x)).toBeLessThanOrEqual(1)
      }),
    )
  })
  test('transitional flow is never below 0.95 of molecular flow, for any gas, tube and temperature', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...GASES),
        decades(0.01, 2),
        number(250, 500),
        decades(1e-9, 1e5),
        (gas, d, kelvin, p) => {
          const flow = transitionalFlow(gas, d, kelvin)
          expect(transitionalSpecific(flow, p) / flow.molecular).toBeGreaterThan(0.945)
        },
      ),
    )
  })
})

describe('parts one behind the other', () => {
  test('pass less than each of them, and side by side more', () => {
    fc.assert(
      fc.property(fc.array(decades(1e-6, 1e4), { minLength: 2, maxLength: 6 }), (parts) => {
        for (const part of parts) {
          expect(inSeries(...parts)).toBeLessThan(part)
          expect(inParallel(...parts)).toBeGreaterThan(part)
        }
      }),
    )
  })
})

describe('walls', () => {
  test('coverage lies between empty and full, rises with pressure and falls with temperature', () => {
    fc.assert(
      fc.property(decades(1e-20, 1e5), number(250, 700), (p, kelvin) => {
        const { theta, byLogPressure, byTemperature } = waterCoverage(p, kelvin)
        expect(theta).toBeGreaterThanOrEqual(0)
        expect(theta).toBeLessThanOrEqual(1 + 1e-12)
        expect(byLogPressure).toBeGreaterThanOrEqual(0)
        expect(byTemperature).toBeLessThanOrEqual(1e-15)
      }),
    )
  })
  test('a longer or hotter hold leaves less water and less hydrogen', () => {
    fc.assert(
      fc.property(decades(1e3, 1e7), number(1.01, 10), number(330, 450), (seconds, factor, hotK) => {
        const one = bakedWater(hotK, T20_K, seconds, 200)
        expect(bakedWater(hotK, T20_K, seconds * factor, 200).coldPa).toBeLessThan(one.coldPa)
        expect(slabRemaining(1e-6 * factor)).toBeLessThan(slabRemaining(1e-6))
        const sheet = { c0PerM3: 1e24, wallM: 3e-3 }
        expect(slabAtomFlux(sheet, T20_K, 1e-9 * factor)).toBeLessThan(slabAtomFlux(sheet, T20_K, 1e-9))
      }),
    )
  })
})

describe('transport', () => {
  const room = { programmes: [temperatureProgramme([{ atS: 0, kelvin: T20_K }])] }
  const solve = (lengthM: number, diameterM: number, gas: GasRun, outputsS: number[]): GasHistory => {
    const mesh = buildMesh(
      [{ name: 'tube', sections: [{ lengthM, diameterM }] }],
      Math.max(diameterM, lengthM / 12),
    )
    return runTransport({ mesh, thermal: room, fromS: 0, outputsS, gases: [gas], tolerance: 3e-3 })[0]!
  }
  const tube = fc.record({
    lengthM: decades(5, 500),
    diameterM: number(0.1, 1.2),
    startPa: decades(1e-8, 1e-2),
    speed: decades(0.01, 5),
    rate: decades(1e-13, 1e-8),
    seconds: decades(10, 1e6),
  })

  test('pressures stay positive and molecules add up, whatever the tube, with water on the wall or without', () => {
    fc.assert(
      fc.property(tube, fc.boolean(), ({ lengthM, diameterM, startPa, speed, rate, seconds }, wet) => {
        const gas: GasRun = {
          gas: 'H2O',
          startPa,
          pumps: [steadyPump(0, speed)],
          walls: [{ kind: 'low-hydrogen', qPaMS: rate, atK: T20_K }],
          ...(wet ? { isotherm: DEFAULT_WATER } : {}),
        }
        const history = solve(lengthM, diameterM, gas, [seconds])
        for (const p of history.pressurePa[0]!) expect(p > 0 && Number.isFinite(p)).toBe(true)
        expect(history.massError).toBeLessThan(1e-6)
      }),
      { numRuns: 60 },
    )
  })
  test('twice the gas is twice the pressure where flow is molecular and the wall holds none', () => {
    fc.assert(
      fc.property(tube, ({ lengthM, diameterM, startPa, speed, rate, seconds }) => {
        const gas = (factor: number): GasRun => ({
          gas: 'H2',
          startPa: factor * startPa,
          pumps: [steadyPump(0, speed)],
          walls: [{ kind: 'low-hydrogen', qPaMS: factor * rate, atK: T20_K }],
        })
        const one = solve(lengthM, diameterM, gas(1), [seconds]).pressurePa[0]!
        const two = solve(lengthM, diameterM, gas(2), [seconds]).pressurePa[0]!
        two.forEach((p, i) => {
          expect(p / (2 * one[i]!)).toBeCloseTo(1, 6)
        })
      }),
      { numRuns: 30 },
    )
  })
  test('more pumping never raises the pressure anywhere, with water on the wall or without', () => {
    fc.assert(
      fc.property(
        tube,
        fc.boolean(),
        number(0, 1),
        ({ lengthM, diameterM, startPa, speed, rate, seconds }, wet, share) => {
          const mesh = buildMesh(
            [{ name: 'tube', sections: [{ lengthM, diameterM }] }],
            Math.max(diameterM, lengthM / 12),
          )
          const more = Math.round(share * (mesh.count - 1))
          const run = (extra: number): Float64Array => {
            const gas: GasRun = {
              gas: 'H2O',
              startPa,
              pumps: [steadyPump(0, speed), steadyPump(more, extra)],
              walls: [{ kind: 'low-hydrogen', qPaMS: rate, atK: T20_K }],
              ...(wet ? { isotherm: DEFAULT_WATER } : {}),
            }
            const one = { mesh, thermal: room, fromS: 0, outputsS: [seconds], gases: [gas], tolerance: 1e-3 }
            return runTransport(one)[0]!.pressurePa[0]!
          }
          const before = run(0)
          // Both runs choose their own steps, so they agree to their tolerance only.
          run(speed).forEach((p, i) => {
            expect(p).toBeLessThanOrEqual(before[i]! * (1 + 3e-3))
          })
        },
      ),
      { numRuns: 40 },
    )
  })
})

describe('predictions', () => {
  const segment: fc.Arbitrary<SegmentModel> = fc.record({
    lengthM: number(20, 300),
    diameterM: number(0.2, 1.2),
    wallM: number(2e-3, 6e-3),
    temperatureK: number(285, 300),
    pumps: decades(0.1, 3).map((speed) => [{ atM: 10, speedM3S: { H2: speed, H2O: speed, N2: speed } }]),
    hydrogen: fc.record({
      kind: fc.constant('diffusion' as const),
      c0PerM3: decades(1e22, 1e25),
      agedTauM2: decades(1e-9, 1e-6),
    }),
    water: fc.record({ state: fc.constant('unbaked' as const), capacityPerM2: decades(3e19, 4e20) }),
  })
  test('pressure falls with time, and the hours to a target land on it', () => {
    fc.assert(
      fc.property(segment, decades(1, 1000), number(1.1, 5), (model, hours, factor) => {
        const { n2EquivalentPa } = predictPumpDown(model, { hours: [hours, hours * factor], atM: 0 })
        expect(n2EquivalentPa[1]!).toBeLessThan(n2EquivalentPa[0]!)
        expect(hoursToReach(model, n2EquivalentPa[0]!, 0)! / hours).toBeCloseTo(1, 6)
      }),
    )
  })
  test('a longer hold never leaves more water, hydrogen or reading, with an unbaked area or without', () => {
    const area = fc.record({ share: decades(1e-4, 1e-1), followShare: number(0, 1) })
    fc.assert(
      fc.property(
        segment,
        fc.option(area, { nil: undefined }),
        number(320, 440),
        decades(0.1, 2000),
        number(1.1, 5),
        (model, unbakedArea, bakeK, holdHours, factor) => {
          const asked = unbakedArea ? { ...model, unbakedArea } : model
          const cold = (hours: number) => afterBake(asked, { bakeK, holdHours: hours, upKH: 10 }, 0)
          const [short, long] = [cold(holdHours), cold(holdHours * factor)]
          expect(long.waterPa).toBeLessThanOrEqual(short.waterPa * (1 + 1e-9))
          expect(long.hydrogenPa).toBeLessThanOrEqual(short.hydrogenPa * (1 + 1e-9))
          expect(long.n2EquivalentPa).toBeLessThanOrEqual(short.n2EquivalentPa * (1 + 1e-9))
        },
      ),
    )
  })
  test('a lower target never takes a shorter bake, nor does a cooler oven', () => {
    fc.assert(
      fc.property(segment, decades(1e-8, 1e-5), number(350, 440), (model, targetPa, bakeK) => {
        const hours = (target: number, kelvin: number) =>
          bakeHoursToReach(model, { targetPa: target, bakeK: kelvin, atM: 0 })?.hours ?? Infinity
        expect(hours(targetPa / 2, bakeK)).toBeGreaterThanOrEqual(hours(targetPa, bakeK))
        expect(hours(targetPa, bakeK)).toBeGreaterThanOrEqual(hours(targetPa, bakeK + 10) * (1 - 1e-6))
      }),
    )
  })
})
