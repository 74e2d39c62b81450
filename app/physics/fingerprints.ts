/**
 * What a residual gas spectrum speaks for. Every finding carries the ratios it rests on, so that a reader can disagree;
 * ratios are of ion currents at one mass over charge, all in the same unit.
 */
import { requireWithin } from './argument-checks.ts'

/** Ion current per mass over charge, any one unit; a mass that was not measured is left out. */
export type Spectrum = Readonly<Record<number, number>>

export type GasPattern =
  | 'air-leak'
  | 'carbon-monoxide'
  | 'water'
  | 'baked-metal'
  | 'permeation'
  | 'backing-line'
  | 'methane'
  | 'carbon-dioxide'
  | 'hydrocarbons'

export interface Evidence {
  /** Such as "40 / 28". */
  ratio: string
  found: number
  /** What the pattern wants, in words. */
  wanted: string
  holds: boolean
}

export interface Finding {
  pattern: GasPattern
  /** 'strong': every ratio that could be formed holds, the decisive one among them; 'some': the decisive one only. */
  support: 'strong' | 'some'
  evidence: Evidence[]
}

interface RatioTest {
  over: readonly [number, number]
  low: number
  high: number
  wanted: string
}

interface Rule {
  pattern: GasPattern
  /** The first ratio decides; the others strengthen. */
  tests: readonly RatioTest[]
}

/** Ratios in standard dry air by amount; ion currents differ by the sensitivities, argon by about 1.4. */
export const AIR_RATIOS = {
  nitrogenOverOxygen: 0.78084 / 0.20946,
  argonOverNitrogen: 0.00934 / 0.78084,
} as const

/** Fragment over parent at 70 eV (usual cracking patterns, from memory, not verified). */
export const FRAGMENT_RATIOS = { nitrogen14: 0.07, carbonMonoxide12: 0.045, water17: 0.23 } as const

const NITROGEN_FRAGMENT: RatioTest = {
  over: [14, 28],
  low: 0.05,
  high: 3 * FRAGMENT_RATIOS.nitrogen14,
  wanted: '0.05 or more, usually 0.07 (nitrogen)',
}

const OXYGEN_OVER_NITROGEN = 1 / AIR_RATIOS.nitrogenOverOxygen

// These limits were found in printed guides to residual gas analysis: N2/O2 of air 3.7 with 3.5 to 5 usual in
// ion current, argon about 1 % of 28, 14/28 of nitrogen above 5 %, 12/28 of carbon monoxide above 2 %, oxygen under a
// fifth of nitrogen from a backing line. All others are common practice, no source. Oxygen may be eaten by hot
// filaments and clean steel, so argon decides about air and 32 only strengthens.
const RULES: readonly Rule[] = [
  {
    pattern: 'air-leak',
    tests: [
      {
        over: [40, 28],
        low: 0.42 * AIR_RATIOS.argonOverNitrogen,
        high: 2.5 * AIR_RATIOS.argonOverNitrogen,
        wanted: 'about 0.01 (argon of air)',
      },
      NITROGEN_FRAGMENT,
      {
        over: [32, 28],
        low: 0.63 * OXYGEN_OVER_NITROGEN,
        high: 1.23 * OXYGEN_OVER_NITROGEN,
        wanted: '0.20 to 0.29 (oxygen of air, unless it is eaten)',
      },
    ],
  },
  {
    pattern: 'carbon-monoxide',
    tests: [
      {
        over: [12, 28],
        low: 0.02,
        high: 3 * FRAGMENT_RATIOS.carbonMonoxide12,
        wanted: 'above 0.02, usually 0.045 (carbon)',
      },
      { over: [32, 28], low: 0, high: 0.01, wanted: 'no oxygen' },
      { over: [40, 28], low: 0, high: 0.003, wanted: 'no argon' },
    ],
  },
  {
    pattern: 'water',
    tests: [
      { over: [2, 18], low: 0, high: 0.5, wanted: '18 at least twice 2' },
      {
        over: [17, 18],
        low: FRAGMENT_RATIOS.water17 / 1.3,
        high: FRAGMENT_RATIOS.water17 * 1.3,
        wanted: 'about 0.23 (fragments of water)',
      },
    ],
  },
  {
    pattern: 'baked-metal',
    tests: [
      { over: [28, 2], low: 0, high: 0.33, wanted: '2 at least three times 28' },
      { over: [18, 28], low: 0, high: 0.5, wanted: '28 at least twice 18' },
    ],
  },
  {
    pattern: 'permeation',
    tests: [
      { over: [32, 28], low: 0.5, high: 20, wanted: 'oxygen-rich against air' },
      { over: [4, 28], low: 0.001, high: 10, wanted: 'helium of the air seen' },
      { over: [18, 28], low: 0.5, high: 1e6, wanted: 'water beside it' },
    ],
  },
  {
    pattern: 'backing-line',
    tests: [
      { over: [32, 28], low: 0.01, high: 0.17, wanted: 'oxygen seen, yet poor against air (below 0.17)' },
      NITROGEN_FRAGMENT,
    ],
  },
  {
    pattern: 'methane',
    tests: [
      {
        over: [15, 16],
        low: 0.6,
        high: 1,
        wanted: '0.6 to 1 (methane; water and oxygen give 16 without 15)',
      },
    ],
  },
  {
    pattern: 'carbon-dioxide',
    tests: [
      { over: [44, 28], low: 0.3, high: 1e6, wanted: '44 at least a third of 28' },
      { over: [22, 44], low: 0.005, high: 0.05, wanted: '0.01 to 0.03 (doubly charged)' },
    ],
  },
  {
    pattern: 'hydrocarbons',
    tests: [
      { over: [41, 43], low: 0.3, high: 3, wanted: '41 and 43 of like height' },
      { over: [57, 43], low: 0.1, high: 2, wanted: '57 beside them' },
      { over: [55, 43], low: 0.1, high: 2, wanted: '55 beside them' },
    ],
  },
]

/**
 * Patterns the spectrum speaks for, strong ones first. `noise` is the smallest current that counts as seen: a ratio is
 * formed only where its lower mass is seen, and a missing upper mass then stands at the noise, not at zero.
 */
export function readSpectrum(spectrum: Spectrum, noise: number): Finding[] {
  requireWithin('noise', noise, Number.MIN_VALUE, Number.MAX_VALUE)
  for (const [mass, current] of Object.entries(spectrum)) {
    requireWithin(`current at m/z ${mass}`, current, -Number.MAX_VALUE, Number.MAX_VALUE)
  }
  const findings = RULES.flatMap((rule): Finding[] => {
    const evidence = rule.tests.flatMap((test): Evidence[] => {
      const ratio = ratioOf(spectrum, test.over, noise)
      if (ratio === null) return []
      const wantsSight = test.low > 0
      const holds = ratio.found >= test.low && ratio.found <= test.high && (!wantsSight || ratio.seen)
      return [{ ratio: `${test.over[0]} / ${test.over[1]}`, found: ratio.found, wanted: test.wanted, holds }]
    })
    const decisive = rule.tests[0]!.over
    const first = evidence[0]
    if (!first?.holds || first.ratio !== `${decisive[0]} / ${decisive[1]}`) return []
    const all = evidence.length > 1 && evidence.every((e) => e.holds)
    return [{ pattern: rule.pattern, support: all ? 'strong' : 'some', evidence }]
  })
  return findings.sort((a, b) => Number(b.support === 'strong') - Number(a.support === 'strong'))
}

function ratioOf(
  spectrum: Spectrum,
  [upper, lower]: readonly [number, number],
  noise: number,
): { found: number; seen: boolean } | null {
  const below = spectrum[lower]
  const above = spectrum[upper]
  if (below === undefined || above === undefined || below < 3 * noise) return null
  return { found: Math.max(above, noise) / below, seen: above >= noise }
}
