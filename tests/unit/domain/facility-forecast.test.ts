import { describe, expect, test } from 'vitest'
import {
  type Durations,
  durationsOf,
  facilityOutlook,
  outlookOf,
  type SegmentOutlook,
  weeksToLimit,
} from '#app/domain/facility-forecast.ts'
import type { SegmentState } from '#app/domain/segment-states.ts'

const NOW = new Date('2026-03-01T08:00:00.000Z')
const hour = (hours: number) => new Date(NOW.getTime() + hours * 3_600_000)

/** States one after the other with their lengths in hours; the last is still on. */
function history(...steps: [SegmentState, number][]) {
  let at = -10_000
  return steps.map(([state, hours], index) => {
    const since = hour(at)
    at += hours
    return { state, since, endedAt: index === steps.length - 1 ? null : hour(at) }
  })
}

const WHOLE = history(
  ['vented', 100],
  ['roughing', 4],
  ['pumping', 200],
  ['bake-prep', 50],
  ['heating', 13],
  ['soak', 168],
  ['cooling', 24],
  ['post-bake-test', 40],
  ['in-service', 1],
)

describe('how long states last', () => {
  test('comes from the past, shortest to longest', () => {
    const slower = history(['vented', 150], ['roughing', 5], ['in-service', 1])
    const found = durationsOf([WHOLE, slower], 168)
    expect(found.vented).toEqual({ low: 100, high: 150, count: 2 })
    expect(found.soak).toEqual({ low: 168, high: 168, count: 1 })
    expect(found['in-service']).toBeUndefined()
  })

  test('leaves out bakes that were broken off and pumping that led to none', () => {
    const broken = history(
      ['pumping', 9000],
      ['vented', 10],
      ['heating', 9],
      ['cooling', 20],
      ['in-service', 1],
    )
    const spread = history(['heating', 13], ['soak', 30], ['cooling', 20], ['in-service', 1])
    const found = durationsOf([broken, spread], 168)
    expect(found.pumping).toBeUndefined()
    expect(found.soak).toBeUndefined()
    expect(found.heating).toEqual({ low: 13, high: 13, count: 1 })
  })
})

const DURATIONS: Durations = durationsOf(
  [WHOLE, history(['vented', 150], ['roughing', 5], ['leak-hunt', 100], ['in-service', 1])],
  168,
)

const outlook = (
  state: SegmentState,
  hoursAgo: number,
  verdict: 'at-target' | 'over-limit' | 'not-in-service' = 'not-in-service',
) => outlookOf({ tag: 'SG-77', state, since: hour(-hoursAgo), verdict }, DURATIONS, NOW)

describe('the way of a segment', () => {
  test('is what is left of its state and all that comes after', () => {
    // 168 - 68 of soak, 24 of cooling, 40 of test.
    expect(outlook('soak', 68).hours).toEqual({ low: 164, high: 164 })
    // 100 to 150 of being open, 80 of it gone; then 4 to 5, 200, 50, 13, 168, 24, 40.
    expect(outlook('vented', 80).hours).toEqual({ low: 20 + 499, high: 70 + 500 })
  })
  test('of a state that lasts longer than ever is from now to as long again', () => {
    expect(outlook('leak-hunt', 216).hours).toEqual({ low: 0, high: 100 })
  })
  test('is no way at all in service, unless over the limit', () => {
    expect(outlook('in-service', 1, 'at-target').hours).toEqual({ low: 0, high: 0 })
    expect(outlook('in-service', 1, 'over-limit').hours).toBeNull()
  })
  test.each([
    ['maintenance', 'nobody can say'],
    ['isolated-test', 'has not been seen through here yet'],
  ] as const)('cannot be told from %s', (state, words) => {
    expect(outlook(state, 1)).toMatchObject({ hours: null, words: expect.stringContaining(words) })
  })
})

describe('the facility', () => {
  const one = (tag: string, hours: SegmentOutlook['hours']): SegmentOutlook => ({
    tag,
    state: 'soak',
    hours,
    words: '',
  })
  test('is as slow as its slowest segment', () => {
    const found = facilityOutlook([
      one('A', { low: 10, high: 20 }),
      one('B', { low: 5, high: 90 }),
      one('C', { low: 0, high: 0 }),
    ])
    expect(found).toMatchObject({ hours: { low: 10, high: 90 }, slowest: { tag: 'B' }, open: [] })
  })
  test('has no date while one segment has none, but still a slowest', () => {
    const found = facilityOutlook([one('A', { low: 10, high: 20 }), one('B', null)])
    expect(found).toMatchObject({ hours: null, slowest: { tag: 'A' }, open: [{ tag: 'B' }] })
  })
})

describe('weeks to the limit', () => {
  // Own arithmetic: ln(2e-6 / 3.4e-7) / ln 1.06 = 30.4.
  test('follow from the growth', () => expect(weeksToLimit(3.4e-7, 0.06, 2e-6)).toBeCloseTo(30.41, 2))
  test('are none when it falls or is over it', () => {
    expect(weeksToLimit(3.4e-7, -0.01, 2e-6)).toBeNull()
    expect(weeksToLimit(3e-6, 0.06, 2e-6)).toBeNull()
  })
})
