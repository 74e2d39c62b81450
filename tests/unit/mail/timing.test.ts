import { describe, expect, it } from 'vitest'
import { isUndeliverable } from '#app/domain/mail/bounces.ts'
import {
  FLOOD_MAILS,
  floodAnswer,
  isFinalRefusal,
  mayBeFolded,
  pauseAfterFailure,
  quietUntil,
  waitsForCompany,
} from '#app/domain/mail/timing.ts'

const ZONE = 'Europe/Vienna'
const NIGHT = { from: '22:00', until: '07:00' }
const at = (text: string) => new Date(text)

describe('quiet hours', () => {
  it.each([
    ['in the evening', '2026-11-08T21:00:00Z', '2026-11-09T06:00:00.000Z'],
    ['at their first minute', '2026-11-08T21:00:00Z', '2026-11-09T06:00:00.000Z'],
    ['after midnight', '2026-11-09T02:00:00Z', '2026-11-09T06:00:00.000Z'],
    ['a minute before', '2026-11-08T20:59:00Z', null],
    ['at their end', '2026-11-09T06:00:00Z', null],
    // Clocks go back on 25 October 2026 at 03:00 local, forward on 28 March 2027 at 02:00 local.
    ['through the longer night', '2026-10-24T21:00:00Z', '2026-10-25T06:00:00.000Z'],
    ['through the shorter night', '2027-03-27T22:00:00Z', '2027-03-28T05:00:00.000Z'],
  ])('%s', (_name, now, until) => {
    expect(quietUntil(NIGHT, 'medium', at(now), ZONE)?.toISOString() ?? null).toBe(until)
  })

  it('end at the second of two equal times when the first is over, and after an hour that is left out', () => {
    const short = { from: '01:00', until: '02:30' }
    expect(quietUntil(short, 'low', at('2026-10-25T00:00:00Z'), ZONE)).toEqual(at('2026-10-25T00:30:00Z'))
    expect(quietUntil(short, 'low', at('2026-10-25T01:10:00Z'), ZONE)).toEqual(at('2026-10-25T01:30:00Z'))
    expect(quietUntil(short, 'low', at('2027-03-28T00:30:00Z'), ZONE)).toEqual(at('2027-03-28T01:30:00Z'))
  })

  it('are never there for high and highest priority, nor when nobody set them', () => {
    const now = at('2026-11-09T02:00:00Z')
    expect(quietUntil(NIGHT, 'high', now, ZONE)).toBeNull()
    expect(quietUntil(NIGHT, 'highest', now, ZONE)).toBeNull()
    expect(quietUntil({ from: '', until: '' }, 'low', now, ZONE)).toBeNull()
    expect(quietUntil({ from: '07:00', until: '07:00' }, 'low', now, ZONE)).toBeNull()
  })
})

describe('the flood guard', () => {
  const machine = at('2026-11-09T02:00:00Z')
  const ago = (minutes: number) => new Date(machine.getTime() - minutes * 60_000)

  it('lets the tenth go and keeps the eleventh back', () => {
    const nine = Array.from({ length: FLOOD_MAILS - 1 }, () => ago(1))
    expect(floodAnswer(nine, null, machine)).toEqual({ kind: 'goes' })
    expect(floodAnswer([...nine, ago(9.9)], null, machine)).toEqual({ kind: 'folds', summaryAt: ago(-2) })
  })

  it('forgets what is ten minutes old', () => {
    const ten = Array.from({ length: FLOOD_MAILS }, () => ago(10))
    expect(floodAnswer(ten, null, machine)).toEqual({ kind: 'goes' })
  })

  it('gives no second summary within ten minutes', () => {
    const ten = Array.from({ length: FLOOD_MAILS }, () => ago(1))
    expect(floodAnswer(ten, ago(4), machine)).toEqual({ kind: 'folds', summaryAt: ago(-6) })
  })
})

it('keeps nothing of the highest priority waiting', () => {
  expect(waitsForCompany('alert', 'highest')).toBe(false)
  expect(waitsForCompany('alert', 'high')).toBe(true)
  expect(waitsForCompany('escalation', 'high')).toBe(false)
  expect(mayBeFolded('alert', 'highest')).toBe(false)
  expect(mayBeFolded('digest', 'low')).toBe(false)
  expect(mayBeFolded('escalation', 'high')).toBe(true)
})

it('pauses longer after each failure, spread over a third', () => {
  expect([1, 2, 3, 7, 9].map((n) => pauseAfterFailure(n, 0) / 1000)).toEqual([10, 30, 90, 5400, 5400])
  expect(pauseAfterFailure(2, 0.999)).toBeGreaterThanOrEqual(20_000)
  expect(pauseAfterFailure(2, 0.5)).toBe(25_000)
})

it.each([
  [null, false],
  [421, false],
  [451, false],
  [550, true],
  [599, true],
  [600, false],
])('takes reply %s as final: %s', (code, final) => {
  expect(isFinalRefusal(code)).toBe(final)
})

it('gives an address up after three mails that came back within a week, not for late ones', () => {
  const now = at('2026-11-09T07:00:00Z')
  const failed = (days: number) => ({ at: new Date(now.getTime() - days * 86_400_000), action: 'failed' })
  expect(isUndeliverable([failed(1), failed(2)], now)).toBe(false)
  expect(isUndeliverable([failed(1), failed(2), failed(6.9)], now)).toBe(true)
  expect(isUndeliverable([failed(1), failed(2), failed(7.1)], now)).toBe(false)
  expect(isUndeliverable([failed(1), failed(2), { ...failed(0.1), action: 'delayed' }], now)).toBe(false)
})
