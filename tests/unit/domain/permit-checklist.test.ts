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
      windowTo: AT,
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
  const items = permitChecklist(facts(state, change))?.items ?? []
  return items.flatMap(({ status, missing }) => (status === 'done' ? [] : missing))
}

const act = (name: PermitFacts['acts'][number]['act']) => ({
  act: name,
  toState: 'suspended' as const,
  personId: 1,
  at: AT,
  detail: null,
})

test('a complete request without conflicts has nothing in its way', () => {
  expect(open('requested')).toEqual([])
})

test('a value that the site has not adopted is "not set", which is not "not done"', () => {
  const list = permitChecklist(
    facts('requested', {
      unadopted: [
        { hazard: 'hot-surface', threshold: 'contact-10s', text: 'contact for 10 s: not set by site' },
      ],
    }),
  )
  expect(list?.items.filter(({ status }) => status === 'not-set')).toHaveLength(1)
  expect(list?.items.filter(({ status }) => status === 'not-done')).toHaveLength(0)
})

test('a block stays in the way whatever has been ruled; a ruling clears only what it may', () => {
  const ruling = { allowed: true, stale: false, text: 'barrier', by: 'Ione', at: AT }
  expect(open('requested', { conflicts: [conflict({ effect: 'block', ruling })] })).toHaveLength(1)
  expect(open('requested', { conflicts: [conflict({ ruling })] })).toEqual([])
  expect(open('requested', { conflicts: [conflict({})] })[0]).toMatch(/No ruling yet/)
  expect(open('requested', { conflicts: [conflict({ ruling: { ...ruling, stale: true } })] })[0]).toMatch(
    /other facts/,
  )
  expect(open('requested', { conflicts: [conflict({ ruling: { ...ruling, allowed: false } })] })[0]).toMatch(
    /not allowed/,
  )
  expect(open('requested', { conflicts: [conflict({ effect: 'warning' })] })).toEqual([])
})

test('a point without a lock, and one whose lock nobody has verified, are told apart', () => {
  expect(open('issued', { points: [] })).toEqual(['IP-1: no lock'])
  const [held] = facts('issued').points
  const unverified = [
    { ...held, tag: 'IP-1', lockNumber: 'L-1', appliedBy: 2, verifiedBy: null, holds: false, removed: false },
  ]
  expect(open('issued', { points: unverified })).toEqual(['IP-1: locked, not verified'])
})

test('a site check counts for the approval or the stop that it followed', () => {
  expect(open('approved', { acts: [act('site-check'), act('approve')] })).toContain('not since the approval')
  expect(open('approved', { acts: [act('approve'), act('site-check')] })).toEqual(['not yet'])
  expect(open('suspended', { acts: [act('site-check'), act('suspend'), act('made-safe')] })).toEqual([
    'not since the stop',
  ])
  expect(open('suspended', { acts: [act('suspend'), act('made-safe'), act('site-check')] })).toEqual([])
})

test('that nobody knows of the heating is in the way of a cancellation; a lock that hangs is too', () => {
  const unknown = { on: null, knownAt: null, since: null, basis: 'nothing' as const, text: 'nobody knows' }
  expect(open('handed-back', { heating: unknown, locksOut: ['L-109'] })).toEqual([
    'nobody knows',
    'L-109 still hangs',
  ])
})

test('a test that is overdue is in the way of what is live', () => {
  const overdue = {
    kind: 'oxygen' as const,
    place: 'bay 5',
    state: 'overdue' as const,
    nextDueAt: AT,
    text: 'Oxygen at bay 5 was due at 15:00',
  }
  expect(open('issued', { tests: [overdue] })).toEqual([overdue.text])
})

test('permits that have ended have no list', () => {
  const without = PERMIT_STATES.filter((state) => permitChecklist(facts(state)) === null)
  expect(without).toEqual(['refused', 'cancelled', 'lapsed', 'withdrawn', 'discarded'])
})
