import { describe, expect, test } from 'vitest'
import { facilityFigures, type GaugeStanding, standingOf } from '#app/domain/segment-standing.ts'

const at = new Date('2026-11-09T05:00:00Z')
const gauge = (tag: string, value: number | null, fresh = true): GaugeStanding => ({
  tag,
  kind: tag.startsWith('HC') ? 'hot-cathode' : tag.startsWith('CC') ? 'cold-cathode' : 'thermal-conductivity',
  offsetM: 0,
  value,
  at: value === null ? null : at,
  fresh,
  dayMean: value,
})
const judge = (gauges: GaugeStanding[], state: Parameters<typeof standingOf>[0]['state'] = 'in-service') =>
  standingOf({ state, gauges, targetPa: 2e-7, limitPa: 2e-6, expectedEndRatio: 1.22 })

describe('the standing of a segment in service', () => {
  test('is at target only when both hot-cathode gauges are fresh and below it', () => {
    expect(judge([gauge('HC-01A', 6.3e-8), gauge('HC-01B', 5.1e-8)]).verdict).toBe('at-target')
    expect(judge([gauge('HC-01A', 6.3e-8, false), gauge('HC-01B', 5.1e-8)]).verdict).toBe('unknown')
    expect(judge([gauge('HC-01A', null, false), gauge('HC-01B', 5.1e-8)]).freshGauges).toEqual({
      fresh: 1,
      of: 2,
    })
  })

  test('is above target or over the limit by the worse of the two', () => {
    expect(judge([gauge('HC-16A', 4.1e-7), gauge('HC-16B', 1.9e-7)]).verdict).toBe('above-target')
    expect(judge([gauge('HC-16A', 2.1e-6), gauge('HC-16B', 1.9e-7)]).verdict).toBe('over-limit')
  })

  test('is at target when it reads exactly the target', () => {
    expect(judge([gauge('HC-01A', 2e-7), gauge('HC-01B', 2e-7 / 1.22)]).verdict).toBe('at-target')
  })

  test('is unknown without fresh data, whatever the old data said', () => {
    expect(judge([gauge('HC-15A', 5.7e-8, false), gauge('HC-15B', 4.2e-8, false)]).verdict).toBe('unknown')
    expect(judge([]).verdict).toBe('unknown')
  })

  test('has the cross for its headline while that is fresh', () => {
    const gauges = [gauge('HC-01A', 6.3e-8), gauge('HC-01B', 5.1e-8), gauge('CC-01', 6e-8)]
    expect(judge(gauges).headline?.tag).toBe('HC-01B')
    expect(judge([gauge('HC-01A', 6.3e-8), gauge('HC-01B', 5.1e-8, false)]).headline?.tag).toBe('HC-01A')
  })
})

describe('questioned readings', () => {
  const questions = (a: number, b: number, c: number) =>
    judge([gauge('HC-07A', a), gauge('HC-07B', b), gauge('CC-07', c)]).questions

  test('an end that reads below the cross cannot be true', () => {
    expect(questions(6.0e-8, 6.1e-8, 6.0e-8)).toHaveLength(1)
    expect(questions(4.9e-8, 5.2e-8, 6.4e-8)).toHaveLength(1)
  })

  test('the expected profile, within the scatter of gauges, is not questioned', () => {
    expect(questions(6.3e-8, 5.1e-8, 6.0e-8)).toEqual([])
    expect(questions(5.9e-8, 4.0e-8, 5.6e-8)).toEqual([])
    expect(questions(4.1e-7, 3.4e-7, 4.3e-7)).toEqual([])
  })

  test('a gauge three times below its pair is called a fault and not better vacuum', () => {
    expect(questions(1.8e-8, 4.7e-8, 5.5e-8)[0]?.text).toMatch(/HC-07A reads 3\.06 times below CC-07.*fault/)
  })

  test('nothing is questioned out of service or without a pump at the cross', () => {
    expect(judge([gauge('HC-13A', 7.1e-5), gauge('HC-13B', 7.2e-5)], 'isolated-test').questions).toEqual([])
    const unpumped = standingOf({
      state: 'in-service',
      gauges: [gauge('HC-13A', 7.1e-8), gauge('HC-13B', 7.2e-8)],
      targetPa: 2e-7,
      limitPa: 2e-6,
      expectedEndRatio: null,
    })
    expect(unpumped.questions).toEqual([])
  })
})

describe('the facility', () => {
  const segment = (tag: string, value: number, state: 'in-service' | 'soak' = 'in-service', main = true) => ({
    tag,
    main,
    state,
    standing: judge([gauge(`HC-${tag}A`, value * 1.2), gauge(`HC-${tag}B`, value)], state),
  })

  test('is available when all of the main line is within the limit and enough of it at target', () => {
    const good = [segment('1', 5e-8), segment('2', 5e-8), segment('3', 4e-7)]
    expect(facilityFigures(good, 2)).toMatchObject({ available: true, unavailableBecause: '' })
    expect(facilityFigures(good, 3).available).toBe(false)
  })

  test('is not available while a main segment is heated, but does not wait for a spur', () => {
    expect(facilityFigures([segment('1', 5e-8), segment('2', 2e-4, 'soak')], 1).available).toBe(false)
    expect(facilityFigures([segment('1', 5e-8), segment('S', 2e-4, 'soak', false)], 1).available).toBe(true)
  })

  test('counts each segment once by what it is', () => {
    const figures = facilityFigures([segment('1', 5e-8), segment('2', 4e-7), segment('3', 2e-4, 'soak')], 1)
    expect(figures).toMatchObject({
      inService: ['1', '2'],
      atTarget: ['1'],
      aboveTarget: ['2'],
      heated: ['3'],
      unknown: [],
    })
  })
})
