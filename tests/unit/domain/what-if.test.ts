/** The numbers of a trial: there and back through addresses and sliders, and what is said of those that cannot be. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import {
  numberText,
  sliderStepOf,
  sliderSteps,
  sliderValueAt,
  usualState,
  type WhatIfKey,
  whatIfFields,
} from '#app/domain/what-if.ts'
import { readWhatIf, whatIfQuery } from '#app/domain/what-if-query.ts'
import { bakedGround, wetGround } from '#tests/fixtures/what-if-grounds.ts'

const fields = whatIfFields(wetGround)

const states = fc.record({
  mode: fc.constantFrom('pump-down' as const, 'bake' as const),
  wall: fc.constantFrom('wet' as const, 'dry' as const),
  numbers: fc
    .record(
      Object.fromEntries(
        fields.map(({ key, min, max }) => [key, fc.double({ min, max, noNaN: true })]),
      ) as Record<WhatIfKey, fc.Arbitrary<number>>,
    )
    .map((numbers) => {
      // As a hand sets them: within the limits, to six figures.
      const set = { ...numbers }
      for (const { key, min, max } of fields) {
        const short = Number(numberText(numbers[key]))
        set[key] = short < min || short > max ? numbers[key] : short
      }
      return set
    })
    .filter((numbers) => fields.every(({ key }) => Number(numberText(numbers[key])) === numbers[key])),
})

describe('a trial in an address', () => {
  test('any trial comes back as it was', () => {
    fc.assert(
      fc.property(states, (state) => {
        const back = readWhatIf(wetGround, new URLSearchParams(whatIfQuery(wetGround, state)))
        expect(back).toEqual({ state, typed: {}, errors: {} })
      }),
    )
  })

  test('the one that changes nothing has no query, and keeps every figure of the register', () => {
    const usual = usualState(wetGround)
    expect(whatIfQuery(wetGround, usual)).toBe('')
    const moved = { ...usual, numbers: { ...usual.numbers, leak: 1e-7 } }
    const back = readWhatIf(wetGround, new URLSearchParams(whatIfQuery(wetGround, moved)))
    expect(back.state.numbers.area).toBe(usual.numbers.area)
    expect(Number(numberText(usual.numbers.area))).not.toBe(usual.numbers.area)
  })

  test('a segment that was baked begins with a dry wall', () => {
    expect(usualState(wetGround).wall).toBe('wet')
    expect(usualState(bakedGround).wall).toBe('dry')
  })

  test.each([
    ['bakeC', 'hot', '“hot” was given; expected a number from 40 to 400 °C'],
    ['bakeC', '4000', '“4000” was given; expected a number from 40 to 400 °C'],
    ['leak', '-1e-9', '“-1e-9” was given; expected a number from 0 to 1 Pa·m³/s'],
    ['soak', '', 'Nothing was given; expected a number from 1 to 8766 h'],
    ['days', 'Infinity', '“Infinity” was given; expected a number from 1 to 3650 d'],
  ] as const)('%s=%s is named, kept as typed, and replaced by the usual one', (key, text, said) => {
    const asked = readWhatIf(wetGround, new URLSearchParams({ [key]: text }))
    expect(asked.typed[key]).toBe(text)
    expect(asked.errors[key]).toContain(said)
    expect(asked.errors[key]).toContain('Used instead')
    expect(asked.state).toEqual(usualState(wetGround))
  })

  test('a decimal comma is read', () => {
    expect(readWhatIf(wetGround, new URLSearchParams({ ramp: '2,5' })).state.numbers.ramp).toBe(2.5)
  })
})

describe('sliders', () => {
  test.each(fields.map((field) => [field.key, field] as const))(
    '%s: every step is a value of its own',
    (_, field) => {
      const { slider } = field
      let before = Number.NEGATIVE_INFINITY
      for (let step = 0; step <= sliderSteps(slider); step += 1) {
        const value = sliderValueAt(slider, step)
        expect(value).toBeGreaterThan(before)
        expect(value).toBeGreaterThanOrEqual(field.min)
        expect(value).toBeLessThanOrEqual(field.max)
        expect(sliderStepOf(slider, value)).toBe(step)
        before = value
      }
    },
  )

  test('a value beyond the slider stands at its end', () => {
    const bakeC = fields.find(({ key }) => key === 'bakeC')!
    expect(sliderStepOf(bakeC.slider, 300)).toBe(sliderSteps(bakeC.slider))
    expect(sliderStepOf(bakeC.slider, 45)).toBe(0)
  })
})
