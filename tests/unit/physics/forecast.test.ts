import { describe, expect, it } from 'vitest'
import { type Forecast, forecastTimeToTarget } from '#app/physics/forecast.ts'
import type { Censoring } from '#app/physics/trend.ts'
import { forecastCoverage } from '../../soak/forecast-coverage.ts'

// A tube on a plain 1/t line: all times of crossing below follow by hand from p t = constant.
const LEVEL = 2.4e-5 * 66

function noise(seed: number): () => number {
  let state = seed
  const uniform = () => {
    state = (state * 16807) % 2147483647
    return state / 2147483647
  }
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform())
}

function pumpDown(
  endHours: number,
  options: { floorPa?: number; swing?: number; seed?: number; from?: number } = {},
): { hours: number[]; pa: number[] } {
  const { floorPa = 0, swing = 0.02, seed = 7, from = 0.1 } = options
  const normal = noise(seed)
  const hours: number[] = []
  const pa: number[] = []
  for (let t = from; t <= endHours; t += 0.1) {
    hours.push(t)
    pa.push((LEVEL / t + floorPa) * Math.exp(0.02 * normal() + swing * Math.sin((2 * Math.PI * t) / 24)))
  }
  return { hours, pa }
}

function forecastOf(answer: Forecast): Extract<Forecast, { kind: 'forecast' }> {
  if (answer.kind !== 'forecast') throw new Error(`refused: ${answer.message}`)
  return answer
}

function refusalOf(answer: Forecast): Extract<Forecast, { kind: 'refused' }> {
  if (answer.kind !== 'refused') throw new Error(`forecast for hour ${answer.hours}`)
  return answer
}

describe('forecastTimeToTarget on a falling line', () => {
  it('answers with the hour of crossing and a range of a few hours about it', () => {
    for (const seed of [7, 8, 9]) {
      const answer = forecastOf(forecastTimeToTarget(pumpDown(66, { seed }), { targetPa: 1e-5 }))
      const truth = LEVEL / 1e-5
      expect(Math.abs(answer.hours - truth)).toBeLessThan(4)
      expect(answer.low).toBeLessThan(truth)
      expect(answer.high).toBeGreaterThan(truth)
      const half = (answer.high - answer.low) / 2
      expect(half).toBeGreaterThan(1)
      expect(half).toBeLessThan(15)
      expect(answer.alpha).toBeCloseTo(1, 1)
      expect(answer.floorPa).toBeNull()
      expect(answer.floorUpperPa).toBeLessThan(1e-5)
      expect(answer.windowHours[1]).toBeCloseTo(66, 0)
    }
  })

  it('is less sure the further it looks and the less it has seen', () => {
    const half = (end: number, targetPa: number): number => {
      const answer = forecastOf(forecastTimeToTarget(pumpDown(end), { targetPa }))
      return (answer.high - answer.low) / 2
    }
    expect(half(66, 8e-6)).toBeGreaterThan(half(66, 1e-5))
    expect(half(40, 1e-5)).toBeGreaterThan(half(120, 1e-5))
  })

  it('widens for a target close above a floor that the readings show', () => {
    const series = pumpDown(400, { floorPa: 3e-6 })
    const answer = forecastOf(forecastTimeToTarget(series, { targetPa: 5e-6 }))
    const truth = LEVEL / 2e-6
    expect(answer.low).toBeLessThan(truth)
    expect(answer.high).toBeGreaterThan(truth)
    expect(answer.floorPa).toBeGreaterThan(2e-6)
    expect(answer.floorPa).toBeLessThan(4e-6)
  })

  it('moves with the unit of pressure only by that unit', () => {
    const series = pumpDown(66)
    const one = forecastOf(forecastTimeToTarget(series, { targetPa: 1e-5 }))
    const scaled = { hours: series.hours, pa: series.pa.map((p) => p * 100) }
    const other = forecastOf(forecastTimeToTarget(scaled, { targetPa: 1e-3 }))
    expect(other.hours / one.hours).toBeCloseTo(1, 4)
    expect(other.high / one.high).toBeCloseTo(1, 3)
  })

  it('uses readings under the range as bounds', () => {
    const series = pumpDown(66)
    const limit = 3e-5
    const censored = series.pa.map((p): Censoring => (p < limit ? 'below' : null))
    const read = series.pa.map((p) => Math.max(p, limit))
    const answer = forecastOf(
      forecastTimeToTarget({ hours: series.hours, pa: read, censored }, { targetPa: 1e-5 }),
    )
    expect(answer.low).toBeLessThan(158.4)
    expect(answer.high).toBeGreaterThan(158.4)
  })

  it('is not moved by spikes of a filament', () => {
    const series = pumpDown(66)
    const spiked = { hours: series.hours, pa: series.pa.map((p, i) => (i % 97 === 0 ? 50 * p : p)) }
    const clean = forecastOf(forecastTimeToTarget(series, { targetPa: 1e-5 }))
    const answer = forecastOf(forecastTimeToTarget(spiked, { targetPa: 1e-5 }))
    expect(Math.abs(answer.hours - clean.hours)).toBeLessThan(2)
  })

  it('names the hour of the readings where the target is already met', () => {
    const answer = forecastOf(forecastTimeToTarget(pumpDown(200), { targetPa: 1e-5 }))
    expect(Math.abs(answer.hours - 158.4)).toBeLessThan(8)
    expect(answer.low).toBe(answer.hours)
  })
})

describe('forecastTimeToTarget refuses', () => {
  it('too few hours, and says when to ask again', () => {
    const answer = refusalOf(forecastTimeToTarget(pumpDown(6), { targetPa: 1e-5 }))
    expect(answer.reason).toBe('too-few-hours')
    expect(answer.message).toMatch(/5\.0 h of good readings; at least 12 h/)
    expect(answer.tryAgainHours).toBe(13)
    expect(refusalOf(forecastTimeToTarget({ hours: [], pa: [] }, { targetPa: 1 })).reason).toBe(
      'too-few-hours',
    )
  })

  it('a pump change two hours ago, and uses only what follows an older one', () => {
    const series = pumpDown(66)
    const answer = refusalOf(forecastTimeToTarget(series, { targetPa: 1e-5, windowStartHours: 64 }))
    expect(answer.reason).toBe('pump-change')
    expect(answer.tryAgainHours).toBe(76)
    // Half the speed before hour 20: the readings from then on must not feel it.
    const changed = { hours: series.hours, pa: series.pa.map((p, i) => (series.hours[i]! < 20 ? 2 * p : p)) }
    const after = forecastOf(forecastTimeToTarget(changed, { targetPa: 1e-5, windowStartHours: 20 }))
    expect(after.windowHours[0]).toBe(20)
    expect(after.low).toBeLessThan(158.4)
    expect(after.high).toBeGreaterThan(158.4)
  })

  it('a jump that nobody reported, until enough hours follow it', () => {
    const doubled = (at: number) => {
      const series = pumpDown(66)
      return { hours: series.hours, pa: series.pa.map((p, i) => (series.hours[i]! >= at ? p / 2 : p)) }
    }
    const early = refusalOf(forecastTimeToTarget(doubled(62), { targetPa: 5e-6 }))
    expect(early.reason).toBe('pump-change')
    expect(early.tryAgainHours).toBeGreaterThan(73)
    expect(early.tryAgainHours).toBeLessThan(77)
    const later = forecastOf(forecastTimeToTarget(doubled(35), { targetPa: 5e-6 }))
    expect(later.windowHours[0]).toBeGreaterThan(34)
    expect(later.windowHours[0]).toBeLessThan(38)
    expect(later.low).toBeLessThan(158.4)
    expect(later.high).toBeGreaterThan(158.4)
  })

  it('a handful of readings', () => {
    const hours = [2, 10, 20, 30, 40]
    const answer = forecastTimeToTarget({ hours, pa: hours.map((t) => 1e-4 / t) }, { targetPa: 1e-6 })
    expect(refusalOf(answer).reason).toBe('too-few-points')
    const censored = pumpDown(66).pa.map((): Censoring => 'below')
    expect(refusalOf(forecastTimeToTarget({ ...pumpDown(66), censored }, { targetPa: 1e-5 })).reason).toBe(
      'too-few-points',
    )
  })

  it('a pressure that stands or rises', () => {
    const series = pumpDown(66)
    const flat = { hours: series.hours, pa: series.hours.map((t, i) => 2e-5 * (1 + 0.02 * Math.sin(i + t))) }
    expect(refusalOf(forecastTimeToTarget(flat, { targetPa: 1e-5 })).reason).toBe('not-falling')
    const rising = { hours: series.hours, pa: series.hours.map((t) => 2e-6 * t ** 0.2) }
    expect(refusalOf(forecastTimeToTarget(rising, { targetPa: 1e-7 })).reason).toBe('not-falling')
  })

  it('a target below a floor that the readings show', () => {
    const answer = refusalOf(forecastTimeToTarget(pumpDown(400, { floorPa: 8e-6 }), { targetPa: 4e-6 }))
    expect(answer.reason).toBe('never-on-this-trend')
    expect(answer.message).toMatch(/floor near [78]\.\de-6 Pa/)
    expect(answer.tryAgainHours).toBeNull()
  })

  it('a target that only more hours can decide, with the hour to try again', () => {
    const answer = refusalOf(forecastTimeToTarget(pumpDown(24), { targetPa: 1e-7 }))
    expect(answer.reason).toBe('cannot-tell-yet')
    expect(answer.tryAgainHours).toBeGreaterThan(24)
  })

  it('a target that is no pressure, with an error', () => {
    expect(() => forecastTimeToTarget(pumpDown(66), { targetPa: 0 })).toThrow(/targetPa is 0; expected/)
    const bad = { hours: [1, 2], pa: [1e-5, Number.NaN] }
    expect(() => forecastTimeToTarget(bad, { targetPa: 1e-6 })).toThrow(/series.pa\[1\] is NaN/)
  })
})

describe('the range', () => {
  // Fifty fixed trials, of which 40 hold at present; the soak run counts 500. Another fifty may lie between 70 and 90 %
  // by chance alone (binomial law), so a change of the method that leaves these limits is to be judged by the soak run.
  it('holds in about four trials of five on tubes that are not the model', () => {
    const coverage = forecastCoverage(50, 42)
    expect(coverage.forecasts).toBeGreaterThanOrEqual(45)
    const share = coverage.inside / coverage.forecasts
    expect(share).toBeGreaterThanOrEqual(0.75)
    expect(share).toBeLessThanOrEqual(0.85)
    expect(coverage.medianHalfWidth).toBeLessThan(0.4)
  }, 20_000)
})
