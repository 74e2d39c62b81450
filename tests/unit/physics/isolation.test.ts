import { describe, expect, it } from 'vitest'
import { analyseIsolation, IsolationDataError } from '#app/physics/isolation.ts'

function noise(seed: number): () => number {
  let state = seed
  const uniform = () => {
    state = (state * 16807) % 2147483647
    return state / 2147483647
  }
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform())
}

function rise(options: { rate: number; bend?: number; tau?: number; hours?: number; seed?: number }) {
  const { rate, bend = 0, tau = 1800, hours = 6, seed = 3 } = options
  const normal = noise(seed)
  const seconds = Array.from({ length: 120 }, (_, i) => (i * hours * 3600) / 119)
  const pa = seconds.map(
    (t) => (1e-6 + rate * t + bend * (1 - Math.exp(-t / tau))) * Math.exp(0.01 * normal()),
  )
  return { seconds, pa, volumeM3: 42 }
}

describe('analyseIsolation', () => {
  it('turns a slope into a throughput', () => {
    // Arithmetic: 1e-6 Pa m3/s into 2400 m3 is 1e-6 * 86400 / 2400 = 3.6e-5 Pa a day.
    const seconds = Array.from({ length: 25 }, (_, i) => i * 3600)
    const pa = seconds.map((t) => 2e-7 + (3.6e-5 * t) / 86400)
    const result = analyseIsolation({ seconds, pa, volumeM3: 2400 })
    expect(result.throughputPaM3S / 1e-6).toBeCloseTo(1, 6)
    expect(result.kind).toBe('steady')
  })

  it('finds a straight rise with limits that hold it', () => {
    let held = 0
    for (let seed = 1; seed <= 40; seed++) {
      const result = analyseIsolation(rise({ rate: 4e-10, seed }))
      const [low, high] = result.throughput95PaM3S
      if (low < 42 * 4e-10 && high > 42 * 4e-10) held++
    }
    // 95 % limits: 34 or fewer of 40 happens about once in 70 draws (binomial law); the seeds are fixed.
    expect(held).toBeGreaterThanOrEqual(35)
  })

  it('tells the bend of the walls from the line of a leak', () => {
    const walls = analyseIsolation(rise({ rate: 0, bend: 2e-5 }))
    expect(walls.kind).toBe('saturating')
    expect(walls.bend!.tauS / 1800).toBeCloseTo(1, 1)
    expect(walls.bend!.risePa / 2e-5).toBeCloseTo(1, 1)
    const both = analyseIsolation(rise({ rate: 1e-9, bend: 2e-5 }))
    expect(both.kind).toBe('both')
    expect(Math.abs(both.ratePaS / 1e-9 - 1)).toBeLessThan(0.15)
    expect(both.firstThroughputPaM3S).toBeGreaterThan(5 * both.throughputPaM3S)
  })

  it('claims nothing from a test shorter than three time constants', () => {
    const result = analyseIsolation(rise({ rate: 0, bend: 2e-5, tau: 4 * 3600 }))
    expect(result.kind).toBe('too-short')
  })

  it('adds the doubt about the volume', () => {
    const exact = analyseIsolation(rise({ rate: 4e-10 }))
    const rough = analyseIsolation({ ...rise({ rate: 4e-10 }), volumeRelativeSe: 0.1 })
    expect(rough.throughputPaM3S).toBe(exact.throughputPaM3S)
    expect(rough.throughputSePaM3S).toBeGreaterThan(0.1 * rough.throughputPaM3S)
  })

  it('takes the warming of the tube out of the rise', () => {
    const { seconds } = rise({ rate: 0 })
    const kelvin = seconds.map((t) => 293 + t / 3600)
    const pa = kelvin.map((k) => (1e-6 * k) / 293)
    const seen = analyseIsolation({ seconds, pa, volumeM3: 42 })
    const mended = analyseIsolation({ seconds, pa, volumeM3: 42, kelvin })
    expect(seen.kind).toBe('steady')
    expect(Math.abs(mended.ratePaS)).toBeLessThan(1e-6 * Math.abs(seen.ratePaS))
  })

  it('refuses a series in which a valve was opened again', () => {
    const series = rise({ rate: 4e-10 })
    const pa = series.pa.map((p, i) => (i >= 80 ? 1e-6 : p))
    try {
      analyseIsolation({ ...series, pa })
      expect.unreachable()
    } catch (error) {
      expect(error).toBeInstanceOf(IsolationDataError)
      const found = error as IsolationDataError
      expect(found.reason).toBe('valve-reopened')
      expect(Math.abs(found.atSeconds! - series.seconds[80]!)).toBeLessThan(400)
      expect(found.message).toMatch(/End the series/)
    }
  })

  it('does not take the scatter of a quiet volume for a valve, nor for a rise', () => {
    const kinds = Array.from(
      { length: 100 },
      (_, i) => analyseIsolation(rise({ rate: 0, seed: 101 + i })).kind,
    )
    // Limits at 95 %, one side of them a rise: about 2.5 of 100 expected, and one bend by chance.
    expect(kinds.filter((k) => k === 'no-rise').length).toBeGreaterThanOrEqual(92)
    const straight = Array.from({ length: 100 }, (_, i) =>
      analyseIsolation(rise({ rate: 4e-10, seed: 301 + i })),
    )
    expect(straight.filter((r) => r.bend !== null).length).toBeLessThanOrEqual(4)
  })

  it('says what it cannot use', () => {
    expect(() => analyseIsolation({ seconds: [0, 1], pa: [1, 2], volumeM3: 1 })).toThrow(/2 readings/)
    const seconds = [0, 1, 2, 3, 4, 5, 6, 6]
    expect(() => analyseIsolation({ seconds, pa: seconds.map(() => 1e-6), volumeM3: 1 })).toThrow(
      /seconds\[7\] is 6; expected a later time/,
    )
    expect(() => analyseIsolation({ seconds, pa: [1], volumeM3: 1 })).toThrow(/as many values/)
    expect(() => analyseIsolation({ ...rise({ rate: 1 }), volumeM3: 0 })).toThrow(/volumeM3 is 0/)
  })
})
