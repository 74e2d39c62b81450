import { expect, test } from 'vitest'
import { expectedNight } from '#app/domain/expected-files.ts'

const vienna = { code: 'NL-W', dueAt: '07:00', zone: 'Europe/Vienna' }

test('at 08:00 the night that ended at 06:00 is missing until its file is in', () => {
  const now = new Date('2026-11-09T07:00:00Z')
  expect(expectedNight({ ...vienna, now, endAt: new Date('2026-11-08T05:00:00Z') })).toEqual({
    code: 'NL-W',
    night: '2026-11-08',
    endsAt: new Date('2026-11-09T05:00:00Z'),
    dueAt: new Date('2026-11-09T06:00:00Z'),
    state: 'missing',
  })
  expect(expectedNight({ ...vienna, now, endAt: new Date('2026-11-09T05:00:00Z') }).state).toBe('taken-in')
  expect(expectedNight({ ...vienna, now, endAt: null }).state).toBe('missing')
})

test('between the end of the night and the hour it is due, the file is expected', () => {
  const now = new Date('2026-11-09T05:30:00Z')
  expect(expectedNight({ ...vienna, now, endAt: new Date('2026-11-08T05:00:00Z') }).state).toBe('expected')
})

test('before 06:00 the newest finished night is the one before', () => {
  const now = new Date('2026-11-09T04:00:00Z')
  expect(expectedNight({ ...vienna, now, endAt: new Date('2026-11-08T05:00:00Z') })).toMatchObject({
    night: '2026-11-07',
    state: 'taken-in',
  })
})

test('the morning after the clock is put back, the file is due at seven winter time', () => {
  const now = new Date('2026-10-25T05:30:00Z')
  expect(expectedNight({ ...vienna, now, endAt: null })).toMatchObject({
    night: '2026-10-24',
    dueAt: new Date('2026-10-25T06:00:00Z'),
    state: 'expected',
  })
})
