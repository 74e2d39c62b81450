import { describe, expect, test, vi } from 'vitest'
import { T20_K } from '#app/physics/constants.ts'
import { temperatureAt } from '#app/physics/programme.ts'
import { type GasHistory, runTransport, type TransportRun } from '#app/physics/transport.ts'
import { meshNode } from '#app/physics/tube.ts'
import { waterCoverage } from '#app/physics/water.ts'
import {
  bakeProgramme,
  caseA,
  caseB,
  caseC,
  caseD,
  DAY_S,
  HOUR_S,
  PLACES_B,
} from '#tests/fixtures/physics/benchmark-runs.ts'
import { checkInput, checkValue, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'

// Runs of hundreds of steps share the machine with everything else.
vi.setConfig({ testTimeout: 60_000 })

const idsOf = (prefix: string): string[] =>
  checkValues.map((entry) => entry.id).filter((id) => id.startsWith(prefix))
const timesOf = (ids: readonly string[], prefix: string, unitS: number): number[] =>
  ids.map((id) => Number.parseFloat(id.slice(prefix.length)) * unitS).sort((a, b) => a - b)
const pressuresAt = (
  run: TransportRun,
  history: GasHistory,
  output: number,
  places: readonly number[],
): number[] => places.map((x) => history.pressurePa[output]![meshNode(run.mesh, 'tube', x)]!)

describe('A: from one atmosphere through all regimes', () => {
  const ids = idsOf('bench.A.')
  const times = timesOf(ids, 'bench.A.', 1)
  const run = caseA(times, 5e-4)
  const [history] = runTransport(run) as [GasHistory]
  test.each(times)('at %d s', (atS) => {
    const found = pressuresAt(run, history, times.indexOf(atS), [0, 30, 60])
    expectCheck(`bench.A.${atS}`, found)
    // One entry allows more; half a percent is what the solver promises.
    const listed = checkValue(`bench.A.${atS}`).expected as number[]
    for (const [i, p] of found.entries()) expect(Math.abs(p / listed[i]! - 1)).toBeLessThan(0.005)
  })
  test('molecules add up', () => expect(history.massError).toBeLessThan(1e-9))
})

describe('B: two kilometres with eight pumps', () => {
  for (const [name, events] of [
    ['B1', false],
    ['B2', true],
  ] as const) {
    const prefix = `bench.${name}.`
    const ids = idsOf(prefix)
    const dayOf = (id: string): number => {
      const days = Number.parseFloat(id.slice(prefix.length))
      // The table rounds 2 h to 0.0833 d.
      return days < 0.1 ? 2 * HOUR_S : days * DAY_S
    }
    const times = ids.map(dayOf).sort((a, b) => a - b)
    const run = caseB(times, 3e-4, events)
    const [history] = runTransport(run) as [GasHistory]
    test.each(ids)('%s', (id) => {
      expectCheck(id, pressuresAt(run, history, times.indexOf(dayOf(id)), PLACES_B))
    })
    test(`${name}: molecules add up`, () => expect(history.massError).toBeLessThan(1e-9))
  }

  test('is second order in the mesh: half the cells, four times the error', () => {
    const at = (cellM: number): number => {
      const run = caseB([12 * DAY_S], 1e-5, true, cellM)
      // Just after a pump is shut the profile is no parabola, so that the mesh can be wrong at all.
      const early = { ...run, outputsS: [10 * DAY_S + 300] }
      const [history] = runTransport(early) as [GasHistory]
      return history.pressurePa[0]![meshNode(run.mesh, 'tube', 875)]!
    }
    const [coarse, middle, fine] = [at(62.5), at(31.25), at(15.625)] as [number, number, number]
    const ratio = (coarse - middle) / (middle - fine)
    expect(ratio).toBeGreaterThan(3.3)
    expect(ratio).toBeLessThan(4.7)
  })
})

describe('C: through a bake', () => {
  for (const [name, bakeK] of [
    ['C', 423.15],
    ['C80', 353.15],
  ] as const) {
    const prefix = `bench.${name}.`
    const ids = idsOf(prefix)
    const times = timesOf(ids, prefix, HOUR_S)
    const run = caseC(times, 2e-4, bakeK)
    const { programme } = bakeProgramme(bakeK, 10)
    const [hydrogen, water] = runTransport(run) as [GasHistory, GasHistory]
    test.each(ids)('%s', (id) => {
      const k = times.indexOf(Number.parseFloat(id.slice(prefix.length)) * HOUR_S)
      const kelvin = temperatureAt(programme, times[k]!)
      const [w0, w150] = pressuresAt(run, water, k, [0, 150]) as [number, number]
      const theta = waterCoverage(w150, kelvin).theta
      expectCheck(id, [kelvin, ...pressuresAt(run, hydrogen, k, [0, 150]), w0, w150, theta])
      // Beyond what the table asks: half a percent as long as there is pressure worth the name.
      const listed = checkValue(id).expected as number[]
      for (const [i, found] of [w0, w150].entries()) {
        const share = Math.abs(found / listed[3 + i]! - 1)
        expect(share).toBeLessThan(listed[3 + i]! > 1e-7 ? 0.005 : 0.02)
      }
    })
    test(`${name}: molecules add up`, () => {
      expect(hydrogen.massError).toBeLessThan(1e-9)
      expect(water.massError).toBeLessThan(1e-9)
    })
  }

  test.each(idsOf('plan.after.'))('%s', (id) => {
    const bakeK = checkInput(id, 'bakeT')
    const holdDays = checkInput(id, 'hold_d')
    const endS = Math.max(480 * HOUR_S, bakeProgramme(bakeK, holdDays).coolS + 164 * HOUR_S)
    const run = caseC([endS], 1e-3, bakeK, holdDays, 2)
    const [hydrogen, water] = runTransport(run) as [GasHistory, GasHistory]
    expectCheck(id, [...pressuresAt(run, water, 0, [150]), ...pressuresAt(run, hydrogen, 0, [150])])
  })

  test.each(idsOf('plan.soak.'))('%s', (id) => {
    // The hold that just meets the target lies within the tolerance of the table about the listed one.
    const { expected, tolerance } = checkValue(id)
    const bakeK = checkInput(id, 'bakeT')
    const waterAfter = (holdDays: number): number => {
      const endS = Math.max(480 * HOUR_S, bakeProgramme(bakeK, holdDays).coolS + 164 * HOUR_S)
      const run = caseC([endS], 1e-3, bakeK, holdDays, 2)
      return pressuresAt(run, runTransport({ ...run, gases: [run.gases[1]!] })[0]!, 0, [150])[0]!
    }
    const target = checkInput(id, 'target_Pa')
    expect(waterAfter((expected as number) * (1 - tolerance.rel!))).toBeGreaterThan(target)
    expect(waterAfter((expected as number) * (1 + tolerance.rel!))).toBeLessThan(target)
  })

  test('halving the tolerance about halves the error, which stays below the tolerance', () => {
    const at = (tolerance: number): number => {
      const run = caseC([12 * HOUR_S], tolerance, 423.15, 10, 5)
      return runTransport({ ...run, gases: [run.gases[1]!] })[0]!.pressurePa[0]![0]!
    }
    const exact = at(1e-6)
    const errors = [4e-3, 2e-3, 1e-3, 5e-4].map((tolerance) => Math.abs(at(tolerance) / exact - 1))
    for (const [i, error] of errors.entries()) {
      expect(error).toBeLessThan(4e-3 / 2 ** i)
      if (i === 0) continue
      expect(errors[i - 1]! / error).toBeGreaterThan(1.6)
      expect(errors[i - 1]! / error).toBeLessThan(2.4)
    }
  })
})

describe('D: one vessel with water on its wall', () => {
  const ids = idsOf('bench.D.')
  const times = timesOf(ids, 'bench.D.', 1)
  const run = caseD(times, 2e-4)
  const [history] = runTransport(run) as [GasHistory]
  test.each(ids)('%s', (id) => {
    const k = times.indexOf(Number.parseFloat(id.slice('bench.D.'.length)))
    const p = history.pressurePa[k]![0]!
    const { theta, byLogPressure } = waterCoverage(p, T20_K)
    // The local exponent is -d ln p/d ln t, from the balance S p = -d(amount)/dt.
    const perLogP = 1 * p + 10 * 5e19 * byLogPressure * 1.380649e-23 * T20_K
    expectCheck(id, [p, theta, (times[k]! * 0.1 * p) / perLogP])
  })
  test('molecules add up', () => expect(history.massError).toBeLessThan(1e-9))
})
