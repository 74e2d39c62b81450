import { describe, expect, it } from 'vitest'
import {
  lastDayValue,
  numberValue,
  optionalInstant,
  readNumber,
  tagValue,
} from '#app/domain/schemas/register-values.ts'

const ZONE = 'Europe/Vienna'

describe('numbers typed by people', () => {
  it.each([
    ['150', 150],
    ['0.6', 0.6],
    ['0,600', 0.6],
    ['2,1E-7', 2.1e-7],
    [' 7e+23 ', 7e23],
    ['-,5', -0.5],
  ])('reads %s', (text, value) => {
    expect(readNumber(text)).toEqual({ kind: 'number', value })
  })

  it.each(['', 'abc', '1 500', '1.500,0', '2.1 Pa', '1e999', '--1', 'e5'])('does not read %s', (text) => {
    expect(readNumber(text)).toEqual({ kind: 'unreadable' })
  })

  it('asks again where a comma can be read in two ways', () => {
    const result = numberValue({ min: 0, max: 1e6, unit: 'W' }).safeParse('1,500')
    expect(result.error?.issues[0]?.message).toContain('1500 or as 1.500')
  })

  it('names the bounds it refuses by', () => {
    const result = numberValue({ min: 0.05, max: 3, unit: 'm' }).safeParse('60')
    expect(result.error?.issues[0]?.message).toBe('60 is outside what is taken here: from 0.05 to 3 m.')
  })

  it('keeps an empty optional number unknown and not zero', () => {
    expect(numberValue({ min: 0, max: 1, unit: '', optional: true }).parse(' ')).toBeNull()
    expect(numberValue({ min: 0, max: 1, unit: '' }).safeParse('').success).toBe(false)
  })

  it('refuses a fraction where a count is wanted', () => {
    expect(numberValue({ min: 0, max: 99, unit: '', whole: true }).safeParse('2.5').success).toBe(false)
  })
})

describe('tags', () => {
  it('takes what stands on labels and refuses the rest', () => {
    expect(tagValue(20, 'HC-03B').parse(' TH-05-09 ')).toBe('TH-05-09')
    for (const bad of ['', '-A', 'A/B', '<b>', 'new', 'x'.repeat(21)]) {
      expect(tagValue(20, 'HC-03B').safeParse(bad).success, bad).toBe(false)
    }
  })
})

describe('days and instants', () => {
  it('lets the last day count in full by site time', () => {
    expect(lastDayValue(ZONE).parse('2026-11-30')).toEqual(new Date('2026-11-30T23:00:00Z'))
    // The day of the change to summer time has 23 hours.
    expect(lastDayValue(ZONE).parse('2027-03-28')).toEqual(new Date('2027-03-28T22:00:00Z'))
    expect(lastDayValue(ZONE).parse('')).toBeNull()
  })

  it('refuses days that do not exist', () => {
    for (const bad of ['2026-02-30', '30.11.2026', 'tomorrow']) {
      expect(lastDayValue(ZONE).safeParse(bad).success, bad).toBe(false)
    }
  })

  it('reads an empty optional time as none and a bad one as a fault', () => {
    expect(optionalInstant(ZONE).parse('')).toBeNull()
    expect(optionalInstant(ZONE).parse('2026-11-09T08:00')).toEqual(new Date('2026-11-09T07:00:00Z'))
    const bad = optionalInstant(ZONE).safeParse('2026-13-01T00:00')
    expect(bad.error?.issues[0]?.message).toBe('Give a date and time such as 2026-11-09 08:00.')
  })
})
