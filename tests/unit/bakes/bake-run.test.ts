import { describe, expect, test } from 'vitest'
import {
  adviceFor,
  coolingOf,
  dayOf,
  meterEnergy,
  rampEnd,
  rampRate,
  skylineOf,
  soakEnd,
  spreadOf,
  supplyEnergy,
  type ThermocoupleNow,
  worstTwo,
} from '../../../app/domain/bake-run.ts'

const NOW = Date.UTC(2026, 10, 9, 7, 0)
const MINUTE = 60_000
const HOUR = 60 * MINUTE

function couple(no: number, celsius: number | null, minutesAgo = 2, since = ''): ThermocoupleNow {
  return {
    tag: `TH-05-${String(no).padStart(2, '0')}`,
    chainageM: 600 + (no - 0.5) * 12.5,
    celsius,
    at: celsius === null ? null : NOW - minutesAgo * MINUTE,
    since,
  }
}

const even = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12].map((no) => couple(no, 150 + (no % 3)))

describe('temperatures along the tube', () => {
  test('come out west to east with their ages, and old or silent ones are told apart from fresh ones', () => {
    const points = skylineOf(
      [couple(3, 151, 45), couple(1, 150), couple(2, null), couple(4, 149, 8, 'open circuit')],
      NOW,
      15,
    )
    expect(points.map(({ tag, state }) => [tag, state])).toEqual([
      ['TH-05-01', 'fresh'],
      ['TH-05-02', 'silent'],
      ['TH-05-03', 'stale'],
      ['TH-05-04', 'silent'],
    ])
    expect(points[2]?.ageMinutes).toBe(45)
  })

  test('what is not fresh takes no part in the spread', () => {
    const points = skylineOf(
      [...even.slice(0, 10), couple(11, 20, 60), couple(12, 1372, 1, 'open circuit')],
      NOW,
      15,
    )
    const spread = spreadOf(points)
    expect(spread?.celsius).toBe(2)
    expect(spread?.counted).toBe(10)
    expect(spread?.of).toBe(12)
  })

  test('one slipped blanket shows as the coolest point and as the greatest step between neighbours', () => {
    const points = skylineOf(
      even.map((one) => (one.tag === 'TH-05-09' ? couple(9, 128) : one)),
      NOW,
      15,
    )
    const spread = spreadOf(points)
    expect(spread?.coolest.tag).toBe('TH-05-09')
    expect(spread?.celsius).toBe(24)
    expect(spread?.neighbours).toEqual({ first: 'TH-05-08', second: 'TH-05-09', celsius: 24 })
    expect(worstTwo(points, 150).map(({ tag, offC }) => [tag, offC])).toEqual([
      ['TH-05-09', -22],
      ['TH-05-02', 2],
    ])
  })

  test('one fresh thermocouple makes no spread', () => {
    expect(spreadOf(skylineOf([couple(1, 150), couple(2, null)], NOW, 15))).toBeNull()
    expect(spreadOf([])).toBeNull()
  })
})

describe('rate of the ramp', () => {
  const climb = (rate: number) =>
    Array.from({ length: 7 }, (_, index) => ({
      at: NOW - (30 - index * 5) * MINUTE + MINUTE,
      celsius: 80 + ((index * 5) / 60) * rate,
    }))

  test('is the slope of the last half hour', () => {
    expect(rampRate(climb(10), NOW + MINUTE)).toBeCloseTo(10, 6)
  })

  test('does not follow one wild value', () => {
    const values = climb(10).map((one, index) => (index === 3 ? { ...one, celsius: 400 } : one))
    expect(rampRate(values, NOW + MINUTE)).toBeGreaterThan(5)
    expect(rampRate(values, NOW + MINUTE)).toBeLessThan(15)
  })

  test('is not told from too few values or a short piece of the window', () => {
    expect(rampRate(climb(10).slice(0, 3), NOW + MINUTE)).toBeNull()
    expect(rampRate(climb(10).slice(4), NOW + MINUTE)).toBeNull()
    expect(
      rampRate(
        climb(10).map(({ at }) => ({ at, celsius: null })),
        NOW + MINUTE,
      ),
    ).toBeNull()
    const bunched = [0, 1, 2, 3, 4]
      .map((index) => ({ at: NOW - index * MINUTE, celsius: 80 + index }))
      .reverse()
    expect(rampRate(bunched, NOW)).toBeNull()
  })
})

describe('how far a bake is', () => {
  test('day four of seven, three days and a bit after the start', () => {
    const soak = Date.UTC(2026, 10, 5, 8, 12)
    expect(dayOf(soak, NOW, 168)).toEqual({ day: 4, of: 7 })
    expect(dayOf(soak, soak, 168)).toEqual({ day: 1, of: 7 })
    expect(dayOf(soak, soak + 24 * HOUR, 25)).toEqual({ day: 2, of: 2 })
  })

  test('the soak ends seven times 24 h after it began, also across the change of clocks', () => {
    const before = Date.UTC(2026, 9, 20, 8, 0)
    const end = soakEnd(before, 168, 0)
    expect(end.kind === 'at' && end.at - before).toBe(168 * HOUR)
  })

  test('hours below the band are made up', () => {
    const end = soakEnd(NOW, 168, 5)
    expect(end.kind === 'at' && end.at).toBe(NOW + 173 * HOUR)
    expect(end.because).toContain('5.0 h below the band')
  })

  test('a ramp arrives when the kelvins left are climbed, and no date is given where it does not climb', () => {
    const end = rampEnd(NOW, 100, 150, 10)
    expect(end.kind === 'at' && end.at).toBe(NOW + 5 * HOUR)
    expect(rampEnd(NOW, 100, 150, null).kind).toBe('unknown')
    expect(rampEnd(NOW, null, 150, 10).kind).toBe('unknown')
    expect(rampEnd(NOW, 100, 150, 0.2)).toMatchObject({
      kind: 'unknown',
      because: expect.stringContaining('50 K'),
    })
    expect(rampEnd(NOW, 152, 150, 0)).toMatchObject({ kind: 'at', at: NOW })
  })
})

describe('advice', () => {
  const limits = { toleranceC: 10, spreadC: 20, rateKH: 10, holdPa: 1e-2, abortPa: 0.1 }
  const calm = {
    phase: 'soak' as const,
    points: skylineOf(even, NOW, 15),
    setpointC: 150,
    rateKH: 0,
    pressurePa: 2e-4,
    limits,
    pressureText: (pa: number) => `${pa} Pa`,
  }

  test('is silent when all is well', () => {
    expect(adviceFor(calm)).toEqual([])
  })

  test.each([
    ['pressure above hold', { pressurePa: 2e-2 }, 'hold', 'pressure'],
    ['pressure above abort', { pressurePa: 0.2 }, 'abort', 'pressure'],
    ['rate of the ramp', { phase: 'heating' as const, rateKH: 12.5 }, 'hold', 'rate'],
    ['nobody sees the tube', { points: skylineOf([couple(1, null)], NOW, 15) }, 'hold', 'blind'],
    [
      'one silent thermocouple',
      { points: skylineOf([...even.slice(1), couple(1, null)], NOW, 15) },
      'look',
      'blind',
    ],
    ['setpoint overrun', { setpointC: 138 }, 'hold', 'temperature'],
    ['soak too cool', { setpointC: 165 }, 'look', 'temperature'],
  ])('%s', (_, change, level, kind) => {
    expect(adviceFor({ ...calm, ...change })[0]).toMatchObject({ level, kind })
  })

  test('exactly at a limit is still allowed', () => {
    expect(adviceFor({ ...calm, pressurePa: 1e-2 })).toEqual([])
    expect(adviceFor({ ...calm, phase: 'heating', rateKH: 12 })).toEqual([])
  })

  test('a limit that the site has not set gives no advice', () => {
    const none = { toleranceC: null, spreadC: null, rateKH: null, holdPa: null, abortPa: null }
    expect(adviceFor({ ...calm, pressurePa: 5, limits: none })).toEqual([])
  })

  test('the gravest comes first', () => {
    const points = skylineOf([...even.slice(0, 11), couple(12, 90)], NOW, 15)
    expect(adviceFor({ ...calm, points, pressurePa: 1 }).map(({ level }) => level)).toEqual(['abort', 'hold'])
  })
})

describe('cooling', () => {
  const facts = { ambientC: 18, touchC: 40, tauHours: 4.9 }

  test('goes by the hottest measured point, not the average', () => {
    const points = skylineOf([couple(1, 58), couple(2, 74), couple(3, 55)], NOW, 15)
    const cooling = coolingOf(points, NOW, facts)
    expect(cooling.hottest).toMatchObject({ tag: 'TH-05-02', celsius: 74, ageMinutes: 2 })
    expect(cooling.below).toBe(false)
    // 4.9 h × ln(56 / 22) = 4.58 h from the reading, worked by hand
    expect(((cooling.touchSafeAt ?? 0) - (NOW - 2 * MINUTE)) / HOUR).toBeCloseTo(4.578, 2)
  })

  test('150 to 40 °C takes 8.8 h at a time constant of 4.9 h and 18 °C around (4.9 × ln(132 / 22))', () => {
    const cooling = coolingOf(skylineOf([couple(1, 150, 0)], NOW, 15), NOW, facts)
    expect(((cooling.touchSafeAt ?? 0) - NOW) / HOUR).toBeCloseTo(8.78, 1)
  })

  test('gives no date where nothing is measured or the surroundings are warmer than the limit', () => {
    expect(coolingOf(skylineOf([couple(1, null)], NOW, 15), NOW, facts).hottest).toBeNull()
    const warm = coolingOf(skylineOf([couple(1, 60)], NOW, 15), NOW, { ...facts, ambientC: 41 })
    expect(warm.touchSafeAt).toBeNull()
    expect(warm.below).toBe(false)
  })
})

describe('energy', () => {
  test('a meter that begins again at its end is followed', () => {
    expect(meterEnergy([99_990, 99_998, 4, 12])).toBe(22)
    expect(meterEnergy([999_990, 999_999, 0, 5])).toBe(15)
    expect(meterEnergy([5, null, 9])).toBe(4)
    expect(meterEnergy([5])).toBeNull()
  })

  test('a meter that falls from the middle of its range says nothing', () => {
    expect(meterEnergy([450_000, 450_120, 30, 40])).toBeNull()
  })

  test('1 083 A at 23.4 V for two hours is 50.7 kWh; a gap is left out and said', () => {
    const steady = [0, 5, 10, 15, 20, 25].map((step) => ({ at: step * 24 * MINUTE, volts: 23.4, amps: 1083 }))
    expect(supplyEnergy(steady.slice(0, 2), 130).kWh).toBeCloseTo(50.68, 1)
    const gap = supplyEnergy(steady, 100)
    expect(gap.kWh).toBe(0)
    expect(gap.missingHours).toBeCloseTo(10, 6)
  })

  test('a supply that is off or unknown gives nothing', () => {
    expect(
      supplyEnergy(
        [
          { at: 0, volts: 20, amps: 0 },
          { at: HOUR, volts: null, amps: 100 },
          { at: 2 * HOUR, volts: 20, amps: 0 },
        ],
        180,
      ).kWh,
    ).toBe(0)
  })
})
