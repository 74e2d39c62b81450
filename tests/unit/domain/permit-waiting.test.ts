import { expect, test } from 'vitest'
import { type WaitingPermit, waitsFor } from '#app/domain/permit-waiting.ts'
import type { PermitState } from '#app/domain/permit-words.ts'

const NOW = new Date('2026-11-09T07:00:00.000Z')
const inHours = (h: number) => new Date(NOW.getTime() + h * 3_600_000)

const PLANNER = 1
const HOLDER = 2
const DEPUTY = 3
const OFFICER = 4
const STRANGER = 5

const officer = { personId: OFFICER, mayDraft: false, mayApprove: true }
const holder = { personId: HOLDER, mayDraft: true, mayApprove: false }
const deputy = { ...holder, personId: DEPUTY }
const stranger = { ...holder, personId: STRANGER }

function permit(state: PermitState, change: Partial<WaitingPermit> = {}): WaitingPermit {
  return {
    state,
    createdBy: PLANNER,
    requestedBy: PLANNER,
    holderId: HOLDER,
    windowFrom: inHours(-50),
    windowTo: inHours(100),
    currentUntil: inHours(8),
    content: { holderId: HOLDER, deputyIds: [DEPUTY] },
    plannerIds: [PLANNER],
    ...change,
  }
}

test('a request waits for an officer who had no hand in it, and for nobody else', () => {
  expect(waitsFor(permit('requested'), officer, NOW)).toMatch(/your decision/)
  expect(waitsFor(permit('requested'), holder, NOW)).toBeNull()
  for (const change of [
    { requestedBy: OFFICER },
    { createdBy: OFFICER },
    { plannerIds: [PLANNER, OFFICER] },
    { holderId: OFFICER },
    { content: { holderId: HOLDER, deputyIds: [OFFICER] } },
  ]) {
    expect(waitsFor(permit('requested', change), officer, NOW), JSON.stringify(change)).toBeNull()
  }
})

test('what was sent back waits for whoever asked', () => {
  const own = permit('returned', { requestedBy: STRANGER })
  expect(waitsFor(own, stranger, NOW)).toMatch(/came back/)
  expect(waitsFor(own, holder, NOW)).toBeNull()
})

test('an approved permit waits for its holder and deputies from a day before its window', () => {
  const soon = permit('approved', { windowFrom: inHours(24) })
  expect(waitsFor(soon, holder, NOW)).toMatch(/accept it on site/)
  expect(waitsFor(soon, deputy, NOW)).toMatch(/accept it on site/)
  expect(waitsFor(soon, stranger, NOW)).toBeNull()
  expect(waitsFor(permit('approved', { windowFrom: inHours(24.1) }), holder, NOW)).toBeNull()
})

test('a live permit waits when its validity nears its end, and asks for a hand-back at the end of the window', () => {
  expect(waitsFor(permit('issued', { currentUntil: inHours(8) }), holder, NOW)).toBeNull()
  expect(waitsFor(permit('issued', { currentUntil: inHours(3) }), deputy, NOW)).toMatch(/revalidated/)
  const last = permit('issued', { currentUntil: inHours(2), windowTo: inHours(2) })
  expect(waitsFor(last, holder, NOW)).toMatch(/hand it back/)
})

test('a permit that has run out asks for its end at once, written down or not', () => {
  const unwritten = permit('issued', { currentUntil: NOW })
  expect(waitsFor(unwritten, holder, NOW)).toMatch(/run out/)
  expect(waitsFor(unwritten, officer, NOW)).toMatch(/run out/)
  expect(waitsFor(permit('expired'), deputy, NOW)).toMatch(/run out/)
})

test('a suspended permit waits for the officer and the holder, a handed-back one for the officer', () => {
  expect(waitsFor(permit('suspended'), officer, NOW)).toMatch(/suspended/)
  expect(waitsFor(permit('suspended'), holder, NOW)).toMatch(/suspended/)
  expect(waitsFor(permit('suspended'), deputy, NOW)).toBeNull()
  expect(waitsFor(permit('handed-back'), officer, NOW)).toMatch(/inspect/)
  expect(waitsFor(permit('handed-back'), holder, NOW)).toBeNull()
})

test('nothing that has ended waits for anybody', () => {
  for (const state of ['refused', 'cancelled', 'lapsed', 'withdrawn', 'discarded'] as const) {
    for (const actor of [officer, holder, deputy, stranger]) {
      expect(waitsFor(permit(state), actor, NOW)).toBeNull()
    }
  }
})

test('a role that neither drafts nor approves is waited for by nothing', () => {
  const manager = { personId: HOLDER, mayDraft: false, mayApprove: false }
  for (const state of [
    'requested',
    'returned',
    'approved',
    'issued',
    'suspended',
    'expired',
    'handed-back',
  ] as const) {
    expect(waitsFor(permit(state, { currentUntil: inHours(1) }), manager, NOW)).toBeNull()
  }
})
