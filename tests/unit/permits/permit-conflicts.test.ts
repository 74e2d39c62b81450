import { describe, expect, test } from 'vitest'
import { spanText } from '#app/domain/permit-conflicts/words.ts'
import { findConflicts } from '#app/domain/permit-conflicts.ts'
import { at, facts, found, NOW, only, own, permit, work, ZONE } from './conflict-grounds.ts'

const MINUTE_BEFORE = new Date(at('16 06:00').getTime() - 60_000)
const MINUTE_AFTER = new Date(at('16 06:00').getTime() + 60_000)

describe('without anything to compare', () => {
  test('a permit that lacks its window or its segments has no conflicts yet', () => {
    const others = [permit([5])]
    expect(found({ own: own([5], { from: null }), others })).toEqual([])
    expect(found({ own: own([]), others })).toEqual([])
  })

  test('a window that is over meets nothing any more', () => {
    expect(found({ now: at('25 18:00'), others: [permit([5])], works: [work()] })).toEqual([])
  })

  test('a permit alone on a quiet line has none', () => {
    expect(found({})).toEqual([])
  })
})

describe('K1, one segment claimed twice', () => {
  test('is blocked, with the other permit and its window', () => {
    const k1 = only({ others: [permit([5])] }, 'K1')
    expect(k1).toMatchObject({
      key: 'K1:SG-05:HSP-T-002',
      effect: 'block',
      place: { line: 'MAIN', fromM: 600, toM: 750 },
    })
    expect(k1.text).toContain('2026-11-16 06:00 to 2026-11-25 18:00 (UTC+01:00)')
    expect(k1.wayOut).toContain('HSP-T-002')
  })

  test.each([
    ['ends as this one begins', { from: at('10 06:00'), to: at('16 06:00') }, false],
    ['ends a minute into it', { from: at('10 06:00'), to: MINUTE_AFTER }, true],
    ['begins as this one ends', { from: at('25 18:00'), to: at('28 06:00') }, false],
    ['is over', { from: at('01 06:00'), to: at('05 06:00') }, false],
    ['has no window', { from: null, to: null }, false],
  ])('another that %s', (_, window, meets) => {
    expect(found({ others: [permit([5], window)] }).length > 0).toBe(meets)
  })

  test('one that has run out or waits for inspection claims until it is cancelled', () => {
    const running = own([5], { from: at('08 06:00'), to: at('12 06:00') })
    const past = { from: at('01 06:00'), to: at('06 06:00') }
    for (const state of ['expired', 'handed-back'] as const)
      expect(found({ own: running, others: [permit([5], { ...past, state })] })).toEqual([
        'K1:SG-05:HSP-T-002 block',
      ])
    expect(found({ own: running, others: [permit([5], { ...past, state: 'issued' })] })).toEqual([])
  })
})

describe('K2, heat on both sides of a gate valve', () => {
  test('a neighbour heated in the same time is blocked', () => {
    const k2 = only({ others: [permit([6])] }, 'K2')
    expect(k2).toMatchObject({ key: 'K2:GV-05:HSP-T-002', effect: 'block', place: { fromM: 750, toM: 750 } })
    expect(k2.text).toContain('SG-06')
  })

  test('a segment two further on, or the neighbour at another time, is not', () => {
    expect(found({ others: [permit([7])] })).toEqual([])
    expect(found({ others: [permit([6], { from: at('25 18:00'), to: at('28 06:00') })] })).toEqual([])
  })

  test('a pair in series of one plan may be heated, by one permit or by two', () => {
    const plan = { id: 7, segments: ['SG-10', 'SG-11'] }
    expect(found({ own: own([10, 11]) })).toEqual(['K2:GV-10 block'])
    expect(found({ own: own([10, 11], { plan }) })).toEqual([])
    const next = { own: own([10], { plan }), others: [permit([11], { plan })] }
    expect(findConflicts(facts(next)).filter(({ rule }) => rule === 'K2')).toEqual([])
    const apart = { own: own([10], { plan }), others: [permit([11], { plan: { ...plan, id: 8 } })] }
    expect(only(apart, 'K2').key).toBe('K2:GV-10:HSP-T-002')
  })

  test('a valve between two heats must stand them: 18 + 0.7 × (170 − 18) = 124.4 °C against 120 °C', () => {
    const plan = { id: 7, segments: ['SG-12', 'SG-13'] }
    const hot = only({ own: own([12, 13], { plan, maxCelsius: 170 }) }, 'K2')
    expect(hot).toMatchObject({ key: 'K2:limit:GV-12', effect: 'block' })
    expect(hot.text).toContain('124 °C')
    expect(hot.text).toContain('120 °C')
    expect(found({ own: own([12, 13], { plan, maxCelsius: 150 }) })).toEqual([])
  })

  test('an elastomer bonnet with heat on one side alone is left to the cautions', () => {
    expect(found({ own: own([12], { maxCelsius: 170 }) })).toEqual([])
  })
})

describe('K6, what two permits rest on', () => {
  test('an extraction fan that is the nearest of both waits for a ruling', () => {
    const k6 = only({ own: own([5]), others: [permit([6], { plan: null })] }, 'K6')
    expect(k6).toMatchObject({ key: 'K6:BF-03:HSP-T-002', effect: 'ruling', place: { fromM: 750 } })
    expect(found({ own: own([5]), others: [permit([7])] })).toEqual([])
  })

  test('equipment on both lists, but not valves, the supply or the cart, which have rules of their own', () => {
    const equipment = ['CW-1', 'GV-05', 'HX-1', 'MC-A']
    const lists = found({
      own: own([5], { equipment, supply: 'HX-1', cart: 'MC-A' }),
      others: [permit([7], { equipment })],
    })
    expect(lists).toEqual(['K6:CW-1:HSP-T-002 ruling'])
  })
})

describe('K7, one lock, one cart, one holder', () => {
  const pim = { holder: { id: 1, name: 'Pim' } }

  test('one holder 150 m apart may be, further may not', () => {
    expect(found({ own: own([1]), others: [permit([3], pim)] })).toEqual([])
    const far = only({ own: own([5]), others: [permit([8], pim)] }, 'K7')
    expect(far).toMatchObject({ key: 'K7:holder:HSP-T-002', effect: 'block' })
    expect(far.text).toContain('290 m away')
  })

  test('one holder at two times is two shifts', () => {
    expect(found({ others: [permit([9], { ...pim, from: at('25 18:00'), to: at('28 06:00') })] })).toEqual([])
  })

  test('one cart and one lock are blocked', () => {
    expect(
      found({
        own: own([5], { cart: 'MC-A', locks: ['L-114', 'L-115'] }),
        others: [permit([9], { cart: 'MC-A', locks: ['L-115'] })],
      }),
    ).toEqual(['K7:cart:MC-A:HSP-T-002 block', 'K7:lock:L-115:HSP-T-002 block'])
  })
})

test('what is gravest comes first, and every finding says where, how and a way out', () => {
  const all = findConflicts(
    facts({
      others: [permit([5])],
      works: [work(), work({ id: 13, kind: 'power-maintenance', stretch: null })],
    }),
  )
  expect(all.map(({ effect }) => effect)).toEqual(['block', 'ruling', 'warning', 'warning'])
  for (const { key, text, wayOut } of all) {
    expect(key.length).toBeLessThanOrEqual(80)
    expect(text.length).toBeGreaterThan(40)
    expect(text.length).toBeLessThanOrEqual(1000)
    expect(wayOut.length).toBeGreaterThan(20)
  }
})

test('words do not change as time goes by, so that a ruling does not become stale by itself', () => {
  const words = (now: Date) =>
    findConflicts(
      facts({ now, others: [permit([6])], works: [work(), work({ id: 13, kind: 'visit', stretch: null })] }),
    )
      .filter(({ effect }) => effect === 'ruling')
      .map(({ text }) => text)
  expect(words(at('17 09:00'))).toEqual(words(NOW))
  expect(words(NOW)).toHaveLength(2)
})

test('a minute before the window the neighbour is still free', () => {
  expect(found({ others: [permit([6], { from: at('10 06:00'), to: MINUTE_BEFORE })] })).toEqual([])
})

test('a time is written as shortly as it stays plain: one day once, both offsets over a clock change', () => {
  expect(spanText({ from: at('17 08:00'), to: at('17 12:00') }, ZONE)).toBe(
    '2026-11-17 08:00 to 12:00 (UTC+01:00)',
  )
  const autumn = { from: new Date('2026-10-24T22:30:00Z'), to: new Date('2026-10-25T01:30:00Z') }
  expect(spanText(autumn, ZONE)).toBe('2026-10-25 00:30 (UTC+02:00) to 2026-10-25 02:30 (UTC+01:00)')
})
