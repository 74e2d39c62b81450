import { describe, expect, it } from 'vitest'
import {
  outsideInstrument,
  readTypedValue,
  TYPED_QUANTITIES,
  TYPED_UNITS,
  typedReadingSchema,
} from '#app/domain/schemas/typed-reading.ts'

/** Definitions: 1 mbar = 100 Pa; 1 Torr = 101325/760 Pa; 0 °C = 273.15 K. */
describe('a typed value', () => {
  it.each([
    ['2.4e-5', 'Pa', 'pressure', 2.4e-5],
    ['2,4E-5', 'Pa', 'pressure', 2.4e-5],
    ['5.1 × 10^-10', 'mbar', 'pressure', 5.1e-8],
    ['1', 'Torr', 'pressure', 101325 / 760],
    ['423.15', 'K', 'temperature', 150],
    ['-12,5', '°C', 'temperature', -12.5],
    ['20.9', '%', 'oxygen', 20.9],
    ['33', 'mm', 'stroke', 33],
    ['23.4', 'V', 'voltage', 23.4],
    ['1083', 'A', 'current', 1083],
    ['21.6', 'mΩ', 'resistance', 0.0216],
  ] as const)('%s %s is %s', (text, unit, quantity, value) => {
    expect(readTypedValue(text, unit, quantity)).toEqual({
      ok: true,
      typed: { value: expect.closeTo(value, 12), bound: null, quality: 'manual' },
    })
  })

  it('may be a word or a bound', () => {
    expect(readTypedValue('off', 'Pa', 'pressure')).toMatchObject({ typed: { value: null, quality: 'off' } })
    expect(readTypedValue('>1e-4', 'mbar', 'pressure')).toMatchObject({
      typed: { value: null, bound: expect.closeTo(0.01, 12), quality: 'over-range' },
    })
  })

  it.each([
    ['0', 'Pa', 'pressure', 'value', 'has no reading'],
    ['-1e-7', 'Pa', 'pressure', 'value', 'expected'],
    ['3e5', 'mbar', 'pressure', 'value', 'which is 3.00 × 10⁷ Pa'],
    ['1372', '°C', 'temperature', 'value', 'expected -50 to 600 °C'],
    ['120', '%', 'oxygen', 'value', 'expected 0 to 100 %'],
    ['900', 'mm', 'stroke', 'value', 'expected -200 to 500 mm'],
    ['23400', 'mV', 'voltage', null, ''],
    ['23400', 'V', 'voltage', 'value', 'Look at the number and its unit'],
    ['1.013,25', 'mbar', 'pressure', 'value', 'expected a number'],
    ['about 3', 'Pa', 'pressure', 'value', 'Found “about 3”'],
    ['3e-5 mbar', 'Pa', 'pressure', 'value', 'the number alone'],
    ['3e-', 'Pa', 'pressure', 'value', 'expected a number'],
    ['20', 'Pa', 'temperature', 'unit', 'expected a unit of temperature (°C, K, °F)'],
    ['20', 'furlong', 'stroke', 'unit', 'Found “furlong”'],
  ] as const)('%s %s for %s is a fault of %s', (text, unit, quantity, field, says) => {
    const read = readTypedValue(text, unit, quantity)
    expect(read.ok ? null : read.field).toBe(field)
    if (!read.ok) expect(read.message).toContain(says)
  })

  it('takes every unit that is offered', () => {
    // 20 K would be colder than any tube here.
    for (const quantity of TYPED_QUANTITIES)
      for (const unit of TYPED_UNITS[quantity])
        expect(readTypedValue(unit === 'K' ? '293' : '20', unit, quantity), unit).toMatchObject({ ok: true })
  })
})

describe('the range of an instrument', () => {
  const gauge = { serial: 'Q-8120', rangeMin: 1e-9, rangeMax: 1e-2 }

  it('is compared in the unit of the quantity', () => {
    expect(outsideInstrument(1e-2, 'pressure', gauge)).toBeNull()
    expect(outsideInstrument(38, 'pressure', gauge)).toContain(
      'Q-8120 can read, 1.00 × 10⁻⁹ to 1.00 × 10⁻² Pa',
    )
    expect(outsideInstrument(38, 'pressure', { ...gauge, rangeMax: null })).toBeNull()
    expect(outsideInstrument(38, 'pressure', { ...gauge, rangeMin: null })).toContain('up to')
  })
})

describe('the form', () => {
  it('asks for position, value and unit and takes the rest as it comes', () => {
    const schema = typedReadingSchema('Europe/Berlin')
    const empty = schema.safeParse({ position: '', value: '', unit: '', at: '2026-11-09 08:00' })
    expect(empty.error?.issues.map(({ path }) => path[0])).toEqual(['position', 'value', 'unit'])
    expect(
      schema.parse({ position: 'HC-11B', value: '1', unit: 'Pa', at: '2026-11-09 08:00' }),
    ).toMatchObject({
      at: new Date('2026-11-09T07:00:00Z'),
      instrument: '',
      note: '',
    })
  })
})
