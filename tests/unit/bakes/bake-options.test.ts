/** Bake options: limits of the hardware, soaks confirmed by full solutions, and questions without an answer. */
import { describe, expect, test } from 'vitest'
import { heatedTube } from '../../../app/domain/bake-load.ts'
import { bakeOptions } from '../../../app/domain/bake-options.ts'
import type { OptionQuestion, OptionSegment } from '../../../app/domain/bake-options-question.ts'
import { fullOutcome, MOST_SOLVES } from '../../../app/domain/bake-options-solve.ts'
import { hydrogenDiffusivity } from '../../../app/physics/hydrogen.ts'
import { holdingSite, unbakedSegment } from '../../fixtures/bake-option-grounds.ts'

function question(change: Partial<OptionQuestion> = {}): OptionQuestion {
  return {
    segments: [unbakedSegment()],
    site: holdingSite(),
    targetPa: 2e-7,
    coolestC: 60,
    hottestC: 200,
    ...change,
  }
}

describe('options of one segment', () => {
  const counts = new Map<number, number>()
  const answer = bakeOptions(question(), (segment, path, hours) => {
    counts.set(path.celsius, (counts.get(path.celsius) ?? 0) + 1)
    return fullOutcome(segment, path, hours)
  })

  test('every row is confirmed by at least one and at most five full solutions', () => {
    expect(answer.refusal).toBeNull()
    expect(answer.rows.length).toBeGreaterThan(3)
    for (const { celsius, solves } of answer.rows) {
      expect(solves).toBeGreaterThanOrEqual(1)
      expect(counts.get(celsius)).toBe(solves)
    }
    for (const count of counts.values()) expect(count).toBeLessThanOrEqual(MOST_SOLVES)
  })

  test('a full solution made afresh meets the target at the soak that is shown, and not at a much shorter one', () => {
    const [segment] = question().segments
    if (segment === undefined) throw new Error('no segment')
    const site = holdingSite()
    const solved = {
      model: segment.hot,
      afterPumps: segment.afterPumps,
      atM: segment.gauge.offsetM,
      coldHours: segment.coldHours,
      tube: heatedTube(segment.baked, site.ambientC),
    }
    let shorter = 0
    for (const { celsius, soakHours } of answer.rows) {
      const at = (hours: number) => fullOutcome(solved, { ...site, celsius }, hours).n2EquivalentPa
      expect(at(soakHours)).toBeLessThanOrEqual(2e-7)
      const much = 0.9 * soakHours - 2
      if (much <= 0) continue
      expect(at(much)).toBeGreaterThan(2e-7)
      shorter += 1
    }
    expect(shorter).toBeGreaterThan(4)
  })

  test('a soak that is sure to do is longer, and its upper edge is at the target', () => {
    const sure = answer.rows.map(({ sureSoakHours, soakHours }) => (sureSoakHours ?? Infinity) / soakHours)
    expect(Math.min(...sure)).toBeGreaterThan(1.5)
    expect(answer.rows.some(({ sureSoakHours }) => sureSoakHours !== null)).toBe(true)
  })

  test('every temperature of the grid is either a row or left out for a reason', () => {
    const all = [...answer.rows, ...answer.left].map(({ celsius }) => celsius).sort((a, b) => a - b)
    expect(all).toEqual(Array.from({ length: 29 }, (_, i) => 60 + 5 * i))
  })

  test('hotter rows are shorter or cheaper, and none beats another', () => {
    for (const one of answer.rows) {
      for (const other of answer.rows) {
        if (one.celsius <= other.celsius) continue
        expect(one.totalHours < other.totalHours || one.energyKWh < other.energyKWh).toBe(true)
      }
    }
  })

  test('what is left out as beaten is beaten by a row that is shown, in the figures shown', () => {
    const beaten = answer.left.filter(({ reason }) => reason === 'beaten')
    expect(beaten.length).toBeGreaterThan(2)
    for (const { celsius, words } of beaten) {
      const by = answer.rows.find((row) => words.startsWith(`${row.celsius} °C gets there`))
      expect(by?.celsius).toBeLessThan(celsius)
      const [, hours = '0', kWh = '0'] = /would take (\d+) h and (\d+) kWh/.exec(words) ?? []
      expect(by?.totalHours).toBeLessThanOrEqual(Number(hours) + 0.5)
      expect(by?.energyKWh).toBeLessThanOrEqual(Number(kWh) + 0.5)
    }
  })

  test('above 150 °C the metal gate valve binds, by its own name', () => {
    const over = answer.left.filter(({ celsius }) => celsius > 150)
    expect(over).toHaveLength(10)
    for (const { reason } of over) expect(reason).toBe('part')
    expect(over[0]?.words).toMatch(
      /GV-10 \(gate valve, metal seat\) would come to 155 °C; 150 °C is the limit/,
    )
  })

  test('the row at 150 °C carries the figures of the power table', () => {
    const at150 = bakeOptions(question({ coolestC: 150, hottestC: 150 })).rows[0]
    // 21.6 + 6 kW held, 29.4 + 6 at the end of the ramp; 1067 A and 27.6 V; 34 mm a joint (site's own table).
    expect(at150?.soakKW).toBeCloseTo(27.6, 0)
    expect(Math.abs((at150?.peakKW ?? 0) / 35.4 - 1)).toBeLessThan(0.01)
    expect(Math.abs((at150?.supply.amps ?? 0) / 1067 - 1)).toBeLessThan(0.01)
    expect(Math.abs((at150?.supply.volts ?? 0) / 27.6 - 1)).toBeLessThan(0.01)
    expect(Math.abs((at150?.strokes[0]?.mm ?? 0) / 34 - 1)).toBeLessThan(0.03)
    expect(at150?.rampHours).toBeCloseTo(13.2, 6)
  })

  test('bands hold the value, are named, and widen where the register only assumes', () => {
    const measured = bakeOptions(question({ coolestC: 150, hottestC: 150 })).rows[0]?.outcomes[0]
    const assumed = bakeOptions(
      question({ coolestC: 150, hottestC: 150, segments: [{ ...unbakedSegment(), hydrogenAssumed: true }] }),
    ).rows[0]?.outcomes[0]
    if (measured === undefined || assumed === undefined) throw new Error('no row at 150 °C')
    for (const { hydrogenPa, bands } of [measured, assumed]) {
      expect(bands.hydrogen.lowPa).toBeLessThan(hydrogenPa)
      expect(bands.hydrogen.highPa).toBeGreaterThan(hydrogenPa)
      expect(bands.doubts.some(({ words }) => words.includes('diffusion'))).toBe(true)
    }
    const width = ({ bands: { hydrogen } }: typeof measured) => hydrogen.highPa / hydrogen.lowPa
    expect(width(assumed)).toBeGreaterThan(2 * width(measured))
  })

  test('water at 80 °C is uncertain by more than the wall being ten kelvins off', () => {
    const row = bakeOptions(question({ coolestC: 80, hottestC: 80, targetPa: 1e-6 })).rows[0]
    const bands = row?.outcomes[0]?.bands
    const off = bands?.doubts.find(({ gas, words }) => gas === 'water' && words.includes('10 K'))
    // Twice as much for about every 8 K cooler.
    expect(off?.up).toBeGreaterThan(1.8)
    expect(off?.up).toBeLessThan(4)
    expect((bands?.water.highPa ?? 0) / (row?.outcomes[0]?.waterPa ?? 1)).toBeGreaterThan(off?.up ?? 99)
  })
})

describe('full solutions that disagree', () => {
  test('never meeting the target, they end the row after at most five, and the next temperature is tried', () => {
    const counts = new Map<number, number>()
    const answer = bakeOptions(question({ coolestC: 100, hottestC: 110 }), (segment, path, hours) => {
      counts.set(path.celsius, (counts.get(path.celsius) ?? 0) + 1)
      const outcome = fullOutcome(segment, path, hours)
      return path.celsius < 110 ? { ...outcome, n2EquivalentPa: 2.1e-7 } : outcome
    })
    expect(answer.rows.map(({ celsius }) => celsius)).toEqual([110])
    expect(answer.left.map(({ reason }) => reason)).toEqual(['unconfirmed', 'unconfirmed'])
    for (const count of counts.values()) expect(count).toBeLessThanOrEqual(MOST_SOLVES)
  })

  test('reading a quarter more than the closed forms, they lengthen the soak', () => {
    const at = { coolestC: 80, hottestC: 80 }
    const plain = bakeOptions(question(at)).rows[0]
    const more = bakeOptions(question(at), (segment, path, hours) => {
      const outcome = fullOutcome(segment, path, hours)
      return { ...outcome, n2EquivalentPa: 1.25 * outcome.n2EquivalentPa }
    }).rows[0]
    expect(more?.soakHours).toBeGreaterThan(1.2 * (plain?.soakHours ?? Infinity))
    expect(more?.outcomes[0]?.n2EquivalentPa).toBeLessThanOrEqual(2e-7)
    expect(more?.solves).toBeGreaterThan(1)
  })
})

describe('what binds', () => {
  test('an elastomer bonnet is judged by its own temperature, not by the tube', () => {
    const bonnet = {
      tag: 'GV-12',
      words: 'gate valve, elastomer bonnet',
      limitC: 120,
      riseShare: 0.7,
      removable: false,
      provenance: 'register',
    }
    const segment: OptionSegment = { ...unbakedSegment(), parts: [bonnet] }
    const { rows, left } = bakeOptions(
      question({ segments: [segment], coolestC: 150, hottestC: 170, targetPa: 1e-6 }),
    )
    // 18 + 0.7 × (160 − 18) = 117.4 °C stands; at 165 °C it would be 120.9.
    expect(
      [...rows, ...left]
        .filter(({ celsius }) => celsius <= 160)
        .some((one) => 'reason' in one && one.reason === 'part'),
    ).toBe(false)
    const words = left.find(({ celsius }) => celsius === 165)?.words ?? ''
    expect(words).toContain('GV-12')
    expect(words).toContain('121 °C')
    expect(words).toContain('163 °C at most')
  })

  test('a pair that would need more volts than any set gives names the voltage', () => {
    const site = { ...holdingSite(), supplies: [{ tag: 'HX-9', maxAmps: 1500, maxVolts: 50 }] }
    const pair = [unbakedSegment('T-1'), unbakedSegment('T-2')]
    const { left } = bakeOptions(question({ segments: pair, site, coolestC: 150, hottestC: 150 }))
    expect(left[0]?.reason).toBe('voltage')
    expect(left[0]?.words).toMatch(/HX-9 .* 5[45]\.\d V; 50 V is the limit.*slower ramp/)
  })

  test('a ramp end above the cap by day is for the night, above both caps for nobody', () => {
    const caps = (dayKW: number, nightKW: number) => ({
      ...holdingSite(),
      caps: { dayKW, nightKW, baseKW: 18 },
    })
    const night = bakeOptions(question({ site: caps(50, 60), coolestC: 150, hottestC: 150 }))
    expect(night.rows[0]?.cautions.join(' ')).toContain('only by night')
    const never = bakeOptions(question({ site: caps(40, 52), coolestC: 130, hottestC: 150 }))
    // 35.4 kW and 18 of base load are more than 52; 130 °C takes less and stays.
    expect(never.rows.some(({ celsius }) => celsius === 130)).toBe(true)
    const over = never.left.find(({ celsius }) => celsius === 150)
    expect(over?.reason).toBe('power')
    expect(over?.words).toContain('52 kW is the limit')
  })

  test('the segment of a pair that needs more sets the soak for both', () => {
    const old = unbakedSegment('T-2')
    const clean: OptionSegment = {
      ...old,
      hot: {
        ...old.hot,
        hydrogen: { kind: 'diffusion', c0PerM3: 1e23, agedTauM2: 3.156e8 * hydrogenDiffusivity(293.15) },
      },
    }
    const at = { coolestC: 130, hottestC: 130 }
    const alone = bakeOptions(question({ ...at, segments: [unbakedSegment('T-1')] })).rows[0]
    const pair = bakeOptions(question({ ...at, segments: [clean, unbakedSegment('T-1')] })).rows[0]
    expect(pair?.soakHours).toBe(alone?.soakHours)
    expect(pair?.outcomes.map(({ tag }) => tag)).toEqual(['T-2', 'T-1'])
    expect(pair?.outcomes[0]?.n2EquivalentPa).toBeLessThan(0.5 * (pair?.outcomes[1]?.n2EquivalentPa ?? 0))
    expect(pair?.solves).toBeLessThanOrEqual(MOST_SOLVES)
  })
})

describe('questions without an answer', () => {
  test.each<[string, Partial<OptionQuestion>, RegExp]>([
    [
      'a target below the floor',
      { targetPa: 5e-12 },
      /5\.0 × 10⁻¹² Pa lies at or below the floor of 9\.3 × 10⁻¹² Pa/,
    ],
    ['no target', { targetPa: Number.NaN }, /Found a target of NaN Pa; a pressure above zero/],
    ['no segment', { segments: [] }, /Found 0 segments/],
    ['no supply', { site: { ...holdingSite(), supplies: [] } }, /no supply set.*Enter one/],
    [
      'a cap that the base load eats',
      { site: { ...holdingSite(), caps: { dayKW: 20, nightKW: 22, baseKW: 18 } } },
      /leaves 4\.0 kW; even 60 °C takes \d+\.\d kW.*would lift it/,
    ],
    ['a bake colder than the room', { coolestC: 10 }, /warmer than the surroundings \(18 °C\)/],
  ])('%s', (_, change, words) => {
    const answer = bakeOptions(question(change))
    expect(answer.rows).toEqual([])
    expect(answer.refusal).toMatch(words)
  })

  test('a pair of two diameters, with the figures', () => {
    const wide = unbakedSegment('T-60')
    const answer = bakeOptions(
      question({
        segments: [
          unbakedSegment('T-50'),
          { ...wide, baked: { ...wide.baked, innerDiameterM: 0.6, resistance20Ohm: 0.019 } },
        ],
      }),
    )
    expect(answer.refusal).toMatch(/0\.50 m.*0\.60 m.*cannot be heated in series/)
  })

  test('a leak above the target, and the leak that would do', () => {
    const one = unbakedSegment()
    const leaky = { ...one, hot: { ...one.hot, airLeaks: [{ atM: 75, qPaM3S: 4e-7 }] } }
    // 4e-7 Pa m3/s over 0.4 m3/s at the cross is 1e-6 Pa; the target allows a fifth of it.
    const answer = bakeOptions(question({ segments: [{ ...leaky, gauge: { tag: 'HC-B', offsetM: 75 } }] }))
    expect(answer.refusal).toMatch(/4\.0 × 10⁻⁷ Pa·m³\/s holds HC-B at 1\.0 × 10⁻⁶ Pa/)
    expect(answer.refusal).toContain('below 8.0 × 10⁻⁸ Pa·m³/s')
  })

  test('fired steel whose hydrogen alone is above the target', () => {
    const one = unbakedSegment()
    const fired: OptionSegment = {
      ...one,
      hot: { ...one.hot, hydrogen: { kind: 'low-hydrogen', qPaMS: 1e-8, atK: 293.15 } },
    }
    expect(bakeOptions(question({ segments: [fired] })).refusal).toMatch(
      /fired steel .* times the pumping speed/,
    )
  })

  test('steel so full that no temperature gets there says so for both ends of the range', () => {
    const one = unbakedSegment()
    const full: OptionSegment = {
      ...one,
      hot: { ...one.hot, hydrogen: { kind: 'diffusion', c0PerM3: 5e26, agedTauM2: 1e-9 } },
    }
    const answer = bakeOptions(question({ segments: [full], hottestC: 90 }))
    expect(answer.rows).toEqual([])
    expect(answer.refusal).toMatch(/At 60 °C a year of soak would not.*At 90 °C a year/)
  })
})
