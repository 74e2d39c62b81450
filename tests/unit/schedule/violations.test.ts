/**
 * Figures of power are those of the demo's three pairs, worked out by hand from one tube's table: pair of 0.60 m tubes
 * 62.6 kW in soak and 81.3 at ramp end, pair of 0.50 m 55.3 and 70.9 kW, blankets in them. Rosters and rules of the
 * calendar are the demo's own; that they are usual is common practice, no source.
 */
import { expect, test } from 'vitest'
import type { ScheduleJob } from '#app/domain/schedule/problem.ts'
import { violations } from '#app/domain/schedule/violations.ts'
import { job, placed, problem, twoCrews } from './problems.ts'

const WIDE = { ramp: 81.3, soak: 62.6 }
const NARROW = { ramp: 70.9, soak: 55.3 }
const RAMP_H = 14

/** A pair whose only hour at the top of its ramp is the last one before the soak. */
function pair(
  id: string,
  kw: typeof WIDE,
  feeder: 'west' | 'east',
  more: Partial<ScheduleJob> = {},
): ScheduleJob {
  return job(id, {
    powerKW: [
      ...Array.from({ length: RAMP_H - 1 }, () => 30),
      kw.ramp,
      ...Array.from({ length: 168 }, () => kw.soak),
    ],
    feederShare: { west: feeder === 'west' ? 1 : 0, east: feeder === 'east' ? 1 : 0 },
    rampEndH: RAMP_H,
    soakEndH: RAMP_H + 168,
    coldH: RAMP_H + 177,
    endH: RAMP_H + 200,
    ...more,
  })
}

const west = pair('SG-01+SG-02', WIDE, 'west')
const east1 = pair('SG-11+SG-12', NARROW, 'east')
const east2 = pair('SG-15+SG-16', NARROW, 'east')

test('three pairs in soak with the base load are 191 kW, which the day allows', () => {
  const all = problem({ jobs: [west, east1, east2] })
  // Ramps end one after another by night, so that by day everything soaks.
  const found = violations(all, placed({ 'SG-01+SG-02': 3, 'SG-11+SG-12': 4, 'SG-15+SG-16': 5 }))
  expect(found).toEqual([])
  const close = problem({ jobs: all.jobs, rules: { ...all.rules, dayKW: 191.2001 } })
  expect(violations(close, placed({ 'SG-01+SG-02': 3, 'SG-11+SG-12': 4, 'SG-15+SG-16': 5 }))).toEqual([])
  const less = problem({ jobs: all.jobs, rules: { ...all.rules, dayKW: 191.1 } })
  const [first] = violations(less, placed({ 'SG-01+SG-02': 3, 'SG-11+SG-12': 4, 'SG-15+SG-16': 5 }))
  expect(first?.text).toContain('Site by day at 191 of 191 kW')
})

test('three ramp ends in one hour are 241 kW: refused by day, allowed at night', () => {
  const all = problem({ jobs: [west, east1, east2] })
  // Starts at 06:00: the ramps end in the hour from 19:00.
  const byDay = violations(all, placed({ 'SG-01+SG-02': 0, 'SG-11+SG-12': 0, 'SG-15+SG-16': 0 }))
  expect(byDay.map(({ kind, text }) => [kind, text])).toEqual([
    [
      'power',
      'Site by day at 241 of 200 kW, 9 Nov 19:00–20:00, with the base load of 18 kW: SG-01+SG-02, SG-11+SG-12, SG-15+SG-16.',
    ],
  ])
  expect(violations(all, placed({ 'SG-01+SG-02': 4, 'SG-11+SG-12': 4, 'SG-15+SG-16': 4 }))).toEqual([])
})

test('the east feeder takes two ramp ends, 142 kW, and refuses a third pair in soak, 197 kW', () => {
  const third = pair('SG-13+SG-14', NARROW, 'east')
  const two = problem({ jobs: [east1, east2, third] })
  expect(violations(two, placed({ 'SG-11+SG-12': 4, 'SG-15+SG-16': 4 }))).toEqual([])
  const found = violations(two, placed({ 'SG-11+SG-12': 28, 'SG-15+SG-16': 28, 'SG-13+SG-14': 0 }))
  const feeder = found.find(({ kind }) => kind === 'feeder')
  expect(feeder?.text).toBe(
    'Feeder east at 197 of 160 kW, 10 Nov 23:00 to 16 Nov 20:00: SG-11+SG-12, SG-15+SG-16, SG-13+SG-14.',
  )
})

test('ramps need a crew: none on a holiday, one pair on call for one bake at night', () => {
  const crewed = problem({ jobs: [west, east1], crews: twoCrews(), holidays: ['2026-11-12'] })
  // Both start at 07:00 on Monday, with two crews at work, and end their ramps at 21:00, with one on call.
  const both = violations(crewed, placed({ 'SG-01+SG-02': 1, 'SG-11+SG-12': 1 })).filter(
    ({ kind }) => kind === 'crew',
  )
  expect(both.map(({ text }) => text)).toEqual([
    'SG-11+SG-12: end of ramp 9 Nov 21:00 needs a crew of two; one crew is at work or on call then, with end of ramp of SG-01+SG-02 in the same hour.',
    'SG-11+SG-12: end of soak 16 Nov 21:00 needs a crew of two; one crew is at work or on call then, with end of soak of SG-01+SG-02 in the same hour.',
  ])
  // Wednesday 18:00, the day before the holiday: the ramp runs into it.
  const eve = violations(crewed, placed({ 'SG-01+SG-02': 60 }))
  expect(eve.map(({ kind, severity }) => `${kind} ${severity}`)).toEqual([
    'holiday breaks',
    'crew breaks',
    'holiday note',
    'crew breaks',
  ])
  expect(eve[1]?.text).toBe('SG-01+SG-02: nobody at work or on call 12 Nov 00:00, during its ramp.')
})

test('a day with a clock change is avoided, and hours pass by the sun and not by the wall', () => {
  const october = problem({ jobs: [west], fromMs: Date.parse('2026-10-24T04:00:00Z') })
  // From Saturday 18:00, fourteen hours are over at 07:00 on Sunday: the hour from two comes twice.
  const [fault] = violations(october, placed({ 'SG-01+SG-02': 12 })).filter(
    ({ kind }) => kind === 'clock-change',
  )
  expect(fault?.text).toBe(
    'SG-01+SG-02: end of ramp 25 Oct 07:00 is on the day the clocks change; take another day.',
  )
  expect(violations(october, placed({ 'SG-01+SG-02': 48 }))).toEqual([])
})

test('neighbours: a valve box is not hot on both sides, and nobody prepares beside a hot tube', () => {
  const line = (id: string, fromM: number, toM: number, more: Partial<ScheduleJob> = {}) =>
    pair(id, NARROW, 'east', { extents: [{ line: 'MAIN', fromM, toM }], prepHours: 48, ...more })
  const a = line('SG-11', 1500, 1650)
  const b = line('SG-12', 1650, 1800)
  const far = line('SG-14', 1950, 2100)
  const spur = line('SP-1', 0, 0, {
    extents: [
      { line: 'SPUR', fromM: 0, toM: 90 },
      { line: 'MAIN', fromM: 1505, toM: 1505 },
    ],
  })
  const row = problem({ jobs: [a, b, far, spur], hours: 600 })
  expect(violations(row, placed({ 'SG-11': 50, 'SG-14': 52 }))).toEqual([])
  const touching = violations(row, placed({ 'SG-11': 50, 'SG-12': 60 }))
  expect(touching.map(({ kind }) => kind)).toEqual(['neighbour', 'neighbour'])
  expect(touching[0]?.text).toContain('share a valve box that would be hot on both sides')
  expect(touching[1]?.text).toBe(
    'SG-12 cannot be prepared within 10 m of SG-11 while that is hot, 11 Nov 08:00–18:00.',
  )
  // The root of the spur lies within the hot segment itself.
  expect(violations(row, placed({ 'SG-11': 50, 'SP-1': 60 })).map(({ kind }) => kind)).toEqual([
    'neighbour',
    'neighbour',
  ])
  expect(violations(row, placed({ 'SG-11': 50, 'SG-12': 50 + 191 + 48 }))).toEqual([])
})

test('equipment, order, permits, window and steps each say what is wanted and when', () => {
  const first = pair('first', NARROW, 'east', { cart: 'MC-9', supply: 'HX-2' })
  const second = pair('second', WIDE, 'west', {
    requires: ['first'],
    earliestH: 54,
    earliestWhy: 'two working days after its permit is asked for',
    latestEndH: 300,
    prepHours: 24,
    permits: 2,
    missing: ['SG-11 has no accepted isolation test.'],
    amps: 1600,
  })
  const asked = problem({ jobs: [first, second], rules: { ...problem({ jobs: [] }).rules, setupHours: 4 } })
  const found = violations(asked, [
    { jobId: 'first', startH: 4, supply: 'HX-1', cart: 'MC-1', pinned: false },
    { jobId: 'second', startH: 12, supply: 'HX-1', cart: null, pinned: false },
  ])
  expect(found.map(({ severity, text }) => `${severity} ${text}`)).toEqual([
    'breaks second: preparation would begin 8 Nov 18:00, before the schedule does.',
    'breaks second: heating not before 11 Nov 12:00, two working days after its permit is asked for.',
    'missing second: SG-11 has no accepted isolation test.',
    'note second is hot for 8.0 days: 2 permits, each taking over from the one before.',
    'breaks first has HX-1; its plan asks for HX-2.',
    'breaks second needs 1600 A at 10.0 V; HX-1 gives 1500 A at 60 V.',
    'breaks HX-1 is wanted twice, 9 Nov 14:00 to 17 Nov 00:00: first and second.',
    'breaks first has MC-1; its plan asks for MC-9.',
    'breaks second has no cart yet.',
    'breaks second waits for first, which is over 18 Nov 08:00; its preparation would begin 8 Nov 18:00.',
  ])
  expect(() => violations(asked, placed({ third: 3 }))).toThrow('no bake third')
  expect(() => violations(asked, placed({ first: 3.5 }))).toThrow('full hour')
})
