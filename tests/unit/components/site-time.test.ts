import { describe, expect, test } from 'vitest'
import {
  ageText,
  dayText,
  fieldTime,
  longTimeText,
  offsetLabel,
  siteTimeText,
  spanText,
  timeText,
  typedTime,
} from '#app/components/ui/site-time.ts'
import { readLocalTime } from '#app/domain/schemas/instant.ts'

const ZONE = 'Europe/Berlin'
const MORNING = new Date('2026-11-09T07:00:00Z')

describe('an instant in site time', () => {
  test('names the month and counts the hours of the site, not of the machine', () => {
    expect(siteTimeText(MORNING, ZONE)).toBe('9 Nov 2026, 08:00')
    expect(longTimeText(MORNING, ZONE)).toBe('Mon 9 Nov 2026, 08:00')
    expect(dayText(new Date('2026-11-08T23:30:00Z'), ZONE)).toBe('9 Nov 2026')
    expect(timeText(new Date('2026-11-09T05:59:07Z'), ZONE, true)).toBe('06:59:07')
  })

  test('gives the offset in force at that instant, so that the repeated hour can be told apart', () => {
    expect(offsetLabel(new Date('2026-10-25T00:30:00Z'), ZONE)).toBe('UTC+02:00')
    expect(offsetLabel(new Date('2026-10-25T01:30:00Z'), ZONE)).toBe('UTC+01:00')
  })

  test('fills a date-time field with what the form reads back as the same instant', () => {
    expect(fieldTime(MORNING, ZONE)).toBe('2026-11-09T08:00')
    expect(readLocalTime(fieldTime(MORNING, ZONE), ZONE)).toEqual({ kind: 'instant', at: MORNING })
    expect(typedTime(MORNING, ZONE)).toBe('2026-11-09 08:00')
    expect(readLocalTime(typedTime(MORNING, ZONE), ZONE)).toEqual({ kind: 'instant', at: MORNING })
  })
})

describe('a length of time', () => {
  test.each([
    [30_000, 'under a minute'],
    [4 * 60_000, '4 min'],
    [3_600_000, '1 h'],
    [9 * 3_600_000 + 50 * 60_000, '9 h 50 min'],
    [66 * 3_600_000, '66 h'],
    [12 * 86_400_000, '12 d'],
  ])('of %i ms reads %s', (ms, text) => {
    expect(spanText(ms)).toBe(text)
  })

  test('says which side of now it lies on', () => {
    expect(ageText(new Date(MORNING.getTime() - 3 * 3_600_000), MORNING)).toBe('3 h ago')
    expect(ageText(new Date(MORNING.getTime() + 3 * 3_600_000), MORNING)).toBe('in 3 h')
    expect(ageText(MORNING, MORNING)).toBe('just now')
  })
})
