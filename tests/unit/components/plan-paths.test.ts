import { expect, test } from 'vitest'
import { curvePath } from '#app/components/bakes/plan-paths.ts'

const same = (value: number) => value

test('a curve is one line, and breaks where a value is not known', () => {
  expect(curvePath([0, 1, 2, 3, 4], [5, 6, null, 7, 8], same, same)).toBe('M0.0 5.0L1.0 6.0M3.0 7.0L4.0 8.0')
})

test('values that are missing at the end or cannot be drawn draw nothing', () => {
  expect(curvePath([0, 1, 2], [Number.NaN, Number.POSITIVE_INFINITY], same, same)).toBe('')
})
