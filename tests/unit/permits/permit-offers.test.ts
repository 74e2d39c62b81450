import { expect, test } from 'vitest'
import { isOfferedAct, OFFERED_ACTS, offeredReasons } from '#app/domain/permit-offers.ts'
import type { PermitState } from '#app/domain/permit-words.ts'
import {
  actorOf,
  CREW,
  DEPUTY,
  FROM,
  factsIn,
  HOLDER,
  hours,
  OFFICER,
  PLANNER,
  REQUESTER,
} from '#tests/support/permit-facts.ts'

const NOW = hours(FROM, 6)
const STRANGER = 99

function offered(
  state: PermitState,
  personId: number,
  role: Parameters<typeof actorOf>[1] = 'draft',
): string[] {
  const facts = factsIn(state)
  const now = state === 'requested' || state === 'draft' ? hours(FROM, -24) : NOW
  return OFFERED_ACTS.filter((act) => offeredReasons(facts, actorOf(personId, role), act, now) !== null)
}

test('a live permit offers its holder what a holder does, and a deputy to take it over', () => {
  expect(offered('issued', HOLDER)).toEqual(['revalidate', 'hand-back', 'suspend'])
  expect(offered('issued', DEPUTY)).toEqual(['revalidate', 'hand-over', 'suspend'])
})

test('everybody is offered to stop what is live, and nobody to stop what is not', () => {
  expect(offered('issued', STRANGER, 'none')).toEqual(['suspend'])
  expect(offered('issued', CREW)).toEqual(['suspend'])
  expect(offered('approved', STRANGER, 'none')).toEqual([])
})

test('a request offers its officers a decision and its author to take it back', () => {
  expect(offered('requested', STRANGER, 'approve')).toEqual(['approve', 'return', 'refuse', 'withdraw'])
  expect(offered('requested', REQUESTER)).toEqual(['withdraw'])
})

test('a planner who is an officer too is offered Approve with the reason against it', () => {
  const facts = factsIn('requested')
  const reasons = offeredReasons(facts, actorOf(PLANNER, 'both'), 'approve', hours(FROM, -24))
  expect(reasons).toEqual([expect.stringContaining('You planned the bake')])
})

test('a permit that has ended offers nothing to anybody', () => {
  for (const state of ['refused', 'cancelled', 'lapsed', 'withdrawn', 'discarded'] as const) {
    for (const person of [HOLDER, REQUESTER, OFFICER])
      expect(offered(state, person, 'both'), state).toEqual([])
  }
})

test('only names of acts that have a form are read from an address', () => {
  expect(isOfferedAct('approve')).toBe(true)
  for (const other of ['expire', 'edit', '', null, undefined]) expect(isOfferedAct(other)).toBe(false)
})
