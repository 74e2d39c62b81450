import { describe, expect, test } from 'vitest'
import {
  pressureParts,
  pressurePlain,
  pressureText,
  pressureWords,
  raised,
} from '#app/components/ui/format-pressure.ts'

describe('a pressure', () => {
  test('is a power of ten in the unit asked for', () => {
    expect(pressureText(5.1e-8, 'Pa')).toBe('5.1\u00a0×\u00a010⁻⁸\u00a0Pa')
    expect(pressureText(5.1e-8, 'mbar')).toBe('5.1\u00a0×\u00a010⁻¹⁰\u00a0mbar')
    expect(pressureText(101_325, 'Pa', 3)).toBe('1.01\u00a0×\u00a010⁵\u00a0Pa')
  })

  test('in torr uses 1 Torr = 101325/760 Pa (NIST SP 811, appendix B)', () => {
    expect(pressureParts(101_325, 'Torr', 4)).toEqual({ mantissa: '7.600', exponent: 2, unit: 'Torr' })
  })

  test('carries a mantissa that rounds up to ten into the exponent', () => {
    expect(pressureText(9.97e-8, 'Pa')).toBe('1.0\u00a0×\u00a010⁻⁷\u00a0Pa')
  })

  test('keeps the sign of a gauge that reads below nothing', () => {
    expect(pressureText(-2e-3, 'Pa')).toBe('−2.0\u00a0×\u00a010⁻³\u00a0Pa')
  })

  test('of nothing is said as such, and only where that can be said', () => {
    expect(pressureText(0, 'Pa')).toBe('0\u00a0Pa')
    expect(() => pressureParts(0, 'Pa')).toThrow('0 Pa cannot be written as a power of ten')
    expect(() => pressureText(Number.NaN, 'Pa')).toThrow('NaN Pa')
  })

  test('is spoken in words and copied as a program reads it', () => {
    expect(pressureWords(5.1e-8, 'Pa')).toBe('5.1 times ten to the minus 8 pascal')
    expect(pressureWords(1e5, 'mbar')).toBe('1.0 times ten to the 3 millibar')
    expect(pressurePlain(2.1e-7, 'Pa')).toBe('2.1e-7')
  })

  test('raises every figure of an exponent', () => {
    expect(raised(-10)).toBe('⁻¹⁰')
  })
})
