/**
 * Outgassing by the power law in time, and published rates at room temperature with where each comes from. Rates
 * are per geometric area in Pa m/s, at 20 to 23 degrees gas temperature.
 */
import { requirePositive, requireWithin } from './argument-checks.ts'

const HOUR_S = 3600

export interface PowerLaw {
  /** Rate one hour after the start, Pa m/s. */
  readonly oneHourPaMS: number
  /** Exponent: about 1 for clean metal, 0.5 to 0.9 for elastomers (common practice, no source). */
  readonly exponent: number
}

/** Clean unbaked stainless steel, water: 3e-6 Pa m/s after an hour, falling as 1/t (from memory, not verified). */
export const UNBAKED_STEEL: PowerLaw = { oneHourPaMS: 3e-6, exponent: 1 }

/** Fresh fluoroelastomer seal (from memory, not verified). Count the seal's own area, not the tube's. */
export const FRESH_FLUOROELASTOMER: PowerLaw = { oneHourPaMS: 1.52e-4, exponent: 0.8 }

/**
 * Rate at `seconds` after the start, Pa m/s. `leadS` keeps it finite at the start: the law is q1 (1 h/(t + lead))^a.
 */
export function powerLawRate(law: PowerLaw, seconds: number, leadS = 0): number {
  requireWithin('exponent', law.exponent, 0, 10)
  requirePositive('seconds', seconds + leadS)
  requirePositive('oneHourPaMS', law.oneHourPaMS)
  return law.oneHourPaMS * (HOUR_S / (seconds + leadS)) ** law.exponent
}

/** Gas released per area between two times after the start, Pa m. */
export function powerLawReleased(law: PowerLaw, fromS: number, toS: number): number {
  requirePositive('oneHourPaMS', law.oneHourPaMS)
  requireWithin('exponent', law.exponent, 0, 10)
  requirePositive('fromS', fromS)
  requireWithin('toS', toS, fromS, 1e12)
  const { oneHourPaMS, exponent } = law
  if (Math.abs(exponent - 1) < 1e-9) return oneHourPaMS * HOUR_S * Math.log(toS / fromS)
  const power = 1 - exponent
  return (oneHourPaMS * HOUR_S * ((toS / HOUR_S) ** power - (fromS / HOUR_S) ** power)) / power
}

/** How the number was come by: read in public text, or recalled and not verified. */
export type Provenance = 'seen in print' | 'from memory, not verified'

export interface PublishedRate {
  readonly surface: string
  readonly treatment: string
  readonly ratePaMS: number
  readonly source: string
  readonly provenance: Provenance
}

/**
 * Published rates at room temperature. Laboratories differ by a factor of two to five for the same treatment: these
 * place a tube, they do not predict it. A tube's own measured rate always goes before them.
 */
export const PUBLISHED_RATES = {
  'steel-250c-bake': rate('Type 304', '15 to 30 h at 250 °C', 2.7e-9, 'Young 1969'),
  'steel-oxidised': rate('Type 304', 'oxidised in air at 250 and 450 °C', 5.3e-10, 'Young 1969'),
  'steel-450c-vacuum': rate('Type 304', '17 h at 450 °C in vacuum', 5.3e-10, 'Young 1969'),
  'aluminium-250c-bake': rate('Aluminium 1100', '15 h at 250 °C', 5.3e-10, 'Young 1969'),
  'steel-100c-bake': rate('Stainless steel', '20 h at 100 °C', 1.3e-9, 'Moraw and Dobrozemsky 1974'),
  'aluminium-100c-bake': rate('Aluminium', '20 h at 100 °C', 5.3e-11, 'Moraw and Dobrozemsky 1974'),
  'steel-100c-air': rate(
    'Stainless steel',
    '100 °C in air, then vacuum',
    1.3e-10,
    'Moraw and Dobrozemsky 1974',
  ),
  'steel-250c-30h': rate('Type 304', '30 h at 250 °C', 4e-9, 'Elsey 1975'),
  'copper-100c-bake': rate('Copper', '20 h at 100 °C', 1.46e-9, 'Elsey 1975'),
  'oxygen-free-copper-100c': rate('Oxygen-free copper', '24 h at 100 °C', 2.9e-11, 'Elsey 1975'),
  'oxygen-free-copper-250c': rate('Oxygen-free copper', '24 h at 250 °C', 1.81e-12, 'Elsey 1975'),
  'steel-vacuum-furnace': rate(
    'Type 304',
    '2 h at 850 to 900 °C in vacuum',
    2.7e-10,
    "O'Hanlon, appendix C.1",
  ),
  '316l-vacuum-furnace': rate('Type 316L', '2 h at 800 °C in vacuum', 4.6e-10, "O'Hanlon, appendix C.1"),
  '304l-250c-380h': rate('Type 304L, 2.62 mm', '380 h at 250 °C', 2.86e-10, 'Avdiaj and Erjavec 2012'),
  '304l-350c-140h': rate('Type 304L, 2.62 mm', 'then 140 h at 350 °C', 5.7e-11, 'Avdiaj and Erjavec 2012'),
  '316l-gauge-removed': rate('Type 316L', 'hydrogen, gauge effects removed', 4.5e-12, 'RAL-TR-2016-008'),
  '316l-150c-6h': rate(
    'Type 316L, remelted in vacuum',
    '6 h at 150 °C',
    1.3e-10,
    'abstract on baking temperature and air exposure of 316L',
  ),
  'mild-steel-80c': rate(
    'Mild steel',
    '48 h at 80 °C, hydrogen, upper bound',
    1e-11,
    'Scarcia and others 2024',
  ),
  'steel-unbaked-1h': recalled(
    'Clean unbaked stainless steel',
    'water after 1 h',
    3e-6,
    'lecture notes, Chiggiato',
  ),
  'steel-150c-24h': recalled(
    'Unfired 304L or 316LN',
    '24 h at 150 °C, hydrogen',
    3e-9,
    'lecture notes, Chiggiato',
  ),
  'steel-fired-baked': recalled(
    'Vacuum-fired steel',
    '950 °C, then a bake at 150 °C, hydrogen',
    3e-10,
    'lecture notes, Chiggiato',
  ),
  'fluoroelastomer-1h': recalled('Fresh fluoroelastomer', 'after 1 h', 1.52e-4, "O'Hanlon, appendix C"),
} as const satisfies Record<string, PublishedRate>

function rate(surface: string, treatment: string, ratePaMS: number, source: string): PublishedRate {
  return { surface, treatment, ratePaMS, source, provenance: 'seen in print' }
}

function recalled(surface: string, treatment: string, ratePaMS: number, source: string): PublishedRate {
  return { surface, treatment, ratePaMS, source, provenance: 'from memory, not verified' }
}
