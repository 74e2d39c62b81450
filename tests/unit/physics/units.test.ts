import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { PhysicsError } from '#app/physics/errors.ts'
import {
  celsiusToKelvin,
  fahrenheitToCelsius,
  fromPascal,
  kelvinToCelsius,
  moleculesPerSecond,
  PRESSURE_PA,
  type PressureUnit,
  toPaM3S,
  toPaMS,
  toPascal,
} from '#app/physics/units.ts'
import { expectCheck } from '#tests/fixtures/physics/check-values.ts'

describe('units', () => {
  test.each([
    ['unit.torr', 'Torr'],
    ['unit.mbar', 'mbar'],
    ['unit.atm', 'atm'],
    ['unit.bar', 'bar'],
    ['unit.micron', 'micron'],
    ['unit.mmHg', 'mmHg'],
    ['unit.psi', 'psi'],
    ['unit.inHg', 'inHg'],
  ] as const)('%s', (id, unit) => expectCheck(id, toPascal(1, unit)))

  test('a rate per cm2 is a thousand times larger per m2, not a tenth', () => {
    expectCheck('unit.mbar_l_s_cm2', toPaMS(1, 'mbar·l/(s·cm²)'))
    expectCheck('unit.torr_l_s_cm2', toPaMS(1, 'Torr·l/(s·cm²)'))
    expectCheck('unit.mbar_l_s', toPaM3S(1, 'mbar·l/s'))
    expectCheck('unit.atmcc_s', toPaM3S(1, 'atm·cm³/s'))
  })

  test('a throughput is an amount only with its temperature', () => {
    expectCheck('unit.throughput_molecules', moleculesPerSecond(1))
    expect(moleculesPerSecond(1) / moleculesPerSecond(1, 423.15)).toBeCloseTo(423.15 / 293.15, 12)
    expect(() => moleculesPerSecond(1, 0)).toThrow(PhysicsError)
  })

  test('temperatures', () => {
    expectCheck('unit.F_to_C', fahrenheitToCelsius(300))
    expect(celsiusToKelvin(20)).toBe(293.15)
    expect(() => celsiusToKelvin(-273.15)).toThrow('kelvin is 0; expected a finite number above 0')
  })

  test('there and back is the same pressure in every unit', () => {
    const units = Object.keys(PRESSURE_PA) as PressureUnit[]
    fc.assert(
      fc.property(fc.double({ min: 1e-12, max: 1e6, noNaN: true }), fc.constantFrom(...units), (p, unit) => {
        expect(toPascal(fromPascal(p, unit), unit) / p).toBeCloseTo(1, 13)
        expect(kelvinToCelsius(celsiusToKelvin(p))).toBeCloseTo(p, 6)
      }),
    )
  })
})
