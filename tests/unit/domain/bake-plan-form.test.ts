/** The plan form: what it makes of what is typed, and what it says of what it cannot take. */
import { expect, test } from 'vitest'
import { PlanActSchema, planFormSchema, planFormValues } from '#app/domain/bake-plan-form.ts'
import { instantText } from '#app/domain/instant-text.ts'

const ZONE = 'Europe/Vienna'
const typed = {
  title: 'Bake of the pair',
  segment: 'SG-11',
  second: 'SG-12',
  startsAt: '2026-11-16 18:00',
  prepHours: '48',
  celsius: '150',
  upKH: '10',
  holdPa: '1e-2',
  abortPa: '',
  spreadK: '20',
  soakHours: '168',
  fallPercent: '10',
  waterBehind: 'on',
  cooling: 'natural',
  downKH: '',
  pumpChangeC: '80',
  coldC: '40',
  testHours: '48',
  supply: 'HX-3',
  cart: '',
  targetPa: '2,0e-7',
  remarks: '',
}

test('typed text becomes a plan, with a decimal comma, site time and empty choices', () => {
  const made = planFormSchema(ZONE).parse(typed)
  expect(made.content).toMatchObject({
    segments: ['SG-11', 'SG-12'],
    startsAt: '2026-11-16T17:00:00.000Z',
    cooling: { kind: 'natural' },
    cart: null,
    abortPa: null,
    targetPa: 2e-7,
    soakEnd: { fallPercent: 10, waterBehind: true },
  })
})

test('a plan put back into the form comes out the same', () => {
  const made = planFormSchema(ZONE).parse({ ...typed, cooling: 'controlled', downKH: '8', abortPa: '0.1' })
  const values = planFormValues(made.title, made.content, (at) => instantText(at, ZONE).slice(0, 16))
  expect(planFormSchema(ZONE).parse(values)).toEqual(made)
})

test.each([
  ['celsius', '', /Nothing was given\. Give a number from 40 to 300 °C/],
  ['celsius', 'hot', /"hot" does not do/],
  ['soakHours', '-3', /from 0 to 4000 h/],
  ['targetPa', '0', /Pa, such as 1e-5/],
  ['segment', '', /Choose a segment/],
  ['startsAt', 'Monday', /2026-11-09 08:00/],
  ['abortPa', '0.001', /more than 0\.01 Pa/],
  ['downKH', '0', /0\.5 to 60/],
])('%s "%s" is refused at its field', (field, text, words) => {
  const read = planFormSchema(ZONE).safeParse({ ...typed, [field]: text })
  const issue = read.error?.issues.find(({ path }) => path.join('.') === field)
  expect(issue?.message).toMatch(words)
})

test('held cooling without a rate is refused at the rate', () => {
  const read = planFormSchema(ZONE).safeParse({ ...typed, cooling: 'controlled' })
  expect(read.error?.issues[0]).toMatchObject({ path: ['downKH'] })
})

test('a step that is not on the list cannot be ticked', () => {
  const tick = { act: 'tick', item: 'bars-torqued', done: 'yes', note: '' }
  expect(PlanActSchema.parse(tick)).toMatchObject({ item: 'bars-torqued', done: true })
  expect(PlanActSchema.safeParse({ ...tick, item: 'coffee' }).success).toBe(false)
  expect(PlanActSchema.safeParse({ act: 'dance' }).success).toBe(false)
})
