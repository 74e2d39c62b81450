import { describe, expect, it } from 'vitest'
import { molecularSpecific } from '#app/physics/conductance.ts'
import { type GaugeRise, type LeakLocation, locateLeak } from '#app/physics/leak-locator.ts'

const SEGMENT = { lengthM: 150, diameterM: 0.6, temperatureK: 293.15, pumps: [{ atM: 75, speedM3S: 0.45 }] }
const CALM = 6e-8
const C = molecularSpecific('N2', 0.6, 293.15)

// Closed form with one pump at 75 m: beyond the leak the rise stays at its value, between pump and leak it climbs.
function riseAt(atM: number, leakM: number, throughput: number): number {
  const side = Math.sign(leakM - 75)
  const reach = Math.max(0, Math.min(side * (atM - 75), side * (leakM - 75)))
  return throughput * (1 / 0.45 + reach / C)
}

function readings(
  leakM: number,
  throughput: number,
  factors = [1, 1, 1],
  places = [0, 75, 150],
): GaugeRise[] {
  return places.map((atM, i) => ({
    atM,
    beforePa: CALM * factors[i]!,
    afterPa: (CALM + riseAt(atM, leakM, throughput)) * factors[i]!,
  }))
}

function located(answer: LeakLocation): Extract<LeakLocation, { kind: 'located' }> {
  if (answer.kind !== 'located') throw new Error(`${answer.reason}: ${answer.message}`)
  return answer
}

function holds(answer: LeakLocation, leakM: number): boolean {
  return located(answer).stretches.some(([from, to]) => from <= leakM && leakM <= to)
}

describe('locateLeak', () => {
  it('finds place and throughput from exact rises', () => {
    for (const leakM of [10, 40, 110, 140]) {
      const answer = located(locateLeak(SEGMENT, readings(leakM, 1e-7)))
      expect(Math.abs(answer.atM - leakM)).toBeLessThan(1)
      expect(answer.throughputPaM3S / 1e-7).toBeCloseTo(1, 2)
      expect(answer.chiSquare).toBeLessThan(1e-3)
      expect(holds(answer, leakM)).toBe(true)
    }
  })

  it('keeps the true place in nine stretches of ten when gauges disagree by their usual error', () => {
    let state = 77
    const uniform = () => {
      state = (state * 16807) % 2147483647
      return state / 2147483647
    }
    const normal = () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform())
    let held = 0
    let answers = 0
    for (let i = 0; i < 200; i++) {
      const leakM = 5 + 140 * uniform()
      const factors = [0, 1, 2].map(() => Math.exp(0.1 * normal()))
      const answer = locateLeak(SEGMENT, readings(leakM, 2e-7, factors), { repeat: 0.01, scale: 0.1 })
      if (answer.kind === 'refused') continue
      answers++
      if (holds(answer, leakM)) held++
    }
    expect(answers).toBeGreaterThan(150)
    // 90 % aimed at; a share of 200 trials strays by about 2 %, and the approximation is one of large samples.
    expect(held / answers).toBeGreaterThan(0.84)
    expect(held / answers).toBeLessThan(0.97)
  })

  it('looks through segments open to each other, wide and narrow', () => {
    // 150 m of 0.6 m and 100 m of 0.3 m behind it, one pump in the wide one: a leak in the narrow one stands out.
    const sections = [
      { lengthM: 150, diameterM: 0.6 },
      { lengthM: 100, diameterM: 0.3 },
    ]
    const two = { ...SEGMENT, lengthM: 250, sections }
    const narrow = molecularSpecific('N2', 0.3, 293.15)
    const leakM = 200
    const rise = (atM: number) =>
      1e-7 *
      (1 / 0.45 + Math.max(0, Math.min(atM, 150) - 75) / C + Math.max(0, Math.min(atM, leakM) - 150) / narrow)
    const gauges = [0, 75, 150, 180, 250].map((atM) => ({ atM, beforePa: CALM, afterPa: CALM + rise(atM) }))
    const errors = { repeat: 0.01, scale: 0.1 }
    const answer = located(locateLeak(two, gauges, errors))
    expect(Math.abs(answer.atM - leakM)).toBeLessThan(1)
    expect(answer.throughputPaM3S / 1e-7).toBeCloseTo(1, 2)
    expect(holds(answer, leakM)).toBe(true)
    // Taken for one wide tube, the same rises point elsewhere or fit nothing.
    const wrong = locateLeak({ ...two, sections: [{ lengthM: 250, diameterM: 0.6 }] }, gauges, errors)
    expect(wrong.kind === 'refused' || !holds(wrong, leakM)).toBe(true)
    expect(() => locateLeak({ ...two, sections: sections.slice(1) }, gauges)).toThrow('sum of the pieces')
  })

  it('narrows with better gauges', () => {
    const width = (scale: number) => {
      const { stretches } = located(locateLeak(SEGMENT, readings(130, 2e-7), { repeat: 0.01, scale }))
      return stretches.reduce((sum, [from, to]) => sum + to - from, 0)
    }
    expect(width(0.03)).toBeLessThan(width(0.1))
  })

  it('admits when two gauges side by side could mean any place', () => {
    const pumps = [0, 150].map((atM) => ({ atM, speedM3S: 0.45 }))
    const answer = locateLeak({ ...SEGMENT, pumps }, [
      { atM: 74.9, beforePa: CALM, afterPa: 4e-7 },
      { atM: 75.1, beforePa: CALM, afterPa: 4e-7 },
    ])
    expect(answer).toMatchObject({ kind: 'refused', reason: 'anywhere' })
  })

  it('points to the pump when nothing leans to either side, and to nothing from the pump alone', () => {
    const answer = located(
      locateLeak(SEGMENT, readings(75, 2e-7, [1, 1, 1], [60, 75, 90]), { repeat: 0.002, scale: 0.02 }),
    )
    expect(holds(answer, 75)).toBe(true)
    expect(answer.stretches).toHaveLength(1)
    const blind = locateLeak(SEGMENT, [
      { atM: 75, beforePa: CALM, afterPa: 5e-7 },
      { atM: 75, beforePa: CALM, afterPa: 5e-7 },
    ])
    expect(blind).toMatchObject({ kind: 'refused', reason: 'anywhere' })
  })

  it('refuses what it cannot locate, with the reason', () => {
    const reason = (answer: LeakLocation) => (answer.kind === 'refused' ? answer.reason : answer.kind)
    expect(reason(locateLeak(SEGMENT, readings(110, 1e-7).slice(0, 1)))).toBe('too-few-gauges')
    expect(reason(locateLeak(SEGMENT, readings(110, 1e-10)))).toBe('no-rise')
    const impossible = readings(110, 1e-7)
    impossible[1]!.afterPa = CALM * 1.01
    expect(reason(locateLeak(SEGMENT, impossible))).toBe('does-not-fit')
    expect(() => locateLeak({ ...SEGMENT, pumps: [] }, readings(110, 1e-7))).toThrow(/running pumps is 0/)
    expect(() => locateLeak(SEGMENT, [{ atM: 200, beforePa: 1, afterPa: 2 }])).toThrow(
      /gauges\[0\].atM is 200/,
    )
  })
})
