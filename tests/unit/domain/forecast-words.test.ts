import { expect, test } from 'vitest'
import { type BindingFacts, bindingOf } from '#app/domain/forecast-words.ts'

const CASES: [string, Partial<BindingFacts>, string | null, RegExp][] = [
  ['hydrogen alone is above it', { hydrogenPa: 3e-7 }, 'hydrogen', /a bake drives the hydrogen out/],
  [
    'hydrogen counts before a constant part',
    { hydrogenPa: 3e-7, constantPa: 4e-7 },
    'hydrogen',
    /3\.0 × 10⁻⁷ Pa/,
  ],
  ['a constant part above it', { constantPa: 5e-7 }, 'constant-load', /leak.*2\.5 times the pumping speed/],
  ['a constant part below it', { constantPa: 1e-7, earliestHours: 100 }, null, /^$/],
  ['water that takes a year', { earliestHours: 365 * 24 }, 'water', /at least 365 days.*without a bake/],
  ['water that takes a week', { earliestHours: 168 }, null, /^$/],
  ['nothing known', { hydrogenPa: null }, null, /^$/],
]

test.each(CASES)('%s', (_name, facts, binds, words) => {
  const found = bindingOf({
    targetPa: 2e-7,
    hydrogenPa: 5e-8,
    constantPa: null,
    earliestHours: null,
    ...facts,
  })
  expect(found?.binds ?? null).toBe(binds)
  expect(found?.text ?? '').toMatch(words)
})
