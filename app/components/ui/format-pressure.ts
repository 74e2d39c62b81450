/** Pressures as people read them: a power of ten with the unit they have chosen. Values come in as Pa. */
import type { PressureUnit } from '#app/context.ts'
import { fromPascal } from '#app/physics/units.ts'

export const PRESSURE_UNITS: readonly PressureUnit[] = ['Pa', 'mbar', 'Torr']

const UNIT_WORDS: Record<PressureUnit, string> = { Pa: 'pascal', mbar: 'millibar', Torr: 'torr' }
const RAISED: Record<string, string> = {
  '-': '⁻',
  0: '⁰',
  1: '¹',
  2: '²',
  3: '³',
  4: '⁴',
  5: '⁵',
  6: '⁶',
  7: '⁷',
  8: '⁸',
  9: '⁹',
}

interface PressureParts {
  mantissa: string
  exponent: number
  unit: PressureUnit
}

/**
 * A pressure taken apart for setting.
 *
 * @param pa pressure in Pa, finite and not 0
 * @param digits significant digits, 2 where nothing else is known: gauges of this kind are not better
 * @throws RangeError for a value that cannot be written as a power of ten
 */
export function pressureParts(pa: number, unit: PressureUnit, digits = 2): PressureParts {
  if (!Number.isFinite(pa) || pa === 0) throw new RangeError(`${pa} Pa cannot be written as a power of ten`)
  const value = fromPascal(pa, unit)
  const [mantissa = '', exponent = ''] = value.toExponential(digits - 1).split('e')
  return { mantissa: mantissa.replace('-', '−'), exponent: Number(exponent), unit }
}

/** An integer in raised figures, such as `⁻⁸`, for text where no mark-up can be used. */
export function raised(exponent: number): string {
  return [...String(exponent)].map((sign) => RAISED[sign] ?? sign).join('')
}

/** A pressure as plain text, such as `5.1 × 10⁻⁸ Pa`, with spaces that do not break. Zero is written `0 Pa`. */
export function pressureText(pa: number, unit: PressureUnit, digits = 2): string {
  if (pa === 0) return `0\u00a0${unit}`
  const { mantissa, exponent } = pressureParts(pa, unit, digits)
  return `${mantissa}\u00a0×\u00a010${raised(exponent)}\u00a0${unit}`
}

/** A pressure as it is spoken: `5.1 times ten to the minus 8 pascal`. */
export function pressureWords(pa: number, unit: PressureUnit, digits = 2): string {
  if (pa === 0) return `0 ${UNIT_WORDS[unit]}`
  const { mantissa, exponent } = pressureParts(pa, unit, digits)
  const power = exponent < 0 ? `minus ${-exponent}` : String(exponent)
  return `${mantissa.replace('−', 'minus ')} times ten to the ${power} ${UNIT_WORDS[unit]}`
}

/** A pressure as a program reads it: `5.1e-8`, in the reader's unit. */
export function pressurePlain(pa: number, unit: PressureUnit, digits = 2): string {
  return fromPascal(pa, unit).toExponential(digits - 1)
}
