import { describe, expect, test } from 'vitest'
import { hitRecord, hitWords, type Judged, judgeForecast } from '#app/domain/forecast-records.ts'
import type { ForecastOutcome } from '#app/domain/planning.ts'

const MADE = new Date('2026-03-01T08:00:00.000Z')
const STEP_MS = 600_000
const hour = (hours: number) => new Date(MADE.getTime() + hours * 3_600_000)

/** Steps of ten minutes with a pressure that falls through 1e-6 Pa at an hour. */
function fall(through: number, until: number, hole?: [number, number]) {
  return Array.from({ length: until * 6 }, (_, index) => (index + 1) / 6)
    .filter((at) => hole === undefined || at < hole[0] || at > hole[1])
    .map((at) => ({ at: hour(at), pa: at >= through ? 0.99e-6 : 1.2e-6 }))
}

const FORECAST = { madeAt: MADE, targetPa: 1e-6, lowAt: hour(20), highAt: hour(40) }

interface Case {
  name: string
  through: number
  until: number
  hole?: [number, number]
  handled?: number
  highAt?: null
  expected: (Pick<Judged, 'outcome'> & { reachedAt: Date | null }) | null
}

const CASES: readonly Case[] = [
  { name: 'reached inside', through: 30, until: 48, expected: { outcome: 'inside', reachedAt: hour(30) } },
  {
    name: 'reached at the last moment',
    through: 40,
    until: 48,
    expected: { outcome: 'inside', reachedAt: hour(40) },
  },
  { name: 'reached early', through: 10, until: 12, expected: { outcome: 'early', reachedAt: hour(10) } },
  { name: 'reached late', through: 45, until: 48, expected: { outcome: 'late', reachedAt: hour(45) } },
  {
    name: 'not reached when the range ended',
    through: 99,
    until: 41,
    expected: { outcome: 'late', reachedAt: null },
  },
  { name: 'not reached yet', through: 99, until: 39, expected: null },
  { name: 'below for two steps only so far', through: 30, until: 30 + 1 / 6, expected: null },
  { name: 'no readings at all', through: 1, until: 0, expected: null },
  {
    name: 'range without an end, reached',
    through: 90,
    until: 99,
    highAt: null,
    expected: { outcome: 'inside', reachedAt: hour(90) },
  },
  { name: 'range without an end, not reached', through: 200, until: 99, highAt: null, expected: null },
  {
    name: 'handled before it was reached',
    through: 30,
    until: 48,
    handled: 25,
    expected: { outcome: 'spoiled', reachedAt: null },
  },
  {
    name: 'handled after it was reached',
    through: 30,
    until: 48,
    handled: 35,
    expected: { outcome: 'inside', reachedAt: hour(30) },
  },
  {
    name: 'handled after its range had ended',
    through: 99,
    until: 60,
    handled: 50,
    expected: { outcome: 'late', reachedAt: null },
  },
  {
    name: 'handled before it was made',
    through: 30,
    until: 48,
    handled: -5,
    expected: { outcome: 'inside', reachedAt: hour(30) },
  },
  {
    name: 'a hole over the lower end',
    through: 25,
    until: 48,
    hole: [15, 28],
    expected: { outcome: 'spoiled', reachedAt: hour(28 + 1 / 6) },
  },
  {
    name: 'a hole inside the range',
    through: 25,
    until: 48,
    hole: [22, 28],
    expected: { outcome: 'inside', reachedAt: hour(28 + 1 / 6) },
  },
  { name: 'readings end before the range does', through: 99, until: 60, hole: [30, 99], expected: null },
]

describe('a forecast', () => {
  test.each(CASES)('$name', ({ through, until, hole, handled, highAt, expected }) => {
    const found = judgeForecast(
      { ...FORECAST, highAt: highAt === null ? null : FORECAST.highAt },
      fall(through, until, hole),
      handled === undefined ? [] : [{ at: hour(handled), what: 'state set to "Vented"' }],
      STEP_MS,
    )
    if (expected === null) expect(found).toBeNull()
    else expect(found).toMatchObject(expected)
  })

  test('is not reached by a single low step', () => {
    const steps = fall(99, 30).map((step, index) => (index === 60 ? { ...step, pa: 1e-7 } : step))
    expect(judgeForecast(FORECAST, steps, [], STEP_MS)).toBeNull()
  })

  test('says what spoiled it', () => {
    expect(
      judgeForecast(FORECAST, fall(30, 48), [{ at: hour(25), what: 'MC-Z put on the segment' }], STEP_MS)
        ?.reason,
    ).toBe('Handled before it could come true: MC-Z put on the segment')
  })
})

describe('the record of hits', () => {
  const list = (...outcomes: ForecastOutcome[]) =>
    outcomes.map((outcome, index) => ({ outcome, judgedAt: outcome === 'open' ? null : hour(index) }))

  test('speaks of the last twenty that could be judged', () => {
    const old = Array.from({ length: 5 }, (): ForecastOutcome => 'late')
    const recent = Array.from({ length: 17 }, (): ForecastOutcome => 'inside')
    const found = hitRecord(list(...old, 'spoiled', ...recent, 'early', 'late', 'late', 'open'))
    expect(found).toEqual({ of: 20, inside: 17, early: 1, late: 2, spoiled: 1, open: 1 })
    expect(hitWords(found)).toBe(
      'Of the last 20 forecasts of record, 17 came true inside their 80 % range (1 came early, 2 late).',
    )
  })

  test('says so when there is none, or one', () => {
    expect(hitWords(hitRecord(list('open')))).toBe('No forecast of record has been judged yet.')
    expect(hitWords(hitRecord(list('inside')))).toBe(
      'The last forecast of record came true inside its 80 % range.',
    )
    expect(hitWords(hitRecord(list('late')))).toBe('The last forecast of record missed its 80 % range.')
  })
})
