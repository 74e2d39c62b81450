import { expect, test } from 'vitest'
import { permitChecklist } from '#app/domain/permit-checklist.ts'
import { emptyPermitContent } from '#app/domain/permit-content.ts'
import type { ConflictFact, PermitFacts } from '#app/domain/permit-facts.ts'
import { PERMIT_STATES, type PermitState } from '#app/domain/permit-words.ts'

const AT = new Date('2026-11-04T15:00:00.000Z')

const point = {
  tag: 'IP-1',
  isolates: 'vent valve',
  required: 'shut',
  purpose: 'to-heat' as const,
  boxed: false,
}

/** A permit with one point, in order in every respect unless a test says otherwise. */
function facts(state: PermitState, change: Partial<PermitFacts> = {}): PermitFacts {
  return {
    permit: {
      number: 'HSP-2026-001',
      state,
      revision: 3,
      version: 1,
      approvedVersion: null,
      createdBy: 1,
      requestedBy: 1,
      approvedBy: null,
      holderId: null,
      windowFrom: AT,
      windowTo: new Date(AT.getTime() + 100 * 3_600_000),
      currentUntil: null,
      extensions: 0,
      extendedHours: 0,
      content: { ...emptyPermitContent(), points: [point] },
      approvedContent: null,
    },
    acts: [],
    plannerIds: [],
    missing: [],
    unadopted: [],
    unprepared: [],
    conflicts: [],
    points: [{ tag: 'IP-1', lockNumber: 'L-1', appliedBy: 2, verifiedBy: 3, holds: true, removed: false }],
    locksOut: [],
    tests: [],
    heating: { on: false, knownAt: AT, since: AT, basis: 'supply', text: 'HX-1 is off' },
    policy: { extensionAllowed: true, keepDays: 1826 },
    ...change,
  }
}

function conflict(change: Partial<ConflictFact>): ConflictFact {
  return {
    key: 'K3:work:1',
    rule: 'K3',
    effect: 'ruling',
    text: 'People at 745 m.',
    wayOut: 'Move them.',
    place: null,
    ruling: null,
    ...change,
  }
}

function open(state: PermitState, change: Partial<PermitFacts> = {}): string[] {
  const items = permitChecklist(facts(state, change), AT)?.items ?? []
  return items.flatMap(({ status, missing }) => (status === 'done' ? [] : missing))
}

/** An act so many hours after the moment of these tests. */
function act(
  name: PermitFacts['acts'][number]['act'],
  hours: number,
  detail: unknown = null,
): PermitFacts['acts'][number] {
  return {
    act: name,
    toState: 'suspended',
    personId: 1,
    at: new Date(AT.getTime() + hours * 3_600_000),
    detail,
  }
}

test('a complete request without conflicts has nothing in its way', () => {
  expect(open('requested')).toEqual([])
})

test('a value that the site has not adopted is "not set", which is not "not done"', () => {
  const list = permitChecklist(
    facts('requested', {
      unadopted: [{ hazard: 'hot-surface', threshold: 'contact-10s', text: 'contact for 10 s.' }],
    }),
    AT,
  )
  expect(list?.items.filter(({ status }) => status === 'not-set')).toHaveLength(1)
  expect(list?.items.filter(({ status }) => status === 'not-done')).toHaveLength(0)
})

test('a tube without its tests is told before the request and before the approval, and blocks both', () => {
  const unprepared = [{ key: 'isolation-test-SG-11', text: 'SG-11 has no accepted isolation test.' }]
  for (const state of ['draft', 'returned', 'requested'] as const) {
    expect(open(state, { unprepared })).toContain('SG-11 has no accepted isolation test.')
  }
  expect(open('issued', { unprepared })).toEqual([])
})

test('a block stays in the way whatever has been ruled; a ruling clears only what it may', () => {
  const ruling = { allowed: true, stale: false, text: 'barrier', by: 'Ione', at: AT }
  expect(open('requested', { conflicts: [conflict({ effect: 'block', ruling })] })).toHaveLength(1)
  expect(open('requested', { conflicts: [conflict({ ruling })] })).toEqual([])
  expect(open('requested', { conflicts: [conflict({})] })).toHaveLength(1)
  expect(open('requested', { conflicts: [conflict({ ruling: { ...ruling, stale: true } })] })).toHaveLength(1)
  expect(
    open('requested', { conflicts: [conflict({ ruling: { ...ruling, allowed: false } })] }),
  ).toHaveLength(1)
  expect(open('requested', { conflicts: [conflict({ effect: 'warning' })] })).toEqual([])
})

test('a point without a lock, and one whose lock nobody has verified, are told apart', () => {
  expect(open('issued', { points: [] })).toEqual([expect.stringContaining('IP-1 is not locked')])
  const unverified = facts('issued').points.map((point) => ({ ...point, verifiedBy: null, holds: false }))
  expect(open('issued', { points: unverified })).toEqual([expect.stringContaining('not verified')])
})

test('a site check counts for the approval or the stop that it followed', () => {
  const checked = { barriersPlaced: true, signsPosted: true }
  const before = [act('site-check', -2, checked), act('approve', -1)]
  const since = [act('approve', -2), act('site-check', -1, checked)]
  expect(open('approved', { acts: before })).toHaveLength(1)
  expect(open('approved', { acts: since })).toEqual([])
})

test('a stop asks for what was made safe since, and a new site check', () => {
  const held = { currentUntil: new Date(AT.getTime() + 3_600_000) }
  const suspended = facts('suspended')
  const permit = { ...suspended.permit, ...held }
  const stopped = [act('made-safe', -3), act('site-check', -3), act('suspend', -2)]
  expect(open('suspended', { permit, acts: stopped })).toHaveLength(2)
  const after = [act('made-safe', -1), act('site-check', -1, { barriersPlaced: true, signsPosted: true })]
  expect(open('suspended', { permit, acts: [...stopped, ...after] })).toEqual([])
})

test('a lock that hangs and a heating that is on are in the way of a cancellation', () => {
  const on = { on: true, knownAt: AT, since: AT, basis: 'supply' as const, text: 'HX-1 at 1083 A' }
  expect(open('handed-back', { heating: on, locksOut: ['L-109'] })).toEqual([
    expect.stringContaining('Heating is recorded as on'),
    expect.stringContaining('L-109'),
  ])
})

test('a test that is overdue is in the way of what is live', () => {
  const content = {
    ...facts('issued').permit.content,
    tests: [{ kind: 'oxygen' as const, place: 'bay 5', low: 19.5, high: 23.5, unit: '%', everyHours: 12 }],
  }
  const overdue = {
    kind: 'oxygen' as const,
    place: 'bay 5',
    state: 'overdue' as const,
    takenAt: new Date(AT.getTime() - 13 * 3_600_000),
    nextDueAt: AT,
    text: 'Oxygen at bay 5 was due at 15:00',
  }
  const permit = { ...facts('issued').permit, content }
  expect(open('issued', { permit, tests: [overdue] })).toEqual([expect.stringContaining('too old')])
  expect(open('issued', { permit, tests: [{ ...overdue, state: 'good' }] })).toEqual([])
})

test('permits that have ended have no list', () => {
  const without = PERMIT_STATES.filter((state) => permitChecklist(facts(state), AT) === null)
  expect(without).toEqual(['refused', 'cancelled', 'lapsed', 'withdrawn', 'discarded'])
})
