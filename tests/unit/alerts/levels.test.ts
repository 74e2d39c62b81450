/** A1, A2, A5 and A8, with the edges of limit, deadband and delay. */
import { describe, expect, test } from 'vitest'
import { MARKS } from '#app/domain/readings.ts'
import { type Cell, COMMON, HOUR, inPieces, judged, MIN, repeat, series, T0, told } from './made.ts'

const LOW = 1e-7
const HIGH = 3e-6
/** Between 2e-6 / 1.5 and 2e-6. */
const BAND = 1.5e-6

function pressure(cells: readonly Cell[], periodS = 60) {
  return {
    condition: 'pressure-above-limit' as const,
    facts: { ...COMMON, series: series('HC-01A', periodS, cells), limits: [] },
    untilMs: T0 + cells.length * periodS * 1000,
  }
}

describe('A1, limit 2e-6 Pa, 5 min on, 15 min off, back below 1.33e-6 Pa', () => {
  test.each<[string, Cell[], string[]]>([
    ['exactly at the limit is not above', repeat(30, 2e-6), []],
    ['just above it for five minutes', [LOW, ...repeat(6, 2.01e-6)], ['raise +6 since +1 high']],
    ['four minutes and one reading back', [...repeat(5, HIGH), LOW, LOW], []],
    ['a reading in the deadband stops the delay', [...repeat(5, HIGH), BAND, ...repeat(5, HIGH)], []],
    [
      'the deadband does not clear, nor does exactly its edge',
      [...repeat(6, HIGH), ...repeat(30, BAND), ...repeat(30, 2e-6 / 1.5)],
      ['raise +5 since +0 high'],
    ],
    [
      'below the deadband for fifteen minutes does',
      [...repeat(6, HIGH), ...repeat(16, LOW)],
      ['raise +5 since +0 high', 'clear +21 since +6 high'],
    ],
    ['fourteen do not', [...repeat(6, HIGH), ...repeat(15, LOW)], ['raise +5 since +0 high']],
    [
      'one reading in the deadband begins the fifteen anew',
      [...repeat(6, HIGH), ...repeat(10, LOW), BAND, ...repeat(16, LOW)],
      ['raise +5 since +0 high', 'clear +32 since +17 high'],
    ],
    [
      'over a bound above the limit counts as above',
      repeat<Cell>(6, ['over-range', 1e-2]),
      ['raise +5 since +0 high'],
    ],
    ['over a bound below the limit says nothing', repeat<Cell>(30, ['over-range', 1e-6]), []],
    [
      'under a bound below the deadband counts as back',
      [...repeat(6, HIGH), ...repeat<Cell>(16, ['under-range', 1e-8])],
      ['raise +5 since +0 high', 'clear +21 since +6 high'],
    ],
    [
      'under a bound in the deadband does not',
      [...repeat(6, HIGH), ...repeat<Cell>(40, ['under-range', BAND])],
      ['raise +5 since +0 high'],
    ],
    [
      'words say nothing, and what was above stays pending',
      [HIGH, 'off', 'fault', 'degas', 'off', HIGH],
      ['raise +5 since +0 high'],
    ],
    ['a hole of 31 minutes begins the delay anew', [HIGH, ...repeat(30, null), ...repeat(5, HIGH)], []],
    ['a hole of half an hour does not', [HIGH, ...repeat(29, null), HIGH], ['raise +30 since +0 high']],
    [
      'nothing clears inside a hole',
      [...repeat(6, HIGH), LOW, ...repeat(60, null), ...repeat(15, LOW)],
      ['raise +5 since +0 high'],
    ],
  ])('%s', (_, cells, expected) => {
    expect(told(judged(pressure(cells)))).toEqual(expected)
  })

  test('tells value, limit and place', () => {
    const { events, evaluable } = judged(pressure(repeat(6, 3.14e-6)))
    expect(events).toMatchObject([
      {
        value: 3.14e-6,
        limit: 2e-6,
        unit: 'Pa',
        title: 'SG-01 HC-01A pressure 3.1e-6 Pa (limit 2.0e-6)',
        detail: { peak: 3.14e-6 },
      },
    ])
    expect(evaluable).toBe(true)
  })

  test('readings whose times are not certain stay out', () => {
    const asked = pressure(repeat(60, HIGH))
    const marks = asked.facts.series.at
    const doubtful = { ...asked.facts.series, marks: Array.from(marks, () => MARKS['time-ambiguous']) }
    const found = judged({ ...asked, facts: { ...asked.facts, series: doubtful } })
    expect(found).toMatchObject({
      events: [],
      evaluable: false,
      why: 'HC-01A: no good reading; the times of the newest are not certain.',
    })
  })

  test('without good readings it is not evaluable, and says since when and what the newest says', () => {
    const found = judged(pressure([LOW, ...repeat(60, 'off' as const)]))
    expect(found).toMatchObject({ events: [], evaluable: false })
    expect(found.why).toBe('HC-01A: no good reading since 2026-11-08 20:00 UTC; the newest says “off”.')
    expect(judged(pressure(repeat(20, null))).why).toBe('HC-01A: no reading.')
  })

  test('the order of arrival does not matter', () => {
    const cells = [...repeat(6, HIGH), ...repeat(16, LOW), ...repeat(9, HIGH)]
    const asked = pressure(cells)
    const { series: ordered } = asked.facts
    const order = Array.from(ordered.at, (_, i) => (i * 7) % cells.length)
    const pick = (values: ArrayLike<number>) => order.map((i) => values[i]!)
    const mixed = {
      ...ordered,
      at: pick(ordered.at),
      value: pick(ordered.value),
      quality: pick(ordered.quality),
      bound: pick(ordered.bound!),
    }
    const found = judged({ ...asked, facts: { ...asked.facts, series: mixed } })
    expect(found).toEqual(judged(asked))
    expect(told(found)).toEqual([
      'raise +5 since +0 high',
      'clear +21 since +6 high',
      'raise +27 since +22 high',
    ])
  })

  test('a dated limit of the register goes before the rule’s own while it holds', () => {
    const asked = pressure(repeat(60, HIGH))
    const limits = [{ fromMs: T0 - HOUR, toMs: T0 + 20 * MIN, value: 5e-6 }]
    expect(told(judged({ ...asked, facts: { ...asked.facts, limits } }))).toEqual([
      'raise +25 since +20 high',
    ])
  })

  test('a rule without its figure says so', () => {
    const found = judged({ ...pressure(repeat(60, HIGH)), content: { figures: { clearRatio: 1.5 } } })
    expect(found).toMatchObject({ events: [], evaluable: false })
    expect(found.why).toBe('The rule does not say “Limit”: a figure from 1e-12 to 200000 Pa is needed.')
  })
})

describe('states of the segment', () => {
  const states = [
    { state: 'in-service' as const, fromMs: T0 - HOUR, toMs: T0 + 10 * MIN },
    { state: 'leak-hunt' as const, fromMs: T0 + 10 * MIN, toMs: T0 + 30 * MIN },
    { state: 'in-service' as const, fromMs: T0 + 30 * MIN, toMs: null },
  ]
  const asked = pressure(repeat(60, HIGH))
  const hunted = {
    ...asked,
    facts: { ...asked.facts, states },
    content: { suppressedIn: ['leak-hunt' as const] },
  }

  test('what is not watched any more is cleared with the reason, and is told again when watched again', () => {
    const found = judged(hunted)
    expect(told(found)).toEqual([
      'raise +5 since +0 high',
      'clear +10 since +10 high',
      'raise +35 since +30 high',
    ])
    expect(found.events[1]?.detail).toMatchObject({ suppressed: true })
    expect(found.events[1]?.detail.text).toContain('“Leak hunt” (since 2026-11-08 20:10 UTC)')
    expect(told(inPieces(hunted, [T0 + 7 * MIN, T0 + 20 * MIN, T0 + 33 * MIN]))).toEqual(told(found))
  })

  test('not monitored is said with the state and its date', () => {
    const found = judged({ ...hunted, untilMs: T0 + 20 * MIN })
    expect(found).toMatchObject({
      evaluable: false,
      suppressed: { state: 'leak-hunt', since: new Date(T0 + 10 * MIN) },
    })
  })
})

test('A2 waits an hour both ways', () => {
  const cells = [...repeat(7, 3e-7), ...repeat(7, 1.5e-7)]
  const found = judged({
    condition: 'pressure-above-target',
    facts: { ...COMMON, series: series('HC-01A', 600, cells), limits: [] },
    untilMs: T0 + 140 * MIN,
  })
  expect(told(found)).toEqual(['raise +60 since +0 low', 'clear +130 since +70 low'])
})

test('A5 holds the ramp first and then advises to break off', () => {
  const cells = [2e-2, 2e-2, 6e-2, 6e-2, ...repeat(6, 3e-2), ...repeat(6, 4e-3)]
  const found = judged({
    condition: 'pressure-while-heating',
    facts: { ...COMMON, series: series('HC-05A', 60, cells), limits: [] },
    untilMs: T0 + HOUR,
  })
  expect(told(found)).toEqual([
    'raise +1 since +0 high',
    'worsen +3 since +2 high',
    'clear +15 since +10 high',
  ])
  expect(found.events.slice(0, 2).map(({ title }) => title)).toEqual([
    'SG-01 HC-05A 0.02 Pa while hot, hold the ramp (limit 0.01)',
    'SG-01 HC-05A 0.06 Pa while hot, think of breaking off (limit 0.05)',
  ])
})

describe('A8', () => {
  const facts = (cells: readonly Cell[]) => ({
    ...COMMON,
    series: series('TH-05-07', 60, cells),
    setpoint: { at: [T0, T0 + HOUR], value: [150, 150] } as { at: number[]; value: number[] } | null,
    parts: [] as { tag: string; limitC: number; riseShare: number }[],
    ambientC: 18,
  })
  const at = (cells: readonly Cell[], more: Partial<ReturnType<typeof facts>> = {}) =>
    judged({
      condition: 'over-temperature',
      facts: { ...facts(cells), ...more },
      untilMs: T0 + cells.length * MIN,
    })

  test('above setpoint + 10 for two minutes, cleared 5 below for ten', () => {
    const cells = [160, 160.1, 160.1, 163, ...repeat(5, 155), ...repeat(11, 154.9)]
    expect(told(at(cells))).toEqual(['raise +3 since +1 highest', 'clear +19 since +9 highest'])
    expect(at(cells).events[0]).toMatchObject({
      title: 'SG-01 TH-05-07 temperature 163 °C (limit 160)',
      limit: 160,
    })
  })

  test('an elastomer bonnet of 120 °C at 0.7 of the rise bears a tube of 163.7 °C', () => {
    // 18 + (120 - 18) / 0.7 = 163.714
    const bonnet = { parts: [{ tag: 'GV-04', limitC: 120, riseShare: 0.7 }], setpoint: null }
    expect(told(at(repeat(9, 163.7), bonnet))).toEqual([])
    expect(told(at(repeat(9, 163.8), bonnet))).toEqual(['raise +2 since +0 highest'])
    expect(at(repeat(9, 163.8), bonnet).events[0]?.title).toContain('(limit 163.7, GV-04)')
  })

  test('the lower of plan and part decides', () => {
    const tube = { parts: [{ tag: 'GV-05', limitC: 150, riseShare: 1 }] }
    expect(told(at(repeat(4, 151), tube))).toEqual(['raise +2 since +0 highest'])
  })

  test('with neither plan nor part there is no limit, which is said', () => {
    const found = at(repeat(9, 400), { setpoint: null })
    expect(found).toMatchObject({
      events: [],
      evaluable: false,
      why: expect.stringContaining('no limit holds'),
    })
  })
})
