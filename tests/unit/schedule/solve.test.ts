import { describe, expect, test } from 'vitest'
import type { Placement } from '#app/domain/schedule/problem.ts'
import { energyKWh } from '#app/domain/schedule/problem.ts'
import { type Progress, solve } from '#app/domain/schedule/solve.ts'
import { violations } from '#app/domain/schedule/violations.ts'
import { expectCheck } from '#tests/fixtures/physics/check-values.ts'
import { bestByEnumeration, faultsOf, smallProblem } from './enumeration.ts'
import { bakeOf, demoMonth, halfYear } from './long-problems.ts'
import { everPresent, job, problem, supplies } from './problems.ts'

/** Under way since Wednesday evening. */
const AT_SG_05: Placement = { jobId: 'SG-05', startH: -108, supply: 'HX-1', cart: 'MC-1', pinned: false }

describe('small problems against going through all schedules', () => {
  // Up to five bakes; two hundred of them with up to six: npm run soak.
  test.each(Array.from({ length: 20 }, (_, i) => i + 1))(
    'seed %i',
    (seed) => {
      const small = smallProblem(seed, 5)
      const best = bestByEnumeration(small)
      const found = solve(small, [], 'earliest-finish', { seed: 1, budget: 60 })
      expect(found).not.toBeNull()
      if (found === null) return
      expect(faultsOf(small, found.placements)).toEqual([])
      expect(violations(small, found.placements).filter(({ severity }) => severity === 'breaks')).toEqual([])
      if (best === null) expect(found.unplaced).not.toEqual([])
      else {
        expect(found.unplaced).toEqual([])
        expect(found.bound).toBeLessThanOrEqual(best)
        expect(found.value).toBeGreaterThanOrEqual(best)
        expect(((found.value ?? 0) - best) / (found.value ?? 1)).toBeLessThanOrEqual(found.gap + 1e-12)
      }
    },
    60_000,
  )
})

test('a month of the demo: nothing breaks, and at most a tenth is left to gain', () => {
  const month = demoMonth()
  const standing = [AT_SG_05]
  const found = solve(month, standing, 'earliest-finish', { seed: 1, budget: 120 })
  expect(found?.unplaced).toEqual([])
  expect(violations(month, found?.placements ?? []).filter(({ severity }) => severity === 'breaks')).toEqual(
    [],
  )
  expect(found?.placements.find(({ jobId }) => jobId === 'SG-05')).toEqual(standing[0])
  expect(found?.gap).toBeLessThanOrEqual(0.1)
}, 60_000)

test('forty bakes on half a year: every one has a place, nothing breaks, progress is told', () => {
  const long = halfYear(40)
  const told: Progress[] = []
  const found = solve(long, [], 'earliest-finish', {
    seed: 1,
    budget: 25,
    onProgress: (progress) => told.push(progress),
  })
  expect(found?.unplaced).toEqual([])
  expect(violations(long, found?.placements ?? []).filter(({ severity }) => severity === 'breaks')).toEqual(
    [],
  )
  expect(told.length).toBeGreaterThan(10)
  const shares = told.map(({ share }) => share)
  expect(shares).toEqual([...shares].sort((a, b) => a - b))
  const bests = told.map(({ best }) => best ?? Number.POSITIVE_INFINITY)
  expect(bests).toEqual([...bests].sort((a, b) => b - a))
}, 60_000)

test('the search stops when it is told to, and says the same for the same seed', () => {
  let asked = 0
  const stopped = solve(halfYear(12), [], 'earliest-finish', {
    seed: 1,
    budget: 1000,
    cancelled: () => {
      asked += 1
      return asked > 3
    },
  })
  expect(stopped).toBeNull()
  expect(asked).toBe(4)
  const again = () => solve(halfYear(9), [], 'fewest-nights', { seed: 7, budget: 10 })
  expect(again()).toEqual(again())
})

test('what is pinned stays, also where it breaks something', () => {
  const month = demoMonth()
  const pinned: Placement = { jobId: 'SG-16', startH: 60, supply: 'HX-2', cart: 'MC-2', pinned: true }
  const found = solve(month, [pinned], 'earliest-finish', { seed: 1, budget: 20 })
  expect(found?.placements.find(({ jobId }) => jobId === 'SG-16')).toEqual(pinned)
})

test('the figures that are aimed at: bakes side by side save base load, bakes by day save call-ins', () => {
  const month = demoMonth()
  const of = (objective: 'least-energy' | 'fewest-nights' | 'earliest-finish') =>
    solve(month, [AT_SG_05], objective, { seed: 1, budget: 10 })
  const heat = month.jobs.filter(({ underWay }) => !underWay).reduce((sum, one) => sum + energyKWh(one), 0)
  const energy = of('least-energy')
  expect(energy?.unplaced).toEqual([])
  // Five bakes of 182 h on three sets: two rounds at the least.
  expect(energy?.value).toBeGreaterThanOrEqual(heat + 18 * 2 * 182)
  expect(energy?.value).toBeLessThan(heat + 18 * 3 * 182)
  expect(energy?.value).toBeGreaterThanOrEqual(energy?.bound ?? Number.POSITIVE_INFINITY)
  // A ramp of 13.2 h from 18:00 ends at 07:12: nobody has to be called in.
  expect(of('fewest-nights')).toMatchObject({ value: 0, bound: 0, gap: 0 })
})

test('a bake that fits nowhere is left out, and the others are placed', () => {
  const big = job('BIG', { powerKW: Array.from({ length: 30 }, () => 300) })
  const found = solve(
    problem({ jobs: [big, bakeOf({ segments: [16] })], hours: 600 }),
    [],
    'earliest-finish',
    {
      seed: 1,
      budget: 20,
    },
  )
  expect(found?.unplaced).toEqual(['BIG'])
  expect(found?.placements.find(({ jobId }) => jobId === 'SG-16')?.startH).toBe(48)
})

test('four long bakes under one limit (check values sched.makespan and sched.energy are these)', () => {
  const days = (id: string, kw: number, count: number) =>
    job(id, { powerKW: Array.from({ length: count * 24 }, () => kw) })
  const four = problem({
    jobs: [days('A', 300, 20), days('B', 300, 20), days('C', 200, 15), days('D', 400, 25)],
    hours: 70 * 24,
    stepHours: 24,
    supplies: supplies(2),
    crews: everPresent(9),
    rules: {
      ...problem({ jobs: [] }).rules,
      dayKW: 600,
      nightKW: 600,
      baseKW: 0,
      feederKW: { west: null, east: null },
    },
  })
  const found = solve(four, [], 'earliest-finish', { seed: 1, budget: 50 })
  expectCheck('sched.makespan', (found?.value ?? 0) / 24)
  expect(found?.gap).toBe(0)
  expectCheck(
    'sched.energy',
    four.jobs.reduce((sum, one) => sum + energyKWh(one), 0),
  )
})
