import { describe, expect, test } from 'vitest'
import type { HeatingFact, TestFact } from '#app/domain/permit-facts.ts'
import type { PermitState } from '#app/domain/permit-words.ts'
import {
  type DangerFacts,
  dangersOf,
  type OpenEvent,
  occurrenceKey,
  settleEvents,
} from '#app/domain/safety-events.ts'

const NOW = new Date('2026-11-09T18:00:00.000Z')
const EARLIER = new Date('2026-11-09T17:00:00.000Z')
const LONG_AGO = new Date('2026-11-05T08:00:00.000Z')
const when = (at: Date) => at.toISOString().slice(5, 16)

function heating(on: boolean | null, since: Date | null = LONG_AGO): HeatingFact {
  return { on, since, knownAt: NOW, basis: 'supply', text: 'What the supply says.' }
}

function facts(state: PermitState, on: boolean | null, more: Partial<DangerFacts> = {}): DangerFacts {
  return {
    number: 'HSP-2026-031',
    segments: ['SG-05'],
    state,
    stateSince: EARLIER,
    revalidationMissed: false,
    coveredByOther: false,
    heating: heating(on),
    tests: [],
    ...more,
  }
}

const kinds = (given: DangerFacts) => dangersOf(given, NOW, when).map(({ kind }) => kind)

const open = (given: DangerFacts): OpenEvent[] =>
  dangersOf(given, NOW, when).map((danger, id) => ({
    id,
    kind: danger.kind,
    occurrenceKey: occurrenceKey('HSP-2026-031', danger),
  }))
const settle = (given: DangerFacts, events: OpenEvent[]) =>
  settleEvents(given, events, dangersOf(given, NOW, when))

describe('what is dangerous', () => {
  test.each<[PermitState, string[]]>([
    ['draft', ['heating-without-live-permit']],
    ['requested', ['heating-without-live-permit']],
    ['approved', ['heating-without-live-permit']],
    ['issued', []],
    ['suspended', ['suspended-while-heated', 'permit-suspended']],
    ['expired', ['expired-while-heated']],
    ['handed-back', ['heating-without-live-permit']],
    ['cancelled', ['heating-without-live-permit']],
    ['lapsed', ['heating-without-live-permit']],
  ])('heated while %s: %j', (state, expected) => {
    expect(kinds(facts(state, true))).toEqual(expected)
  })

  test('off and unknown are no finding', () => {
    for (const on of [false, null]) {
      expect(kinds(facts('expired', on))).toEqual([])
      expect(kinds(facts('approved', on))).toEqual([])
    }
  })

  test('another permit that is live for all of it answers for the heat', () => {
    expect(kinds(facts('approved', true, { coveredByOther: true }))).toEqual([])
    expect(kinds(facts('suspended', true, { coveredByOther: true }))).toEqual(['permit-suspended'])
    const expired = facts('expired', true)
    expect(settle(facts('expired', true, { coveredByOther: true }), open(expired)).end).toEqual([
      { id: 0, why: 'Another permit answers for it.' },
    ])
  })

  test('a missed revalidation is said beside the heat', () => {
    expect(kinds(facts('expired', true, { revalidationMissed: true }))).toEqual([
      'expired-while-heated',
      'revalidation-missed',
    ])
    expect(kinds(facts('suspended', false, { revalidationMissed: true }))).toEqual(['permit-suspended'])
  })

  test('it begins with the later of the state and the heat', () => {
    const [old] = dangersOf(facts('expired', true), NOW, when)
    expect(old?.startedAt).toEqual(EARLIER)
    const [fresh] = dangersOf(facts('expired', true, { heating: heating(true, NOW) }), NOW, when)
    expect(fresh?.startedAt).toEqual(NOW)
    const [vague] = dangersOf(facts('expired', true, { heating: heating(true, null) }), NOW, when)
    expect(vague?.startedAt).toEqual(NOW)
  })

  test('heat without any permit names the segment', () => {
    const [found] = dangersOf(facts('draft', true, { number: null }), NOW, when)
    expect(found?.text).toBe('SG-05 is heated and no permit for it is under way. What the supply says.')
  })

  test('an overdue test counts while the permit is live', () => {
    const tests: TestFact[] = [
      { kind: 'oxygen', place: 'bay 5', state: 'overdue', nextDueAt: EARLIER, takenAt: LONG_AGO, text: '' },
      { kind: 'cut-out', place: '', state: 'good', nextDueAt: null, takenAt: LONG_AGO, text: '' },
    ]
    expect(dangersOf(facts('issued', true, { tests }), NOW, when)).toEqual([
      {
        kind: 'test-overdue',
        startedAt: EARLIER,
        what: 'oxygen:bay 5',
        text: 'HSP-2026-031 (SG-05): the test “Oxygen” at bay 5 was due again at 11-09T17:00.',
      },
    ])
    expect(kinds(facts('handed-back', false, { tests }))).toEqual([])
  })
})

describe('what is written down and what ends', () => {
  test('found twice it is the same event', () => {
    const expired = facts('expired', true)
    expect(settle(expired, []).begin).toHaveLength(1)
    expect(settle(expired, open(expired))).toEqual({ begin: [], end: [] })
    const later = facts('expired', true, { heating: heating(true, NOW) })
    expect(settle(later, open(expired))).toEqual({ begin: [], end: [] })
  })

  test('a new state does not end what the heat began; not knowing ends nothing; off ends it', () => {
    const events = open(facts('suspended', true)).filter(({ kind }) => kind === 'suspended-while-heated')
    expect(settle(facts('expired', true), events)).toMatchObject({
      begin: [{ kind: 'expired-while-heated' }],
      end: [],
    })
    expect(settle(facts('handed-back', null), events).end).toEqual([])
    expect(settle(facts('cancelled', true), events).end).toEqual([])
    expect(settle(facts('cancelled', false), events).end).toEqual([{ id: 0, why: 'What the supply says.' }])
    expect(settle(facts('issued', true), events).end).toEqual([{ id: 0, why: 'HSP-2026-031 is live.' }])
  })

  test('a suspension ends with the suspension, and oxygen is not ended here', () => {
    const events = open(facts('suspended', false))
    expect(settle(facts('issued', false), events).end).toEqual([
      { id: 0, why: 'HSP-2026-031 is issued (live).' },
    ])
    const oxygen: OpenEvent[] = [{ id: 9, kind: 'low-oxygen', occurrenceKey: 'low-oxygen:SG-05' }]
    expect(settle(facts('issued', false), oxygen).end).toEqual([])
  })

  test('each overdue test is an event of its own and ends when it is taken', () => {
    const overdue = (place: string, nextDueAt = EARLIER): TestFact => ({
      kind: 'oxygen',
      place,
      state: 'overdue',
      nextDueAt,
      takenAt: LONG_AGO,
      text: '',
    })
    const two = facts('issued', true, { tests: [overdue('west'), overdue('east')] })
    const events = open(two)
    expect(events).toHaveLength(2)
    expect(settle(facts('issued', true, { tests: [overdue('east')] }), events)).toEqual({
      begin: [],
      end: [{ id: 0, why: 'The test has been taken.' }],
    })
    expect(
      settle(facts('issued', true, { tests: [overdue('west'), overdue('east', NOW)] }), events),
    ).toMatchObject({
      begin: [{ what: 'oxygen:east', startedAt: NOW }],
      end: [{ id: 1 }],
    })
  })
})
