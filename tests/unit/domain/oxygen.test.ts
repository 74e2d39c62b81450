import { describe, expect, test } from 'vitest'
import { judgeOxygen, type OxygenLimits, type OxygenReading, releaseRun } from '#app/domain/oxygen.ts'

const NOW = new Date('2026-11-09T12:00:00.000Z')
const LIMITS: OxygenLimits = { low: 19.5, high: 23.5, release: 20, set: true }

function reading(percent: number, minutesAgo: number, doubt = ''): OxygenReading {
  const at = new Date(NOW.getTime() - minutesAgo * 60_000)
  return { percent, at, place: '2 000 m', instrument: 'OX-3', tester: 'Pim', doubt }
}
const release = (...readings: OxygenReading[]) => releaseRun(readings, LIMITS, NOW)

// 19.5 and 23.5 %: 29 CFR 1910.146(b), "oxygen deficient" below and "oxygen enriched" above.
test.each([
  [19.2, 'low'],
  [19.49, 'low'],
  [19.5, 'good'],
  [20.9, 'good'],
  [23.5, 'good'],
  [23.51, 'high'],
])('%d %% is %s', (percent, answer) => {
  expect(judgeOxygen(percent, LIMITS)).toBe(answer)
})

describe('release', () => {
  test('two readings of 20.0 % ten minutes apart are enough', () => {
    expect(release(reading(20, 10), reading(20, 0))).toMatchObject({ ok: true, missing: '' })
    expect(release(reading(20, 0), reading(20, 10)).run.map(({ at }) => at.getTime())).toEqual([
      NOW.getTime() - 600_000,
      NOW.getTime(),
    ])
  })

  test('nine minutes and fifty-nine seconds are not', () => {
    const short = release(reading(20.5, 10 - 1 / 60), reading(20.5, 0))
    expect(short).toMatchObject({ ok: false, missing: expect.stringContaining('for 9 of 10 minutes') })
  })

  test('two good readings with more than ten minutes between them say nothing about the time between', () => {
    expect(release(reading(20.5, 11), reading(20.5, 0))).toMatchObject({
      ok: false,
      run: [{ percent: 20.5 }],
    })
    expect(release(reading(20.5, 11), reading(20.5, 5), reading(20.5, 0)).ok).toBe(true)
  })

  test('19.9 % between them begins the time anew', () => {
    expect(release(reading(20.5, 20), reading(19.9, 8), reading(20.5, 4), reading(20.5, 0))).toMatchObject({
      ok: false,
      run: [{}, {}],
    })
    expect(release(reading(20.5, 20), reading(20.5, 12), reading(19.9, 0)).missing).toContain(
      'The newest reading is 19.9 %.',
    )
  })

  test('too much oxygen is no good air', () => {
    expect(release(reading(24, 10), reading(24, 0)).ok).toBe(false)
  })

  test('the newest has to be fresh', () => {
    expect(release(reading(20.5, 40), reading(20.5, 30)).ok).toBe(true)
    expect(release(reading(20.5, 41), reading(20.5, 31)).missing).toContain('31 minutes old')
  })

  test('one in doubt neither helps nor breaks, and a bad one in doubt still breaks', () => {
    expect(release(reading(20.5, 10), reading(20.5, 5, 'overdue'), reading(20.5, 0)).ok).toBe(true)
    expect(release(reading(20.5, 10, 'overdue'), reading(20.5, 0)).ok).toBe(false)
    expect(release(reading(20.5, 10), reading(19, 5, 'overdue'), reading(20.5, 0)).ok).toBe(false)
  })

  test('without readings it says so', () => {
    expect(release().missing).toContain('There is no reading')
  })
})
