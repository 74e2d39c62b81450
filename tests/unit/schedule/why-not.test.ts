import { expect, test } from 'vitest'
import type { Placement, ScheduleJob } from '#app/domain/schedule/problem.ts'
import { solve } from '#app/domain/schedule/solve.ts'
import { violations } from '#app/domain/schedule/violations.ts'
import { neverPossible, whyNot, whyNowhere } from '#app/domain/schedule/why-not.ts'
import { bakeOf, demoMonth } from './long-problems.ts'
import { job, problem } from './problems.ts'

const put = (jobId: string, startH: number, supply: string, cart: string): Placement => ({
  jobId,
  startH,
  supply,
  cart,
  pinned: false,
})

test('the answer names the day, the limit, the figure and the hours', () => {
  const month = problem({
    jobs: [bakeOf({ segments: [9, 10] }), bakeOf({ segments: [13, 14] }), bakeOf({ segments: [16] })],
    hours: 600,
  })
  const placed = [put('SG-09+SG-10', 60, 'HX-1', 'MC-1'), put('SG-13+SG-14', 61, 'HX-2', 'MC-2')]
  const found = whyNot(month, placed, 'SG-16', 62)
  expect(found.sentence).toMatch(/^SG-16 not on 11 Nov at 20:00: /)
  expect(found.sentence).toContain('Feeder east at ')
  expect(found.sentence).toContain(' of 160 kW, 12 Nov ')
  // It was given the set and the cart that nobody has.
  expect(found.placement).toMatchObject({ supply: 'HX-3', cart: 'MC-3' })
  // Named once, not before every reason again.
  expect(whyNot(month, [], 'SG-16', 0).sentence).toMatch(
    /^SG-16 not on 9 Nov at \d\d:\d\d: Preparation would begin .* before the schedule does\./,
  )
  expect(whyNot(month, [], 'SG-16', 62).sentence).toBe('SG-16 on 11 Nov 20:00: nothing stands in the way.')
})

test('what broke before is not blamed on the bake that is moved', () => {
  const month = demoMonth()
  const clash = [put('SG-16', 60, 'HX-2', 'MC-2'), put('SG-14', 61, 'HX-2', 'MC-3')]
  expect(whyNot(month, clash, 'SG-07', 500).breaks).toEqual([])
})

test('a bake that can be nowhere is told what binds and what would lift it', () => {
  const asked = problem({
    jobs: [
      job('BIG', {
        powerKW: [250],
        feederShare: { west: 0, east: 1 },
        amps: 2000,
        volts: 20,
        endH: 400,
      }),
    ],
    crews: [],
    carts: [],
  })
  expect(neverPossible(asked, asked.jobs[0] ?? job('none'))).toEqual([
    'BIG needs 250 kW at its peak; with 18 kW base load the site gives 242 kW at most. Ramp slower, bake one segment at a time, or have the cap raised in the register.',
    'BIG draws 250 kW from the feeder east, which carries 160 kW. Ramp slower, or bake one segment at a time.',
    'BIG needs 2000 A at 20.0 V, which none of HX-1, HX-2, HX-3 gives. Bake at a lower temperature, ramp slower, or heat the segments apart.',
    'The register has no pumping cart. Enter one under Register.',
    'There is no crew of two. A start, a ramp end and a soak end each need one: enter a crew and its roster.',
    'BIG takes 16.7 days with its preparation and test; the window has 14.0. Make the window longer.',
  ])
})

test('a bake that others keep out is told what stands in the way most often', () => {
  const month = problem({ jobs: [bakeOf({ segments: [16] }), bakeOf({ segments: [15] })], hours: 300 })
  const [first] = whyNowhere(month, [put('SG-15', 48, 'HX-1', 'MC-1')], 'SG-16')
  expect(first).toMatch(/^At \d+ of the \d+ starts tried, for example: /)
})

test('without a cap no bake has power: said for the cap that is missing, once, and not as an overload', () => {
  const { rules } = problem({ jobs: [] })
  const open = problem({ jobs: [bakeOf({ segments: [16] })], rules: { ...rules, dayKW: null } })
  const sentence =
    'The register has no limit “Power cap for bakes, 06:00 to 22:00”, so no bake can be given power. An engineer sets it under Register, Limits.'
  expect(neverPossible(open, open.jobs[0] as ScheduleJob)).toEqual([sentence])
  const placement = { jobId: 'SG-16', startH: 60, supply: 'HX-1', cart: 'MC-1', pinned: false }
  const power = violations(open, [placement]).filter(({ kind }) => kind === 'power')
  expect(power).toMatchObject([{ severity: 'breaks', text: sentence, jobs: ['SG-16'] }])
  expect(solve(open, [], 'earliest-finish', { seed: 1, budget: 5 })?.unplaced).toEqual(['SG-16'])
})
