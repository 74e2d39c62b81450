/** A3, A4 and A9: robust slopes on readings made for them. */
import { describe, expect, test } from 'vitest'
import { type Bin, medianSlope } from '#app/domain/alerts/bins.ts'
import { type Cell, COMMON, DAY, HOUR, inPieces, judged, MIN, repeat, series, T0, told } from './made.ts'

describe('median of pairwise slopes', () => {
  const bins = (means: readonly number[]): Bin[] =>
    means.map((sum, index) => ({ index, sum, count: 1, coveredMs: 1, lastMs: index }))

  test('two wild points in ten do not move it', () => {
    expect(medianSlope(bins([0, 1, 2, 3, 4, 5, 6, 7, 8, 9]))).toBe(1)
    expect(medianSlope(bins([0, 1, 50, 3, 4, 5, 6, -70, 8, 9]))).toBeCloseTo(1, 12)
  })
  test('by hand: slopes 1, 2, 3 of three points', () => {
    // (0,0) (1,1) (2,4): 1, 3 and 2.
    expect(medianSlope(bins([0, 1, 4]))).toBe(2)
  })
  test('four points have six slopes and the mean of the middle two', () => {
    // (0,0) (1,1) (2,1) (3,6): 1, 0.5, 2, 0, 2.5, 5 -> sorted 0 0.5 1 2 2.5 5.
    expect(medianSlope(bins([0, 1, 1, 6]))).toBe(1.5)
  })
  test('two points are none', () => {
    expect(medianSlope(bins([0, 1]))).toBeNaN()
  })
})

/** Cells every 10 s; grows by `ratio` in ten minutes. */
function growing(from: number, ratio: number, minutes: number): number[] {
  return Array.from({ length: minutes * 6 }, (_, i) => from * ratio ** (i / 60))
}

function fast(cells: readonly Cell[], disturbances: { atMs: number; what: string }[] = []) {
  return {
    condition: 'fast-rise' as const,
    facts: { states: [], disturbances, series: series('HC-06A', 10, cells) },
    untilMs: T0 + cells.length * 10_000,
  }
}

describe('A3: twice within 10 min and above 5e-7 Pa, two means in a row', () => {
  // Six of ten minutes are covered when the sixth minute is full: 5 min 50 s is its last reading, 6:00 closes it.
  test.each<[string, Cell[], string[]]>([
    ['2.1 times in ten minutes', growing(1e-6, 2.1, 12), ['raise +7 since +5.833333333333333 high']],
    ['1.9 times', growing(1e-6, 1.9, 30), []],
    ['three times, far below the floor', growing(1e-8, 3, 20), []],
    ['from the floor on only', growing(2.5e-7, 4, 12), ['raise +7 since +5.833333333333333 high']],
    ['a burst of two minutes', [...repeat(120, 1e-6), ...repeat(12, 1e-4), ...repeat(120, 1e-6)], []],
    ['falling', growing(1e-4, 0.2, 20), []],
  ])('%s', (_, cells, expected) => {
    expect(told(judged(fast(cells)))).toEqual(expected)
  })

  test('is over ten minutes after it has come to rest', () => {
    const risen = growing(1e-6, 4, 20)
    const found = judged(fast([...risen, ...repeat(240, risen.at(-1)!)]))
    expect(found.events.map(({ kind }) => kind)).toEqual(['raise', 'clear'])
    const minutes = (found.events[1]!.at.getTime() - T0) / MIN
    // Flat from minute 20; the middle of the slopes is flat when most pairs are, some minutes later, and ten more.
    expect(minutes).toBeGreaterThan(32)
    expect(minutes).toBeLessThanOrEqual(41)
  })

  test('words between the readings leave half a coverage: not evaluable, which is not “in order”', () => {
    const cells = growing(1e-6, 3, 30).map((value, i): Cell => (i % 2 === 0 ? value : 'degas'))
    const found = judged(fast(cells))
    expect(found).toMatchObject({ events: [], evaluable: false })
    expect(found.why).toContain('Good readings cover 50 % of the window, 60 % are asked for.')
  })

  test('two of three are enough', () => {
    const cells = growing(1e-6, 3, 30).map((value, i): Cell => (i % 3 === 0 ? 'degas' : value))
    expect(judged(fast(cells))).toMatchObject({ evaluable: true, events: [{ kind: 'raise' }] })
  })

  test('an over-range reading is no measured value for a slope', () => {
    const cells = [...repeat<Cell>(60, 1e-6), ...repeat<Cell>(60, ['over-range', 1e-2])]
    expect(judged(fast(cells)).events).toEqual([])
  })

  test('a step made by a valve worked by hand is not told, one without is', () => {
    const cells = [...repeat(120, 1e-6), ...repeat(180, 4e-6)]
    expect(judged(fast(cells)).events.map(({ kind }) => kind)).toEqual(['raise', 'clear'])
    expect(judged(fast(cells, [{ atMs: T0 + 20 * MIN - 1, what: 'GV-05 opened' }])).events).toEqual([])
  })

  test('readings every ten minutes are too coarse, which is said', () => {
    const facts = { ...COMMON, series: series('HC-06A', 600, growing(1e-6, 3, 30)) }
    const found = judged({ condition: 'fast-rise', facts, untilMs: T0 + 2 * DAY })
    expect(found.evaluable).toBe(false)
    expect(found.why).toBe('HC-06A: a reading every 600 s is too coarse for a window of 10 min.')
  })
})

describe('A4: a fifth more a day over three days', () => {
  /** Every ten minutes, from a day's beginning. */
  const days = (count: number, perDay: number, from = 1e-7) =>
    Array.from({ length: count * 144 }, (_, i) => from * (1 + perDay) ** (i / 144))
  const slow = (cells: readonly Cell[], disturbances: { atMs: number; what: string }[] = []) => ({
    condition: 'slow-rise' as const,
    facts: { states: [], disturbances, series: series('HC-16A', 600, cells) },
    untilMs: T0 + cells.length * 10 * MIN,
  })

  test('raised when six tenths of the three days are covered', () => {
    const found = judged(slow(days(4, 0.21)))
    // 44 of 72 hours: 43.2 are six tenths.
    expect(told(found)).toEqual([`raise +${44 * 60} since +${44 * 60 - 10} medium`])
    expect(found.events[0]).toMatchObject({ unit: '%/d', limit: 20 })
    expect(found.events[0]?.value).toBeCloseTo(21, 6)
  })
  test.each([0.19, 0.05, 0, -0.3])('%d a day is not told', (perDay) => {
    expect(judged(slow(days(5, perDay)))).toMatchObject({ events: [], evaluable: true })
  })
  test('bursts of an hour a day do not make it', () => {
    const cells = days(4, 0).map((value, i) => (i % 144 < 6 ? value * 100 : value))
    expect(judged(slow(cells)).events).toEqual([])
  })
  test('is over after two days of rest', () => {
    const risen = days(3, 0.3)
    const found = judged(slow([...risen, ...repeat(144 * 6, risen.at(-1)!)]))
    expect(found.events.map(({ kind }) => kind)).toEqual(['raise', 'clear'])
    const day = (found.events[1]!.at.getTime() - T0) / DAY
    expect(day).toBeGreaterThan(5)
    expect(day).toBeLessThan(8)
  })
  test('a new gauge that reads four times as much is no rise; readings of its first 48 h stay out', () => {
    const cells = [...days(3, 0), ...days(4, 0, 4e-7)]
    const changed = [{ atMs: T0 + 3 * DAY, what: 'HC-16A changed' }]
    expect(judged(slow(cells, changed))).toMatchObject({ events: [], evaluable: true })
    // Two days are left out and one is too few: 24 of 72 hours.
    const early = judged({ ...slow(cells, changed), untilMs: T0 + 6 * DAY })
    expect(early).toMatchObject({ events: [], evaluable: false, why: expect.stringContaining('cover 33 %') })
    expect(judged(slow(cells)).events).toMatchObject([{ kind: 'raise' }, { kind: 'clear' }])
  })
})

describe('A9', () => {
  /** Every minute at a rate in °C/h. */
  const ramp = (rate: number, minutes: number, from = 20) =>
    Array.from({ length: minutes }, (_, i) => from + (rate * i) / 60)
  const asked = (cells: readonly Cell[], planned: number | null) => ({
    condition: 'ramp-too-fast' as const,
    facts: {
      ...COMMON,
      series: series('TH-05-01', 60, cells),
      planned: planned === null ? [] : [{ fromMs: T0, toMs: null, value: planned }],
    },
    untilMs: T0 + cells.length * MIN,
  })
  test.each<[number, number | null, number]>([
    [11.9, 10, 0],
    [12.1, 10, 1],
    [14.9, 14, 0],
    [15.1, 14, 1],
    [14.9, null, 0],
    [15.1, null, 1],
    [-40, 10, 0],
  ])('%d °C/h where %s are planned', (rate, planned, count) => {
    expect(judged(asked(ramp(rate, 120), planned)).events).toHaveLength(count)
  })
  test('raised ten minutes after it is seen, over ten minutes after the slope is below the plan', () => {
    const cells = [...ramp(13, 60), ...ramp(8, 120, 33)]
    const found = judged(asked(cells, 10))
    // Six of ten bins of three minutes are full at 18 min; 12 min later is the first bin past the delay.
    expect(found.events[0]).toMatchObject({ kind: 'raise', at: new Date(T0 + 30 * MIN), limit: 12 })
    expect(found.events[0]?.value).toBeCloseTo(13, 6)
    expect(found.events.map(({ kind }) => kind)).toEqual(['raise', 'clear'])
    expect(
      told(inPieces(asked(cells, 10), [T0 + 17 * MIN, T0 + 29 * MIN, T0 + 31 * MIN, T0 + HOUR])),
    ).toEqual(told(found))
  })
})
