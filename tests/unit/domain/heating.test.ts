import { describe, expect, test } from 'vitest'
import { type HeatingStatement, judgeHeating, type SupplyNow } from '#app/domain/heating.ts'
import type { Quality } from '#app/domain/readings.ts'

const NOW = new Date('2026-11-09T17:00:00.000Z')
const MINUTE = 60_000
const when = (at: Date) => at.toISOString().slice(11, 16)
const ago = (minutes: number) => new Date(NOW.getTime() - minutes * MINUTE)

function meter(value: number | null, minutesAgo: number, quality: Quality = 'good') {
  return { value, at: ago(minutesAgo), quality }
}

function supply(volts: SupplyNow['volts'], amps: SupplyNow['amps'], since: Date | null = null): SupplyNow {
  return { tag: 'HX-1', maxAmps: 1500, openCircuitVolts: 75, volts, amps, since }
}

function statement(on: boolean, minutesAgo: number, segment = 'SG-05'): HeatingStatement {
  return { segment, on, at: ago(minutesAgo), by: 'Pim' }
}

function judge(supplies: SupplyNow[], statements: HeatingStatement[] = [], segments = ['SG-05']) {
  return judgeHeating({ segments, supplies, statements }, NOW, when)
}

const ON = supply(meter(23.4, 4), meter(1083, 4), ago(6000))
const OFF = supply(meter(null, 4, 'off'), meter(null, 4, 'off'), ago(1000))

describe('what the readings of the supply say', () => {
  test('on, with the figures and since when', () => {
    expect(judge([ON])).toEqual({
      on: true,
      knownAt: ago(4),
      since: ago(6000),
      basis: 'supply',
      text: 'Heating on: HX-1 gave 1083 A at 23.4 V at 16:56.',
    })
  })

  test('the word OFF is off', () => {
    expect(judge([OFF])).toMatchObject({ on: false, basis: 'supply', since: ago(1000) })
    expect(judge([supply(null, meter(null, 4, 'off'))]).on).toBe(false)
  })

  test('volts without amps are on: a joint has opened and the open-circuit voltage stands there', () => {
    expect(judge([supply(meter(75, 4), meter(0, 4))]).on).toBe(true)
  })

  test('amps at zero with no word about the volts is not off', () => {
    expect(judge([supply(null, meter(0, 4))])).toMatchObject({ on: null, basis: 'nothing' })
    expect(judge([supply(meter(null, 4, 'fault'), meter(0, 4))]).on).toBeNull()
    expect(judge([supply(meter(0.1, 4), meter(0, 4))]).on).toBe(false)
  })

  test('a faulty or doubtful channel says nothing', () => {
    expect(judge([supply(meter(23, 4, 'suspect'), meter(1083, 4, 'no-signal'))]).on).toBeNull()
  })

  test.each([
    [15, true],
    [15 + 1 / 60_000, null],
  ])('%d minutes old counts: %s', (minutes, on) => {
    expect(judge([supply(meter(23.4, minutes), meter(1083, minutes))]).on).toBe(on)
  })

  test('old readings leave it unknown, and say what was last known', () => {
    expect(judge([supply(meter(23.4, 60), meter(1083, 60))])).toMatchObject({
      on: null,
      knownAt: ago(60),
      text: expect.stringContaining('Last known: HX-1 gave 1083 A at 23.4 V at 16:00'),
    })
  })

  test('off of one channel is as old as the older of the two', () => {
    expect(judge([supply(meter(null, 4, 'off'), meter(0, 20))]).on).toBeNull()
  })

  test('of two sets one that is on is enough, and both have to be off', () => {
    const second = { ...OFF, tag: 'HX-2' }
    expect(judge([ON, second]).on).toBe(true)
    expect(judge([OFF, second]).on).toBe(false)
    expect(judge([OFF, { ...second, volts: null, amps: null }]).on).toBeNull()
  })
})

describe('what people say', () => {
  test('nothing is known where nobody said anything', () => {
    expect(judge([])).toMatchObject({ on: null, knownAt: null, basis: 'nothing' })
  })

  test('the newer of word and meter counts; at one instant the meter', () => {
    expect(judge([ON], [statement(false, 1)])).toMatchObject({ on: false, basis: 'person' })
    expect(judge([ON], [statement(false, 4)])).toMatchObject({ on: true, basis: 'supply' })
    expect(judge([ON], [statement(false, 5)])).toMatchObject({ on: true, basis: 'supply' })
  })

  test('a word that old readings contradict later leaves it unknown', () => {
    expect(judge([supply(meter(23.4, 60), meter(1083, 60))], [statement(false, 90)]).on).toBeNull()
    expect(judge([supply(meter(null, 60, 'off'), null)], [statement(true, 90)]).on).toBeNull()
    expect(judge([supply(meter(23.4, 90), meter(1083, 90))], [statement(false, 60)]).on).toBe(false)
  })

  test('off counts for twelve hours and is unknown afterwards; on stays on until somebody says otherwise', () => {
    expect(judge([], [statement(false, 720)]).on).toBe(false)
    expect(judge([], [statement(false, 721)])).toMatchObject({ on: null, knownAt: ago(721) })
    expect(judge([], [statement(true, 5000)])).toMatchObject({ on: true, since: ago(5000) })
  })

  test('a pair is off only where that was said of both; on where it was said of one', () => {
    const pair = ['SG-11', 'SG-12']
    expect(judge([], [statement(false, 5, 'SG-11')], pair).on).toBeNull()
    expect(judge([], [statement(false, 5, 'SG-11'), statement(false, 9, 'SG-12')], pair)).toMatchObject({
      on: false,
      knownAt: ago(9),
    })
    expect(judge([], [statement(false, 5, 'SG-11'), statement(true, 9, 'SG-12')], pair).on).toBe(true)
  })
})
