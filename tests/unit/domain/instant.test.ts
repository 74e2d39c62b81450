import { describe, expect, test } from 'vitest'
import { offsetText, readLocalTime, siteInstant } from '#app/domain/schemas/instant.ts'

// The clock changes of 2026 in Europe/Vienna and Europe/London, and of 2027 in Pacific/Auckland, are those of the
// IANA time zone database; the expected instants are worked out by hand from the offsets.
describe('a site time typed by a person', () => {
  test('on an ordinary day becomes one instant', () => {
    expect(readLocalTime('2026-11-09T08:00', 'Europe/Vienna')).toEqual({
      kind: 'instant',
      at: new Date('2026-11-09T07:00:00Z'),
    })
    expect(readLocalTime('2026-07-01 08:00:30', 'Europe/Vienna')).toEqual({
      kind: 'instant',
      at: new Date('2026-07-01T06:00:30Z'),
    })
  })

  test('in the repeated hour of autumn is said to mean two instants', () => {
    expect(readLocalTime('2026-10-25T02:30', 'Europe/Vienna')).toEqual({
      kind: 'ambiguous',
      first: new Date('2026-10-25T00:30:00Z'),
      second: new Date('2026-10-25T01:30:00Z'),
    })
    expect(readLocalTime('2026-10-25T01:30', 'Europe/London')).toEqual({
      kind: 'ambiguous',
      first: new Date('2026-10-25T00:30:00Z'),
      second: new Date('2026-10-25T01:30:00Z'),
    })
    expect(readLocalTime('2027-04-04T02:30', 'Pacific/Auckland')).toEqual({
      kind: 'ambiguous',
      first: new Date('2027-04-03T13:30:00Z'),
      second: new Date('2027-04-03T14:30:00Z'),
    })
  })

  test('in the hour that spring leaves out is said not to exist', () => {
    expect(readLocalTime('2027-03-28T02:30', 'Europe/Vienna')).toEqual({
      kind: 'missing',
      offsetBefore: '+01:00',
    })
  })

  test('just outside the repeated hour is one instant again', () => {
    expect(readLocalTime('2026-10-25T01:59', 'Europe/Vienna')).toMatchObject({
      at: new Date('2026-10-24T23:59:00Z'),
    })
    expect(readLocalTime('2026-10-25T03:00', 'Europe/Vienna')).toMatchObject({
      at: new Date('2026-10-25T02:00:00Z'),
    })
  })

  test('with an offset is taken at its word', () => {
    expect(readLocalTime('2026-10-25T02:30+01:00', 'Europe/Vienna')).toMatchObject({
      at: new Date('2026-10-25T01:30:00Z'),
    })
    expect(readLocalTime('2026-11-09T07:00Z', 'Europe/Vienna')).toMatchObject({
      at: new Date('2026-11-09T07:00:00Z'),
    })
  })

  test.each(['', 'yesterday', '2026-02-30T10:00', '2026-11-09', '2026-11-09T25:00', '2026-11-09T10:61'])(
    'such as "%s" is unreadable',
    (text) => {
      expect(readLocalTime(text, 'Europe/Vienna')).toEqual({ kind: 'unreadable' })
    },
  )

  test('as a form field tells how to mend what it cannot take', () => {
    const twice = siteInstant('Europe/Vienna').safeParse('2026-10-25T02:30')
    expect(twice.success).toBe(false)
    expect(twice.error?.issues[0]?.message).toContain('+02:00 for the first')
    expect(twice.error?.issues[0]?.message).toContain('+01:00 for the second')
    const never = siteInstant('Europe/Vienna').safeParse('2027-03-28T02:30')
    expect(never.error?.issues[0]?.message).toContain('does not exist')
  })

  test('offsets are written with sign and minutes', () => {
    expect([offsetText(60), offsetText(-210), offsetText(0)]).toEqual(['+01:00', '-03:30', '+00:00'])
  })
})
