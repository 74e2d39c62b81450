/** The checklist: every fact that is wrong opens its item and names what binds; every version difference is said once. */
import { describe, expect, test } from 'vitest'
import type { BakePlanContent } from '#app/domain/bake-plan.ts'
import { differences } from '#app/domain/bake-plan-differences.ts'
import {
  blockingItems,
  type PlanFacts,
  readiness,
  TICKED_ITEM_KEYS,
  type TickedItem,
} from '#app/domain/bake-plan-readiness.ts'

const at = new Date('2026-11-01T08:00:00.000Z')
const tick = { done: true, by: 'Pim', at, note: '' }

const good: PlanFacts = {
  segments: [
    { tag: 'SG-11', leakCheckedAt: at, isolationTestAt: at, isolationNote: '' },
    { tag: 'SG-12', leakCheckedAt: at, isolationTestAt: at, isolationNote: '' },
  ],
  pairObjection: null,
  overheated: [],
  supply: { tag: 'HX-3', maxAmps: 1500, maxVolts: 60, busyOn: null },
  load: { amps: 1067, volts: 55.2 },
  cart: { tag: 'MC-B', busyOn: null },
  power: { peakKW: 70.9, baseKW: 18, capKW: 260 },
  feeders: [{ name: 'east', peakKW: 70.9, limitKW: 160 }],
  bellows: [{ segment: 'SG-11', strokeMm: 31, ratedMm: 40 }],
  electricians: [{ name: 'Quarrie', licence: 'QE-1187', endsOn: '2026-11-20' }],
  hotUntilDay: '2026-11-19',
  predicted: { afterPa: 1e-7, targetPa: 2e-7, stuck: false },
  ticks: Object.fromEntries(TICKED_ITEM_KEYS.map((key) => [key, tick])) as Record<TickedItem, typeof tick>,
}

test('a plan with all its steps done has nothing open', () => {
  expect(readiness(good).filter(({ met }) => !met)).toEqual([])
})

const voided = {
  tag: 'SG-11',
  leakCheckedAt: at,
  isolationTestAt: null,
  isolationNote: 'the last one was voided',
}
const wrongs: [string, Partial<PlanFacts>, string, RegExp][] = [
  [
    'no leak check',
    { segments: [{ ...good.segments[0]!, leakCheckedAt: null }] },
    'leak-checked-SG-11',
    /no leak check/,
  ],
  ['no accepted test', { segments: [voided] }, 'isolation-test-SG-11', /SG-11 has no accepted.*voided/],
  ['two diameters', { pairObjection: '0.60 m and 0.50 m' }, 'same-diameter', /0\.60 m/],
  [
    'a valve too hot',
    { overheated: [{ part: 'GV-12', reachesC: 131, limitC: 120 }] },
    'parts-within-limits',
    /GV-12 would reach 131 °C of 120/,
  ],
  [
    'joints too short',
    { bellows: [{ segment: 'SG-11', strokeMm: 45, ratedMm: 40 }] },
    'joints-within-stroke',
    /45\.0 mm/,
  ],
  ['no supply', { supply: null }, 'supply', /No supply set/],
  ['a busy supply', { supply: { ...good.supply!, busyOn: 'SG-05' } }, 'supply', /heats SG-05/],
  ['a weak supply', { load: { amps: 1067, volts: 72 } }, 'supply', /72\.0 V.*60 V/],
  ['no cart', { cart: null }, 'cart-named', /No cart/],
  ['a busy cart', { cart: { tag: 'MC-B', busyOn: 'SG-05' } }, 'cart-named', /works on SG-05/],
  ['more power than there is', { power: { peakKW: 250, baseKW: 18, capKW: 260 } }, 'power-cap', /268 kW/],
  [
    'too much for the feeder',
    { feeders: [{ name: 'east', peakKW: 197, limitKW: 160 }] },
    'feeder',
    /197 of 160/,
  ],
  [
    'a licence that ends before the tube is cold',
    { hotUntilDay: '2026-11-25' },
    'electrician',
    /QE-1187 ends on 2026-11-20.*2026-11-25/,
  ],
  ['nobody licensed', { electricians: [] }, 'electrician', /No electrician/],
]

describe.each(wrongs)('%s', (_what, change, key, words) => {
  test('blocks and says what and how to mend it', () => {
    const open = blockingItems(readiness({ ...good, ...change }))
    expect(open.map((item) => item.key)).toEqual([key])
    expect(open[0]?.detail).toMatch(words)
  })
})

test.each(TICKED_ITEM_KEYS)(
  'the step %s blocks until a person ticks it, and again when it is taken back',
  (key) => {
    const { [key]: _gone, ...others } = good.ticks
    expect(blockingItems(readiness({ ...good, ticks: others })).map((item) => item.key)).toEqual([key])
    const back = { ...good.ticks, [key]: { ...tick, done: false } }
    expect(blockingItems(readiness({ ...good, ticks: back })).map((item) => item.key)).toEqual([key])
  },
)

test('a prediction above the target is shown and left to the engineer', () => {
  const items = readiness({ ...good, predicted: { afterPa: 4e-7, targetPa: 2e-7, stuck: false } })
  expect(items.find(({ key }) => key === 'prediction')).toMatchObject({ met: false, blocking: false })
  expect(blockingItems(items)).toEqual([])
})

test('without a start the licences are named and not judged', () => {
  const items = readiness({ ...good, hotUntilDay: null })
  expect(items.find(({ key }) => key === 'electrician')?.detail).toContain('Quarrie until 2026-11-20')
})

const content: BakePlanContent = {
  segments: ['SG-11', 'SG-12'],
  startsAt: null,
  prepHours: 48,
  celsius: 150,
  upKH: 10,
  holdPa: 1e-2,
  abortPa: null,
  spreadK: 20,
  soakHours: 168,
  soakEnd: { fallPercent: 10, waterBehind: true },
  cooling: { kind: 'natural' },
  pumpChangeC: 80,
  coldC: 40,
  testHours: 48,
  supply: null,
  cart: 'MC-B',
  targetPa: 2e-7,
  remarks: '',
}
// One value per field that differs from the one above: a field that is forgotten in the comparison fails here.
const others: { [Field in keyof BakePlanContent]: BakePlanContent[Field] } = {
  segments: ['SG-11'],
  startsAt: '2026-11-16T06:00:00.000Z',
  prepHours: 24,
  celsius: 140,
  upKH: 5,
  holdPa: 5e-3,
  abortPa: 1,
  spreadK: 30,
  soakHours: 200,
  soakEnd: { fallPercent: 5, waterBehind: true },
  cooling: { kind: 'controlled', downKH: 10 },
  pumpChangeC: 60,
  coldC: 35,
  testHours: 24,
  supply: 'HX-3',
  cart: null,
  targetPa: 1e-7,
  remarks: 'Weekend needs a second pair.',
}

test.each(Object.keys(others) as (keyof BakePlanContent)[])('a change of %s is one difference', (field) => {
  expect(differences(content, { ...content, [field]: others[field] })).toHaveLength(1)
})

test('equal versions differ in nothing, and a difference says both values', () => {
  expect(differences(content, { ...content })).toEqual([])
  expect(differences(content, { ...content, celsius: 140 })).toEqual(['Bake temperature: 150 °C → 140 °C'])
})
