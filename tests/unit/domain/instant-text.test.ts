import { expect, test } from 'vitest'
import { instantText } from '#app/domain/instant-text.ts'

test.each([
  ['2026-11-09T07:00:00Z', 'Europe/Berlin', '2026-11-09 08:00 (UTC+01:00)'],
  ['2026-06-30T22:30:00Z', 'Europe/Berlin', '2026-07-01 00:30 (UTC+02:00)'],
  ['2026-01-01T03:00:00Z', 'America/St_Johns', '2025-12-31 23:30 (UTC-03:30)'],
  // The hour that comes twice: the offset tells which one.
  ['2026-10-25T00:30:00Z', 'Europe/Berlin', '2026-10-25 02:30 (UTC+02:00)'],
  ['2026-10-25T01:30:00Z', 'Europe/Berlin', '2026-10-25 02:30 (UTC+01:00)'],
])('%s in %s', (at, zone, text) => {
  expect(instantText(new Date(at), zone)).toBe(text)
})
