import { describe, expect, test } from 'vitest'
import {
  type BakeStep,
  deviationsOf,
  hoursBelowBand,
  type Planned,
} from '../../../app/domain/bake-deviations.ts'

const MINUTE = 60_000
const HOUR = 60 * MINUTE
const START = Date.UTC(2026, 10, 4, 19, 0)
const planned: Planned = {
  setpointC: (at) => Math.min(150, 20 + ((at - START) / HOUR) * 10),
  heatingFrom: START,
  soakFrom: START + 13 * HOUR,
  soakUntil: START + (13 + 168) * HOUR,
}
const limits = { toleranceC: 10, spreadC: 20, rateKH: 10, holdPa: 1e-2 }
const text = (pa: number) => `${pa} Pa`

/** Steps of five minutes that follow the plan, changed where a test wants it. */
function course(
  hours: number,
  change: (at: number, step: BakeStep) => Partial<BakeStep> = () => ({}),
): BakeStep[] {
  return Array.from({ length: hours * 12 + 1 }, (_, index) => {
    const at = START + index * 5 * MINUTE
    const setpoint = planned.setpointC(at) ?? 0
    const step = {
      at,
      minC: setpoint - 2,
      medianC: setpoint,
      maxC: setpoint + 2,
      pressurePa: 1e-4,
      supplyAmps: 1083,
    }
    return { ...step, ...change(at, step) }
  })
}
const at = (hour: number) => START + hour * HOUR
const between =
  (from: number, to: number, change: (step: BakeStep) => Partial<BakeStep>) =>
  (when: number, step: BakeStep) =>
    when >= at(from) && when < at(to) ? change(step) : {}

describe('deviations', () => {
  test('a bake that follows its plan has none', () => {
    expect(deviationsOf(course(40), planned, limits, text)).toEqual([])
  })

  test('a spread is found with its worst figure, its beginning and its end', () => {
    const found = deviationsOf(
      course(
        40,
        between(20, 23, ({ maxC }) => ({ minC: (maxC ?? 0) - 24 })),
      ),
      planned,
      limits,
      text,
    )
    expect(found).toEqual([
      { kind: 'spread', from: at(20), to: at(23), detail: 'Spread along the tube 24 °C, allowed 20 °C' },
    ])
  })

  test('one that lasts has no end', () => {
    const found = deviationsOf(
      course(
        40,
        between(38, 50, ({ maxC }) => ({ minC: (maxC ?? 0) - 24 })),
      ),
      planned,
      limits,
      text,
    )
    expect(found).toEqual([expect.objectContaining({ kind: 'spread', from: at(38), to: null })])
  })

  test('a few minutes do not count, and missing values neither begin nor end one', () => {
    const short = between(20, 20 + 5 / 60, () => ({ minC: 100 }))
    expect(deviationsOf(course(40, short), planned, limits, text)).toEqual([])
    const holed = (when: number, step: BakeStep) =>
      when >= at(21) && when < at(22)
        ? { minC: null, maxC: null }
        : between(20, 23, () => ({ minC: 100 }))(when, step)
    expect(deviationsOf(course(40, holed), planned, limits, text)).toHaveLength(1)
  })

  test('a chattering value is one deviation, not twenty', () => {
    const chatter = (when: number, step: BakeStep) =>
      when >= at(20) && when < at(22) && (when / MINUTE) % 10 === 0 ? { minC: (step.maxC ?? 0) - 25 } : {}
    expect(deviationsOf(course(40, chatter), planned, limits, text)).toHaveLength(1)
  })

  test('the first two hours of a ramp may be uneven up to 30 °C', () => {
    const early = between(0.5, 1.5, ({ maxC }) => ({ minC: (maxC ?? 0) - 28 }))
    expect(deviationsOf(course(20, early), planned, limits, text)).toEqual([])
    const later = between(4, 6, ({ maxC }) => ({ minC: (maxC ?? 0) - 28 }))
    expect(deviationsOf(course(20, later), planned, limits, text)).toHaveLength(1)
  })

  test.each([
    [
      'too hot',
      between(20, 22, () => ({ maxC: 163 })),
      'temperature',
      'Hottest point 163 °C, allowed 160 °C',
    ],
    [
      'too cool in the soak',
      between(20, 22, () => ({ medianC: 135, minC: 134 })),
      'temperature',
      'at least 140 °C',
    ],
    ['too much pressure', between(20, 22, () => ({ pressurePa: 0.02 })), 'pressure', 'Pressure 0.02 Pa'],
    ['supply off', between(20, 22, () => ({ supplyAmps: 0 })), 'supply', 'no current'],
  ])('%s', (_, change, kind, words) => {
    const found = deviationsOf(course(30, change), planned, limits, text)
    expect(found[0]).toMatchObject({ kind, from: at(20), to: at(22) })
    expect(found[0]?.detail).toContain(words)
  })

  test('a ramp that runs ahead is found', () => {
    const fast = course(13, (when) => {
      const celsius =
        when < at(4) ? 20 + ((when - START) / HOUR) * 10 : Math.min(150, 60 + ((when - at(4)) / HOUR) * 15)
      return { minC: celsius - 1, medianC: celsius, maxC: celsius + 1 }
    })
    const rates = deviationsOf(fast, planned, { ...limits, toleranceC: null }, text)
    expect(rates).toHaveLength(1)
    expect(rates[0]?.detail).toContain('15.0 °C/h')
  })

  test('what the site has not limited is not judged', () => {
    const none = { toleranceC: null, spreadC: null, rateKH: null, holdPa: null }
    const wild = between(20, 22, () => ({ minC: 20, maxC: 300, pressurePa: 10 }))
    expect(deviationsOf(course(30, wild), planned, none, text)).toEqual([])
  })

  test('hours below the band are counted from the start of the soak', () => {
    const cool = between(15, 20, () => ({ medianC: 130 }))
    expect(hoursBelowBand(course(40, cool), planned.soakFrom, 140)).toBeCloseTo(5, 6)
    expect(hoursBelowBand(course(10), planned.soakFrom, 140)).toBe(0)
  })
})
