import { describe, expect, test } from 'vitest'
import type { RequiredTest } from '#app/domain/permit-content.ts'
import {
  answers,
  judgeTest,
  limitsText,
  measures,
  nextDue,
  notTakenText,
  roundObjection,
  type TakenTest,
  testFacts,
} from '#app/domain/permit-tests.ts'
import { PERMIT_STATES } from '#app/domain/permit-words.ts'

const AT = new Date('2026-11-09T07:00:00.000Z')
const hours = (count: number) => new Date(AT.getTime() + count * 3_600_000)
const when = (at: Date) => at.toISOString().slice(0, 16)

const oxygen: RequiredTest = {
  kind: 'oxygen',
  place: 'Bay 7',
  low: 19.5,
  high: 23.5,
  unit: '%',
  everyHours: 12,
}
const stop: RequiredTest = {
  kind: 'emergency-stop',
  place: 'HX-1',
  low: null,
  high: null,
  unit: '',
  everyHours: null,
}

describe('a test', () => {
  const judged = (
    change: Partial<Parameters<typeof judgeTest>[1]> = {},
    required: RequiredTest | null = oxygen,
  ) =>
    judgeTest(
      required,
      {
        kind: 'oxygen',
        value: 20.8,
        unit: '%',
        takenAt: AT,
        calibrationDue: hours(1000),
        saysPassed: null,
        ...change,
      },
      when,
    )

  // Both ends count as inside.
  test.each([
    [19.4, false],
    [19.5, true],
    [20.8, true],
    [23.5, true],
    [23.6, false],
  ])('of oxygen at %f %% passes: %s', (value, passed) => {
    expect(judged({ value }).passed).toBe(passed)
  })

  test('with an instrument past its calibration does not pass, and says why', () => {
    expect(judged({ calibrationDue: AT })).toEqual({
      passed: false,
      reasons: ['The instrument’s calibration ran out 2026-11-09T07:00, before the test.'],
      doubt: 'The instrument’s calibration ran out 2026-11-09T07:00, before the test.',
    })
    expect(judged({ calibrationDue: new Date(AT.getTime() + 1) }).passed).toBe(true)
    expect(judged({ calibrationDue: null }).reasons).toEqual([
      'Nobody knows until when the instrument is calibrated.',
    ])
  })

  test('without a figure, or in another unit, does not pass', () => {
    expect(judged({ value: null }).reasons).toEqual(['There is no figure; wanted: 19.5 to 23.5 %.'])
    expect(judged({ value: 0.208, unit: '' }).reasons).toEqual([
      'Found a figure in no unit; wanted: 19.5 to 23.5 %.',
    ])
  })

  test('of oxygen beyond what the permit asks for has the usual limits all the same', () => {
    expect(judged({ value: 19.2, saysPassed: true }, null).passed).toBe(false)
    expect(judged({ saysPassed: true }, null).passed).toBe(true)
  })

  test('that is tried is the tester’s word, and nobody’s word is none', () => {
    const tried = { kind: 'emergency-stop' as const, value: null, unit: '', calibrationDue: null }
    expect(judged({ ...tried, saysPassed: true }, stop).passed).toBe(true)
    expect(judged({ ...tried, saysPassed: false }, stop).reasons).toEqual(['The tester says it failed.'])
    expect(judged({ ...tried, saysPassed: null }, stop).reasons).toEqual([
      'Nobody has said whether it passed.',
    ])
  })

  test('that the tester calls failed is failed within its limits too', () => {
    expect(judged({ saysPassed: false }).passed).toBe(false)
  })
})

test('an instrument of another quantity is not the one', () => {
  expect(measures('oxygen', 'oxygen')).toBe(true)
  expect(measures('oxygen', 'pressure')).toBe(false)
  expect(measures('earth-continuity', 'voltage')).toBe(true)
  expect(measures('flammable-gas', 'oxygen')).toBe(true)
})

test('limits in words', () => {
  expect(limitsText(oxygen)).toBe('19.5 to 23.5 %')
  expect(limitsText({ low: 1, high: null, unit: 'MΩ' })).toBe('at least 1 MΩ')
  expect(limitsText({ low: null, high: 1, unit: 'V' })).toBe('at most 1 V')
  expect(limitsText(stop)).toBe('')
})

test('a test answers what is asked for at its place, however the place is spaced', () => {
  expect(answers(oxygen, { kind: 'oxygen', place: ' bay  7' })).toBe(true)
  expect(answers(oxygen, { kind: 'oxygen', place: 'Bay 8' })).toBe(false)
  expect(answers(oxygen, { kind: 'communications', place: 'Bay 7' })).toBe(false)
})

describe('what the rules are told', () => {
  let id = 0
  const taken = (change: Partial<TakenTest> = {}): TakenTest => {
    id += 1
    return {
      id,
      kind: 'oxygen',
      place: 'Bay 7',
      value: 20.8,
      unit: '%',
      passed: true,
      takenAt: AT,
      note: '',
      ...change,
    }
  }
  const facts = (tests: TakenTest[], now = hours(1), required = [oxygen]) =>
    testFacts(required, tests, now, when)

  test('nothing yet', () => {
    expect(facts([])).toEqual([
      {
        kind: 'oxygen',
        place: 'Bay 7',
        state: 'missing',
        takenAt: null,
        nextDueAt: null,
        text: 'Oxygen, Bay 7: not tested yet',
      },
    ])
  })

  test('good until the very second it is due again', () => {
    expect(facts([taken()])[0]).toMatchObject({ state: 'good', takenAt: AT, nextDueAt: hours(12) })
    expect(facts([taken()], new Date(hours(12).getTime() - 1))[0]?.state).toBe('good')
    expect(facts([taken()], hours(12))[0]).toMatchObject({
      state: 'overdue',
      text: 'Oxygen, Bay 7: overdue (20.8 %, 2026-11-09T07:00), was due again 2026-11-09T19:00',
    })
    expect(nextDue(stop, AT)).toBeNull()
  })

  test('the last one counts, by when it was taken and not by when it was written down', () => {
    const bad = taken({ passed: false, value: 19.2 })
    expect(facts([bad, taken({ takenAt: hours(0.5) })])[0]?.state).toBe('good')
    expect(facts([taken({ takenAt: hours(0.5) }), bad])[0]?.state).toBe('good')
    expect(facts([taken({ takenAt: hours(-1) }), bad])[0]).toMatchObject({
      state: 'failed',
      text: 'Oxygen, Bay 7: failed (19.2 %, 2026-11-09T07:00). Found 19.2 %; wanted: 19.5 to 23.5 %.',
    })
  })

  test('limits changed since are those of now', () => {
    expect(facts([taken()], hours(1), [{ ...oxygen, low: 20.9 }])[0]?.state).toBe('failed')
    expect(facts([taken()], hours(1), [{ ...oxygen, everyHours: 0.5 }])[0]?.state).toBe('overdue')
  })

  test('a test of the future or of another place does not count', () => {
    expect(facts([taken({ takenAt: hours(2) })])[0]?.state).toBe('missing')
    expect(facts([taken({ place: 'Bay 8' })])[0]?.state).toBe('missing')
  })
})

test('tests are written down from the request until the end', () => {
  expect(PERMIT_STATES.filter((state) => notTakenText('HSP-2026-031', state) === null)).toEqual([
    'requested',
    'approved',
    'issued',
    'suspended',
    'expired',
    'handed-back',
  ])
})

test('a round that found something too hot was not in order', () => {
  const round = { inOrder: true, hottestC: 151, text: '' }
  expect(roundObjection(round, 150)).toMatch(/151 °C is above the 150 °C/)
  expect(roundObjection({ ...round, hottestC: 150 }, 150)).toBeNull()
  expect(roundObjection({ ...round, hottestC: null }, 150)).toBeNull()
  expect(roundObjection({ ...round, inOrder: false }, 150)).toMatch(/what was not in order/)
  expect(roundObjection({ ...round, inOrder: false, text: 'insulation slipped at 706 m' }, 150)).toBeNull()
})
