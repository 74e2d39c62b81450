import { expect, test } from 'vitest'
import { isFresh } from '#app/domain/freshness.ts'

const now = new Date('2026-11-09T07:00:00Z')
const at = (text: string) => new Date(text)

test('the last row of a night file that ended this morning is fresh', () => {
  expect(
    isFresh({
      lastGoodAt: at('2026-11-09T05:00Z'),
      sourceEndAt: at('2026-11-09T05:00Z'),
      periodSeconds: 60,
      now,
    }),
  ).toBe(true)
})

test('a channel that stops inside a file that goes on is not fresh, though its last value is only hours old', () => {
  expect(
    isFresh({
      lastGoodAt: at('2026-11-08T21:10Z'),
      sourceEndAt: at('2026-11-09T05:00Z'),
      periodSeconds: 60,
      now,
    }),
  ).toBe(false)
})

test('three periods of silence at the end are still fresh, a second more is not', () => {
  const input = { sourceEndAt: at('2026-11-09T05:00:00Z'), periodSeconds: 60, now }
  expect(isFresh({ ...input, lastGoodAt: at('2026-11-09T04:57:00Z') })).toBe(true)
  expect(isFresh({ ...input, lastGoodAt: at('2026-11-09T04:56:59Z') })).toBe(false)
})

test('a file that ended 26 hours ago is no longer fresh, one a second younger is', () => {
  const old = at('2026-11-08T05:00:00Z')
  expect(isFresh({ lastGoodAt: old, sourceEndAt: old, periodSeconds: 60, now })).toBe(false)
  const younger = at('2026-11-08T05:00:01Z')
  expect(isFresh({ lastGoodAt: younger, sourceEndAt: younger, periodSeconds: 60, now })).toBe(true)
})

test('no reading at all is not fresh', () => {
  expect(isFresh({ lastGoodAt: null, sourceEndAt: now, periodSeconds: 60, now })).toBe(false)
})

test('a reading typed by hand counts for one shift', () => {
  expect(isFresh({ lastGoodAt: at('2026-11-08T20:00Z'), sourceEndAt: null, periodSeconds: 0, now })).toBe(
    true,
  )
  expect(isFresh({ lastGoodAt: at('2026-11-08T19:00Z'), sourceEndAt: null, periodSeconds: 0, now })).toBe(
    false,
  )
})
