import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { instantText } from '#app/domain/instant-text.ts'
import { dueAct, nextDue, type PermitTimes, stateAsOf } from '#app/domain/permit-clock.ts'
import { PERMIT_STATES, type PermitState } from '#app/domain/permit-words.ts'

const at = (text: string) => new Date(text)
const ms = (instant: Date, by: number) => new Date(instant.getTime() + by)

/** HSP-2026-031 of an ordinary week. */
function permit(state: PermitState, more: Partial<PermitTimes> = {}): PermitTimes {
  return {
    state,
    windowFrom: at('2026-11-04T06:00:00+01:00'),
    windowTo: at('2026-11-13T18:00:00+01:00'),
    currentUntil: at('2026-11-09T18:00:00+01:00'),
    ...more,
  }
}

describe('the very second', () => {
  const end = at('2026-11-09T18:00:00+01:00')

  test.each<PermitState>(['issued', 'suspended'])('%s until 18:00 has run out at 18:00:00.000', (state) => {
    expect(stateAsOf(permit(state), ms(end, -1))).toEqual({ state, due: null })
    expect(stateAsOf(permit(state), end)).toEqual({
      state: 'expired',
      due: { act: 'expire', toState: 'expired', at: end, because: 'revalidation' },
    })
  })

  test('an approved one lapses two hours after the beginning of its window', () => {
    const due = at('2026-11-04T08:00:00+01:00')
    expect(stateAsOf(permit('approved'), ms(due, -1)).state).toBe('approved')
    expect(stateAsOf(permit('approved'), due)).toMatchObject({
      state: 'lapsed',
      due: { act: 'lapse', at: due },
    })
  })
})

describe('which end comes first', () => {
  test('the window, where the validity reaches as far or beyond it', () => {
    const windowTo = at('2026-11-09T18:00:00+01:00')
    expect(nextDue(permit('issued', { windowTo }))).toMatchObject({ at: windowTo, because: 'window' })
    expect(nextDue(permit('issued', { windowTo, currentUntil: ms(windowTo, 1) }))).toMatchObject({
      at: windowTo,
      because: 'window',
    })
    expect(nextDue(permit('issued', { windowTo, currentUntil: ms(windowTo, -1) }))).toMatchObject({
      because: 'revalidation',
    })
  })

  test('what is noticed late keeps the time at which it was due', () => {
    const due = dueAct(permit('issued'), at('2027-03-01T00:00:00Z'))
    expect(due?.at).toEqual(at('2026-11-09T18:00:00+01:00'))
  })

  test('one without times waits for nothing', () => {
    const none = { windowFrom: null, windowTo: null, currentUntil: null }
    for (const state of PERMIT_STATES) expect(nextDue(permit(state, none))).toBeNull()
  })
})

test('time does nothing to any other state', () => {
  const moving: PermitState[] = ['approved', 'issued', 'suspended']
  for (const state of PERMIT_STATES.filter((one) => !moving.includes(one))) {
    expect(stateAsOf(permit(state), at('2030-01-01T00:00:00Z'))).toEqual({ state, due: null })
  }
})

describe('both nights on which the clock changes in Vienna count elapsed hours', () => {
  const zone = 'Europe/Vienna'

  test('autumn: twelve hours from 20:00 end at 07:00, one hour earlier by the wall than usual', () => {
    const signed = at('2026-10-24T20:00:00+02:00')
    const currentUntil = ms(signed, 12 * 3_600_000)
    expect(instantText(currentUntil, zone)).toBe('2026-10-25 07:00 (UTC+01:00)')
    const live = permit('issued', { currentUntil })
    expect(stateAsOf(live, ms(currentUntil, -1)).state).toBe('issued')
    expect(stateAsOf(live, currentUntil).state).toBe('expired')
  })

  test('autumn: of the hour that comes twice the right one ends it', () => {
    const first = at('2026-10-25T02:30:00+02:00')
    const second = at('2026-10-25T02:30:00+01:00')
    const live = permit('issued', { currentUntil: second })
    expect(stateAsOf(live, first).state).toBe('issued')
    expect(stateAsOf(live, second).state).toBe('expired')
    expect(stateAsOf(permit('issued', { currentUntil: first }), ms(second, -1)).state).toBe('expired')
  })

  test('spring: an approval for 01:30 lapses at 04:30 by the wall', () => {
    const windowFrom = at('2027-03-28T01:30:00+01:00')
    const approved = permit('approved', { windowFrom })
    const due = nextDue(approved)?.at ?? windowFrom
    expect(instantText(due, zone)).toBe('2027-03-28 04:30 (UTC+02:00)')
    expect(stateAsOf(approved, at('2027-03-28T04:29:59+02:00')).state).toBe('approved')
    expect(stateAsOf(approved, at('2027-03-28T04:30:00+02:00')).state).toBe('lapsed')
  })

  test('spring: twelve hours from 20:00 end at 09:00', () => {
    const currentUntil = ms(at('2027-03-27T20:00:00+01:00'), 12 * 3_600_000)
    expect(instantText(currentUntil, zone)).toBe('2027-03-28 09:00 (UTC+02:00)')
    const live = permit('suspended', { currentUntil, windowTo: at('2027-04-01T00:00:00Z') })
    expect(stateAsOf(live, at('2027-03-28T08:59:59+02:00')).state).toBe('suspended')
    expect(stateAsOf(live, at('2027-03-28T09:00:00+02:00')).state).toBe('expired')
  })
})

const instant = fc.date({
  min: at('2026-01-01T00:00:00Z'),
  max: at('2028-01-01T00:00:00Z'),
  noInvalidDate: true,
})

test('once out of time it stays so, and looking again later finds the same end', () => {
  fc.assert(
    fc.property(
      fc.constantFrom(...PERMIT_STATES),
      fc.tuple(instant, instant, instant),
      fc.tuple(instant, instant),
      (state, [windowFrom, windowTo, currentUntil], looks) => {
        const times = { state, windowFrom, windowTo, currentUntil }
        const [early, late] = [...looks].sort((a, b) => a.getTime() - b.getTime()) as [Date, Date]
        const first = stateAsOf(times, early)
        const second = stateAsOf(times, late)
        if (first.due !== null) expect(second).toEqual(first)
        if (second.due !== null) {
          expect(second.due.at <= late).toBe(true)
          expect(stateAsOf(times, ms(second.due.at, -1)).state).toBe(state)
        }
        // What has been written down does not run out again.
        expect(stateAsOf({ ...times, state: second.state }, late).state).toBe(second.state)
      },
    ),
  )
})
