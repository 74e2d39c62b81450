import { describe, expect, test } from 'vitest'
import { axisValues, drawnReadings, type StripSegment, segmentWords } from '#app/components/charts/strip.ts'

function segment(facts: Partial<StripSegment>): StripSegment {
  return {
    tag: 'SG-01',
    lineCode: 'main',
    startM: 0,
    endM: 149,
    state: 'in-service',
    targetPa: 2e-7,
    gauges: [],
    pumps: [],
    predicted: null,
    permits: [],
    ...facts,
  }
}

function gauge(tag: string, value: number | null, facts: { kind?: string; fresh?: boolean } = {}) {
  return { tag, kind: 'hot-cathode', chainageM: 30, value, fresh: true, ...facts }
}

describe('readings on the pressure axis', () => {
  test('leave out gauges that are silent, stand at their floor, or read nothing', () => {
    const gauges = [
      gauge('HC-01A', 6e-8),
      gauge('HC-01B', null),
      gauge('CC-01', 0),
      gauge('TC-01', 1e-2, { kind: 'thermal-conductivity' }),
    ]
    expect(drawnReadings(segment({ gauges })).map(({ tag }) => tag)).toEqual(['HC-01A'])
  })

  test('of a vented segment are none, so that the axis is not stretched to atmosphere', () => {
    const vented = segment({
      state: 'vented',
      gauges: [gauge('HC-14A', 1e5)],
      predicted: [{ offsetM: 0, pa: 1e5 }],
    })
    expect(drawnReadings(vented)).toEqual([])
    expect(axisValues([vented])).toEqual([2e-7])
  })
})

describe('a segment in words', () => {
  const high = segment({ tag: 'SG-16', gauges: [gauge('HC-16A', 3.4e-7)] })
  const silent = segment({ tag: 'SG-15', gauges: [gauge('HC-15A', 3.9e-8, { fresh: false })] })

  test('says of an old reading that it is old', () => {
    expect(segmentWords(silent, 'Pa')).toBe(
      'SG-15; In service; HC-15A 3.9 times ten to the minus 8 pascal, old',
    )
  })

  test('names the pumps at work', () => {
    const pumps = [{ tag: 'NP-15', kind: 'getter-ion', chainageM: 2300 }] as const
    expect(segmentWords({ ...silent, pumps }, 'Pa')).toMatch(/, old; pumped by NP-15, getter and ion pump$/)
  })

  test('names the permits at the site, with how they stand', () => {
    const permits = [{ number: 'HSP-2026-031', state: 'suspended' }] as const
    expect(segmentWords({ ...silent, permits }, 'Pa')).toMatch(/; permit HSP-2026-031, suspended$/)
    expect(segmentWords({ ...silent, permits: null }, 'Pa')).not.toContain('permit')
  })

  test('holds the target against segments in service alone', () => {
    expect(segmentWords(high, 'Pa')).toContain('over target')
    expect(segmentWords({ ...high, state: 'pumping' }, 'Pa')).not.toContain('over target')
  })
})
