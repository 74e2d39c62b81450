import { expect, test } from 'vitest'
import { weeklyChange } from '#app/domain/trend.ts'

const HALF_DAY = 43_200

function rising(perWeek: number, count: number): number[] {
  return Array.from({ length: count }, (_, step) => 3e-7 * (1 + perWeek) ** (step / 14))
}

test('an even rise of six per cent a week is found', () => {
  expect(weeklyChange(rising(0.06, 60), HALF_DAY)).toBeCloseTo(0.06, 6)
})

test('a burst of some hours does not move the trend', () => {
  const values = rising(0.06, 60)
  values[20] = 1e-3
  values[21] = 1e-3
  expect(weeklyChange(values, HALF_DAY)).toBeCloseTo(0.06, 2)
})

test('gaps and non-positive values are left out, and too few values give no trend', () => {
  const values: (number | null)[] = rising(-0.1, 60)
  values[5] = null
  values[6] = 0
  expect(weeklyChange(values, HALF_DAY)).toBeCloseTo(-0.1, 6)
  expect(weeklyChange(values.slice(0, 20), HALF_DAY)).toBeNull()
})
