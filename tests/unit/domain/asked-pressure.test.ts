import { expect, test } from 'vitest'
import { readAskedPressure } from '#app/domain/schemas/asked-pressure.ts'

test.each([
  ['1e-5', 1e-5],
  ['0,00001', 1e-5],
  [' 2.5E-7 ', 2.5e-7],
])('%s is understood', (text, pa) => {
  expect(readAskedPressure(text).pa).toBe(pa)
})

test.each(['ten', '-1e-5', '0', '1e9', 'NaN'])('%s is refused with what was found', (text) => {
  const asked = readAskedPressure(text)
  expect(asked.pa).toBeNull()
  expect(asked.error).toContain(text)
})

test('nothing asked is no error', () => {
  expect(readAskedPressure(null)).toEqual({ pa: null, text: '', error: null })
  expect(readAskedPressure('  ').error).toBeNull()
})
