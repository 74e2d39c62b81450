import { describe, expect, test } from 'vitest'
import {
  againstLimit,
  fitIsolation,
  IsolationFindingSchema,
  type IsolationPoint,
  lastOpened,
  openingsOf,
  usualWindow,
  windowBefore,
} from '#app/domain/isolation-tests.ts'
import { IsolationDataError } from '#app/physics/isolation.ts'

const NIGHT = new Date('2026-03-01T19:00:00.000Z')
const hour = (hours: number) => new Date(NIGHT.getTime() + hours * 3_600_000)
/** 0.50 m across and 150 m long. */
const VOLUME = (Math.PI / 4) * 0.25 * 150
const SEGMENT = { gauge: 'HC-77B', volumeM3: VOLUME, binSeconds: 60, temperatureC: null }

/** Readings of a rise in Pa/h from 5e-8 Pa, with an even scatter of 2 % from reading to reading. */
function rise(perHour: number, from = 1, to = 12): IsolationPoint[] {
  return Array.from({ length: (to - from) * 20 + 1 }, (_, index) => {
    const at = from + index / 20
    return { at: hour(at), pa: (5e-8 + perHour * at) * (1 + 0.02 * Math.sin(index * 12.9898) * 1.4) }
  })
}

describe('the fit of a window', () => {
  // Own arithmetic: 6.0e-6 Pa/h times 29.45 m3 over 3600 s, and a gauge factor of 0.43 for hydrogen.
  test('gives rise, throughput and what hydrogen would be behind it', () => {
    const finding = fitIsolation(rise(6e-6), SEGMENT)
    expect(finding.kind).toBe('steady')
    expect(finding.ratePaPerHour / 6e-6).toBeCloseTo(1, 2)
    expect(finding.rateSePaPerHour).toBeGreaterThan(0)
    expect(finding.rateSePaPerHour).toBeLessThan(0.02 * finding.ratePaPerHour)
    expect(finding.throughputPaM3S / 4.909e-8).toBeCloseTo(1, 2)
    expect(finding.hydrogenPaM3S / 1.142e-7).toBeCloseTo(1, 2)
    expect(IsolationFindingSchema.parse(JSON.parse(JSON.stringify(finding)))).toEqual(finding)
  })

  test('is refused across a fall of the pressure, with the moment', () => {
    const opened = [...rise(6e-6), ...rise(6e-8, 12.1, 14)]
    let error: unknown
    try {
      fitIsolation(opened, SEGMENT)
    } catch (thrown) {
      error = thrown
    }
    expect(error).toBeInstanceOf(IsolationDataError)
    expect((error as IsolationDataError).reason).toBe('valve-reopened')
    expect(((error as IsolationDataError).atSeconds ?? 0) / 3600).toBeCloseTo(11.1, 1)
  })
})

describe('against the limit', () => {
  const finding = fitIsolation(rise(6e-6), SEGMENT)
  test.each([
    [1.2e-5, 'within'],
    [6.01e-6, 'cannot-tell'],
    [5.99e-6, 'cannot-tell'],
    [3e-6, 'over'],
  ] as const)('a limit of %s Pa/h: %s', (limit, answer) => {
    expect(againstLimit({ ...finding, ratePaPerHour: 6e-6, rateSePaPerHour: 5e-8 }, limit)).toBe(answer)
  })
  test('a bend too slow for its window leaves it open', () => {
    expect(againstLimit({ ...finding, kind: 'too-short' }, 1)).toBe('cannot-tell')
  })
})

describe('openings', () => {
  const handled = {
    states: [
      { state: 'isolated-test' as const, since: hour(0.2) },
      { state: 'pumping' as const, since: hour(13) },
      { state: 'in-service' as const, since: hour(30) },
    ],
    pumps: [
      { tag: 'PX-77', startsAt: hour(12.9) },
      { tag: 'MC-Z', startsAt: hour(-5) },
    ],
  }
  test('are states and pumps after the closing, oldest first; the state of the test itself is none', () => {
    expect(openingsOf(hour(0), hour(20), handled)).toEqual([
      { at: hour(12.9), what: 'PX-77 put on the segment' },
      { at: hour(13), what: 'state set to "Pumping"' },
    ])
    expect(openingsOf(hour(0), hour(12.8), handled)).toEqual([])
  })

  test('the longest window before one keeps the beginning that was asked for where it can', () => {
    const offered = (opening: number, fitFrom: number) =>
      windowBefore(hour(opening), { closedAt: hour(0), fitFrom: hour(fitFrom) })
    expect(offered(12, 2)).toEqual({ from: hour(2), to: hour(12 - 1 / 60) })
    expect(offered(12, 14)).toEqual({ from: hour(1), to: hour(12 - 1 / 60) })
    expect(offered(0.5, 14)).toEqual({ from: hour(0), to: hour(0.5 - 1 / 60) })
  })

  test('without a choice the first hour is left out, unless there is no more', () => {
    expect(usualWindow(hour(0), hour(12))).toEqual({ from: hour(1), to: hour(12) })
    expect(usualWindow(hour(0), hour(0.7))).toEqual({ from: hour(0), to: hour(0.7) })
  })
})

test('a segment was last opened when its last open state ended', () => {
  const span = (state: 'vented' | 'pumping' | 'maintenance', from: number, to: number | null) => ({
    state,
    since: hour(from),
    endedAt: to === null ? null : hour(to),
  })
  expect(lastOpened([span('pumping', -9, null)], hour(5))).toBeNull()
  expect(
    lastOpened([span('vented', -9, -7), span('maintenance', -5, -2), span('pumping', -2, null)], hour(5)),
  ).toEqual(hour(-2))
  expect(lastOpened([span('pumping', -9, 1), span('vented', 1, null)], hour(5))).toEqual(hour(5))
})
