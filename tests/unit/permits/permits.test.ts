import { describe, expect, test } from 'vitest'
import type { ConflictFact, PermitActor, PermitFacts } from '#app/domain/permit-facts.ts'
import type { Reason } from '#app/domain/permit-reasons.ts'
import { PERMIT_STATES, type PermitAct, type PermitState } from '#app/domain/permit-words.ts'
import { type ActInput, PERMIT_RULES, permitStep, productStep, standsInTheWay } from '#app/domain/permits.ts'
import { fullContent } from '#tests/support/permit-content.ts'
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
  TO,
} from '#tests/support/permit-facts.ts'

type PersonAct = Exclude<PermitAct, 'expire' | 'lapse' | 'draft'>

const HAND_BACK = {
  outcome: 'complete',
  plantState: 'cold, bars off',
  peopleClear: true,
  toolsOut: true,
  hottestC: 31,
  locks: 'left',
  locksText: 'for the permit after this',
}

/** The right person for each act, what they say, and the moment: hours after the window's beginning. */
const DONE: Record<PersonAct, { by: PermitActor; detail?: unknown; at?: number }> = {
  edit: { by: actorOf(REQUESTER) },
  request: { by: actorOf(REQUESTER), at: -40 },
  return: { by: actorOf(OFFICER, 'approve') },
  refuse: { by: actorOf(OFFICER, 'approve') },
  approve: { by: actorOf(OFFICER, 'approve'), at: -20 },
  'change-terms': { by: actorOf(REQUESTER), at: 1 },
  withdraw: { by: actorOf(REQUESTER), at: 1 },
  discard: { by: actorOf(REQUESTER) },
  'site-check': { by: actorOf(HOLDER), detail: { barriersPlaced: true, signsPosted: true }, at: 1 },
  accept: { by: actorOf(HOLDER), detail: { onSite: true }, at: 1 },
  'hand-over': { by: actorOf(DEPUTY), detail: { outgoingId: HOLDER, how: 'at-site' }, at: 6 },
  revalidate: { by: actorOf(DEPUTY), detail: { onSite: true }, at: 6 },
  extend: { by: actorOf(OFFICER, 'approve'), detail: { hours: 24, recheck: 'locks and tests' }, at: 6 },
  suspend: { by: actorOf(99, 'none'), at: 6 },
  'made-safe': {
    by: actorOf(CREW),
    detail: { who: 'Somebody', at: '2026-11-10T10:30:00.000Z', how: 'set off' },
    at: 6,
  },
  resume: { by: actorOf(OFFICER, 'approve'), at: 6 },
  'hand-back': { by: actorOf(HOLDER), detail: HAND_BACK, at: 6 },
  'return-to-holder': { by: actorOf(OFFICER, 'approve'), at: 9 },
  cancel: { by: actorOf(OFFICER, 'approve'), detail: { inspection: 'clean and cold' }, at: 9 },
}

function attempt(
  facts: PermitFacts,
  act: PersonAct,
  other: { by?: PermitActor; detail?: unknown; at?: number; reason?: string } = {},
) {
  const usual = DONE[act]
  const input: ActInput = {
    reason: other.reason ?? 'for a test',
    detail: 'detail' in other ? other.detail : usual.detail,
  }
  return permitStep(facts, other.by ?? usual.by, act, input, hours(FROM, other.at ?? usual.at ?? 1))
}

function codes(outcome: ReturnType<typeof attempt>): string[] {
  return outcome.kind === 'refused'
    ? outcome.reasons.map(({ code, field }) => (field === undefined ? code : `${code}:${field}`))
    : []
}

/** Out of which state each act leads into which, written down from the description of the life cycle. */
const LIFE: Record<PersonAct, Partial<Record<PermitState, PermitState>>> = {
  edit: { draft: 'draft', returned: 'returned' },
  request: { draft: 'requested', returned: 'requested' },
  return: { requested: 'returned' },
  refuse: { requested: 'refused' },
  approve: { requested: 'approved' },
  'change-terms': { approved: 'requested', suspended: 'requested' },
  withdraw: { requested: 'withdrawn', returned: 'withdrawn', approved: 'withdrawn' },
  discard: { draft: 'discarded' },
  'site-check': { approved: 'approved', issued: 'issued', suspended: 'suspended' },
  accept: { approved: 'issued' },
  'hand-over': { issued: 'issued', suspended: 'suspended' },
  revalidate: { issued: 'issued' },
  extend: { issued: 'issued' },
  suspend: { issued: 'suspended' },
  'made-safe': { suspended: 'suspended', expired: 'expired' },
  resume: { suspended: 'issued' },
  'hand-back': { issued: 'handed-back', suspended: 'handed-back', expired: 'handed-back' },
  'return-to-holder': { 'handed-back': 'suspended' },
  cancel: { 'handed-back': 'cancelled' },
}

/** Facts in which nothing stands in the way of the act but, maybe, the state. */
function ready(act: PersonAct, state: PermitState): PermitFacts {
  if (['withdraw', 'refuse'].includes(act)) return factsIn(state, { locksOut: [] })
  // New terms of work that had begun need a window that still lies ahead.
  if (act === 'change-terms' && state === 'suspended') {
    const content = fullContent({ from: hours(FROM, 8).toISOString() })
    return factsIn(state, { permit: { content, approvedContent: fullContent() } })
  }
  return factsIn(state)
}

describe.each(Object.keys(LIFE) as PersonAct[])('%s', (act) => {
  test.each(PERMIT_STATES)('of a permit that is %s', (state) => {
    const outcome = attempt(ready(act, state), act)
    const to = LIFE[act][state]
    if (to === undefined) {
      const [first] = outcome.kind === 'refused' ? outcome.reasons : []
      expect(first).toMatchObject({ kind: 'state', code: 'wrong-state' })
    } else {
      expect(outcome).toMatchObject({ kind: 'step', act, from: state, to })
    }
  })
})

test('every act of the table is tried above or is the product’s own', () => {
  expect(Object.keys(PERMIT_RULES).sort()).toEqual([...Object.keys(LIFE), 'draft', 'expire', 'lapse'].sort())
})

test('no person does what follows from time alone', () => {
  const facts = factsIn('issued')
  expect(standsInTheWay(facts, actorOf(OFFICER, 'both'), 'expire', TO)).toMatchObject([{ kind: 'person' }])
})

describe('two people, always', () => {
  const both = (personId: number) => actorOf(personId, 'both')
  test.each<[string, PersonAct, PermitFacts, PermitActor, string[]]>([
    [
      'who asked does not approve',
      'approve',
      factsIn('requested'),
      both(REQUESTER),
      ['own-draft', 'own-request'],
    ],
    ['who planned does not approve', 'approve', factsIn('requested'), both(PLANNER), ['own-plan']],
    [
      'the named holder does not approve',
      'approve',
      factsIn('requested'),
      both(HOLDER),
      ['own-holding', 'own-verification'],
    ],
    ['a deputy does not approve', 'approve', factsIn('requested'), both(DEPUTY), ['own-holding']],
    [
      'who verified a point does not approve',
      'approve',
      factsIn('requested', {
        points: [{ tag: 'IP-1', lockNumber: 'L', appliedBy: 3, verifiedBy: 44, holds: true, removed: false }],
      }),
      both(44),
      ['own-verification'],
    ],
    [
      'who edited once does not approve',
      'approve',
      factsIn('requested', {
        acts: [{ act: 'edit', toState: 'draft', personId: 44, at: FROM, detail: null }],
      }),
      both(44),
      ['own-draft'],
    ],
    [
      'who changed its terms does not approve',
      'approve',
      factsIn('requested', {
        acts: [{ act: 'change-terms', toState: 'requested', personId: 44, at: FROM, detail: null }],
      }),
      both(44),
      ['own-request'],
    ],
    [
      'who held it before does not approve new terms',
      'approve',
      factsIn('requested', {
        acts: [{ act: 'hand-over', toState: 'issued', personId: 44, at: FROM, detail: null }],
      }),
      both(44),
      ['own-holding'],
    ],
    ['a technician does not approve', 'approve', factsIn('requested'), actorOf(99), ['no-officer']],
    ['a manager does not cancel', 'cancel', factsIn('handed-back'), actorOf(99, 'none'), ['no-officer']],
    ['who held it does not cancel it', 'cancel', factsIn('handed-back'), both(HOLDER), ['own-holding']],
    ['who held it does not resume it', 'resume', factsIn('suspended'), both(HOLDER), ['own-holding']],
    ['who asked does not extend', 'extend', factsIn('issued'), both(REQUESTER), ['own-draft', 'own-request']],
    [
      'who approved does not accept, also as a deputy',
      'accept',
      factsIn('approved', { permit: { content: fullContent({ deputyIds: [OFFICER] }) } }),
      both(OFFICER),
      ['own-approval'],
    ],
    [
      'who approved does not revalidate',
      'revalidate',
      factsIn('issued', { permit: { content: fullContent({ deputyIds: [OFFICER] }) } }),
      both(OFFICER),
      ['own-approval'],
    ],
    [
      'who approved an earlier version does not accept',
      'accept',
      factsIn('approved', {
        permit: { content: fullContent({ deputyIds: [77] }) },
        acts: [
          { act: 'approve', toState: 'approved', personId: 77, at: FROM, detail: null },
          {
            act: 'site-check',
            toState: 'approved',
            personId: 1,
            at: FROM,
            detail: { barriersPlaced: true, signsPosted: true },
          },
        ],
      }),
      both(77),
      ['own-approval'],
    ],
    ['somebody not named does not accept', 'accept', factsIn('approved'), actorOf(CREW), ['not-named']],
    [
      'a deputy does not hand back what another holds',
      'hand-back',
      factsIn('issued'),
      actorOf(DEPUTY),
      ['not-holder'],
    ],
    [
      'an officer does not hand back',
      'hand-back',
      factsIn('issued'),
      actorOf(OFFICER, 'approve'),
      ['not-holder'],
    ],
    ['who holds it takes nothing over', 'hand-over', factsIn('issued'), actorOf(HOLDER), ['holds-already']],
    ['a contributor drafts nothing', 'edit', factsIn('draft'), actorOf(99, 'none'), ['no-draft']],
  ])('%s', (_, act, facts, by, expected) => {
    expect(codes(attempt(facts, act, { by }))).toEqual(expected)
  })

  test('an officer who approved may resume, inspect and cancel', () => {
    expect(attempt(factsIn('suspended'), 'resume').kind).toBe('step')
    expect(attempt(factsIn('handed-back'), 'cancel').kind).toBe('step')
  })

  test('once it has run out, a named deputy may hand it back for a holder who is away', () => {
    const at = 20
    expect(attempt(factsIn('expired'), 'hand-back', { by: actorOf(DEPUTY), at }).kind).toBe('step')
    expect(codes(attempt(factsIn('expired'), 'hand-back', { by: actorOf(CREW), at }))).toEqual(['not-holder'])
  })

  test('anybody at all stops work', () => {
    expect(attempt(factsIn('issued'), 'suspend', { by: actorOf(12345, 'none') })).toMatchObject({
      to: 'suspended',
      effects: [{ kind: 'safety-event', event: 'permit-suspended' }],
    })
  })

  test('an approving role works 24 hours after its confirmation, and not a second earlier', () => {
    const now = hours(FROM, -20)
    const since = (ms: number) => ({
      ...actorOf(55, 'approve'),
      approvingSince: new Date(now.getTime() - ms),
    })
    const day = 24 * 3_600_000
    expect(attempt(factsIn('requested'), 'approve', { by: since(day) }).kind).toBe('step')
    const refused = attempt(factsIn('requested'), 'approve', { by: since(day - 1000) })
    expect(refused).toMatchObject({ reasons: [{ kind: 'person', code: 'young-grant' }] })
    expect((refused as { reasons: Reason[] }).reasons[0]?.text).toContain('23 h 59 min')
    expect(codes(attempt(factsIn('handed-back'), 'cancel', { by: since(day - 30 * 3_600_000) }))).toEqual([
      'young-grant',
    ])
  })
})

const conflict = (changes: Partial<ConflictFact>): ConflictFact => ({
  key: 'K3:work:1',
  rule: 'K3',
  effect: 'ruling',
  text: 'People at 152 m.',
  wayOut: 'Rule on it.',
  place: null,
  ruling: null,
  ...changes,
})
const ruling = (changes: object) => ({
  allowed: true,
  stale: false,
  text: 'with a barrier',
  by: 'Ione',
  at: FROM,
  ...changes,
})

describe('before approval', () => {
  test.each<[string, Parameters<typeof factsIn>[1], string[]]>([
    ['everything in order', {}, []],
    ['a part is missing', { missing: [{ section: 'work', field: 'work', text: 'Say it.' }] }, ['incomplete']],
    [
      'a threshold is not adopted',
      { unadopted: [{ hazard: 'hot-surface', threshold: 'x', text: 'touch.' }] },
      ['not-adopted'],
    ],
    [
      'the records do not show that the tube may be baked',
      { unprepared: [{ key: 'isolation-test-SG-11', text: 'No accepted isolation test.' }] },
      ['unprepared'],
    ],
    [
      'a conflict blocks',
      { conflicts: [conflict({ effect: 'block', ruling: ruling({}) })] },
      ['conflict-block'],
    ],
    ['nobody has ruled', { conflicts: [conflict({})] }, ['conflict-ruling']],
    [
      'the ruling is about other facts',
      { conflicts: [conflict({ ruling: ruling({ stale: true }) })] },
      ['conflict-ruling'],
    ],
    [
      'the ruling forbids',
      { conflicts: [conflict({ ruling: ruling({ allowed: false }) })] },
      ['conflict-ruling'],
    ],
    ['the ruling allows', { conflicts: [conflict({ ruling: ruling({}) })] }, []],
    ['a warning is only to be known', { conflicts: [conflict({ effect: 'warning' })] }, []],
    [
      'the window is too long',
      { permit: { content: fullContent({ to: '2026-11-20T06:00:01.000Z' }) } },
      ['window'],
    ],
    [
      'everything at once is told at once',
      {
        missing: [{ section: 'work', field: 'work', text: 'Say it.' }],
        unadopted: [{ hazard: 'hot-surface', threshold: 'x', text: 'touch.' }],
        conflicts: [conflict({}), conflict({ effect: 'block' })],
      },
      ['incomplete', 'not-adopted', 'conflict-block', 'conflict-ruling'],
    ],
  ])('%s', (_, changes, expected) => {
    expect(codes(attempt(factsIn('requested', changes), 'approve'))).toEqual(expected)
  })

  test('two hours after the start it is too late', () => {
    expect(attempt(factsIn('requested'), 'approve', { at: 1.999 }).kind).toBe('step')
    expect(codes(attempt(factsIn('requested'), 'approve', { at: 2 }))).toEqual(['window-past'])
  })

  test('approving fixes the window and the version, and says who', () => {
    expect(attempt(factsIn('requested'), 'approve')).toMatchObject({
      effects: [
        { kind: 'approve', personId: OFFICER },
        { kind: 'set-window', from: FROM, to: TO },
      ],
    })
  })
})

describe('before work begins', () => {
  const point = (changes: object) =>
    factsIn('approved', {
      points: factsIn('approved').points.map((each, i) => (i === 1 ? { ...each, ...changes } : each)),
    })
  const aTest = (changes: object) =>
    factsIn('approved', {
      tests: factsIn('approved').tests.map((each, i) => (i === 5 ? { ...each, ...changes } : each)),
    })
  const unchecked = (...details: unknown[]) => {
    const acts = factsIn('approved').acts.filter(({ act }) => act !== 'site-check')
    return factsIn('approved', {
      acts: [
        ...acts,
        ...details.map((detail) => ({
          act: 'site-check' as const,
          toState: 'approved' as const,
          personId: HOLDER,
          at: hours(FROM, 0.4),
          detail,
        })),
      ],
    })
  }
  const good = { barriersPlaced: true, signsPosted: true }
  test.each<[string, PermitFacts, string[]]>([
    [
      'a point without a lock',
      point({ lockNumber: null, appliedBy: null, holds: false, verifiedBy: null }),
      ['isolation'],
    ],
    ['a point nobody knows of', factsIn('approved', { points: [] }), ['isolation', 'isolation']],
    ['a lock that is not verified', point({ holds: false, verifiedBy: null }), ['isolation']],
    ['a lock verified by who hung it', point({ verifiedBy: CREW }), ['isolation']],
    ['a lock verified by who approved', point({ verifiedBy: OFFICER }), ['isolation']],
    ['a lock that was taken off', point({ holds: false, removed: true }), ['isolation']],
    [
      'a point for work beside or afterwards, which is free while it heats',
      factsIn('approved', {
        points: [],
        permit: {
          content: fullContent({ points: fullContent().points.map((p) => ({ ...p, purpose: 'to-work' })) }),
        },
      }),
      [],
    ],
    ['a test without a result', aTest({ state: 'missing' }), ['test']],
    ['a test that failed', aTest({ state: 'failed' }), ['test']],
    ['a test that is due again', aTest({ state: 'overdue' }), ['test']],
    ['a test that is not kept for that place', aTest({ place: 'elsewhere' }), ['test']],
    ['no site check', unchecked(), ['site-check']],
    ['a site check with barriers missing', unchecked({ ...good, barriersPlaced: false }), ['site-check']],
    [
      'a good site check, then one with signs down',
      unchecked(good, { ...good, signsPosted: false }),
      ['site-check'],
    ],
    ['a poor site check, then a good one', unchecked({ ...good, signsPosted: false }, good), []],
    [
      'a conflict that arose since',
      factsIn('approved', { conflicts: [conflict({ effect: 'block' })] }),
      ['conflict-block'],
    ],
    ['an open ruling does not hold it up any more', factsIn('approved', { conflicts: [conflict({})] }), []],
  ])('%s', (_, facts, expected) => {
    expect(codes(attempt(facts, 'accept'))).toEqual(expected)
  })

  test('a site check from before the approval does not count', () => {
    const acts = factsIn('approved').acts.map((each) =>
      each.act === 'approve' ? { ...each, at: hours(FROM, 0.3) } : each,
    )
    expect(codes(attempt(factsIn('approved', { acts }), 'accept'))).toEqual(['site-check'])
  })

  test('only inside the window, and only by somebody who is there', () => {
    expect(codes(attempt(factsIn('approved'), 'accept', { at: -0.001 }))).toEqual(['too-early'])
    expect(attempt(factsIn('approved'), 'accept', { at: 0.9 }).kind).toBe('step')
    expect(codes(attempt(factsIn('approved'), 'accept', { detail: { onSite: false } }))).toEqual([
      'input:onSite',
    ])
    expect(codes(attempt(factsIn('approved'), 'accept', { detail: {} }))).toEqual(['input:onSite'])
  })

  test('not taken up two hours after the start it lapses, at that moment', () => {
    const facts = factsIn('approved')
    expect(productStep(facts, 'lapse', hours(FROM, 1.9999)).kind).toBe('refused')
    expect(productStep(facts, 'lapse', hours(FROM, 7))).toMatchObject({
      to: 'lapsed',
      at: hours(FROM, 2),
      effects: [{ kind: 'end' }],
    })
    // And nobody accepts it in the moment before the product has noticed.
    expect(codes(attempt(facts, 'accept', { at: 2 }))[0]).toBe('wrong-state')
  })
})

describe('two clocks', () => {
  const until = (outcome: ReturnType<typeof attempt>) =>
    outcome.kind === 'step' ? outcome.effects.find((effect) => effect.kind === 'set-current-until') : outcome

  test('attended work is valid for 12 hours from the signature', () => {
    expect(until(attempt(factsIn('approved'), 'accept', { at: 1 }))).toMatchObject({ at: hours(FROM, 13) })
    expect(until(attempt(factsIn('issued'), 'revalidate', { at: 9 }))).toMatchObject({ at: hours(FROM, 21) })
  })

  test('unattended soaking with its annex is valid for 24, without it for 12', () => {
    const annex = { alarms: 'A', onCallMinutes: 30, shutOff: 'B' }
    const content = fullContent({ unattended: true, nightCover: 'pair', annex })
    const at = 9
    expect(until(attempt(factsIn('issued', { permit: { content } }), 'revalidate', { at }))).toMatchObject({
      at: hours(FROM, 33),
    })
    const without = { ...content, annex: { ...annex, alarms: '' } }
    expect(
      until(attempt(factsIn('issued', { permit: { content: without } }), 'revalidate', { at })),
    ).toMatchObject({ at: hours(FROM, 21) })
  })

  test('never beyond the window', () => {
    const facts = factsIn('issued', { permit: { currentUntil: hours(TO, -2) } })
    expect(until(attempt(facts, 'revalidate', { at: 90 }))).toMatchObject({ at: TO })
    const whole = factsIn('issued', { permit: { currentUntil: TO } })
    expect(codes(attempt(whole, 'revalidate', { at: 90 }))).toEqual(['whole-window'])
  })

  test('never while suspended, and never with a test overdue or a lock off', () => {
    expect(codes(attempt(factsIn('suspended'), 'revalidate'))[0]).toBe('wrong-state')
    const tests = factsIn('issued').tests.map((each) => ({ ...each, state: 'overdue' as const }))
    expect(codes(attempt(factsIn('issued', { tests }), 'revalidate'))).toHaveLength(6)
    expect(codes(attempt(factsIn('issued', { points: [] }), 'revalidate'))).toEqual([
      'isolation',
      'isolation',
    ])
  })

  test('at the very second it has run out', () => {
    const end = 12.5
    expect(attempt(factsIn('issued'), 'revalidate', { at: end - 1 / 3600 }).kind).toBe('step')
    expect(codes(attempt(factsIn('issued'), 'revalidate', { at: end }))[0]).toBe('wrong-state')
    expect(productStep(factsIn('issued'), 'expire', hours(FROM, end - 1 / 3600)).kind).toBe('refused')
    expect(productStep(factsIn('issued'), 'expire', hours(FROM, 30))).toMatchObject({
      to: 'expired',
      at: hours(FROM, end),
    })
  })

  test('validity is counted in elapsed hours on both nights on which the clock changes', () => {
    const night = (from: string, accepted: string) => {
      const content = fullContent({
        from: new Date(from).toISOString(),
        to: hours(new Date(from), 72).toISOString(),
      })
      const now = new Date(accepted)
      const acts = [
        {
          act: 'site-check' as const,
          toState: 'approved' as const,
          personId: HOLDER,
          at: now,
          detail: { barriersPlaced: true, signsPosted: true },
        },
      ]
      const facts = factsIn('approved', {
        acts,
        permit: { content, windowFrom: new Date(from), windowTo: hours(new Date(from), 72) },
      })
      return until(
        permitStep(facts, actorOf(HOLDER), 'accept', { reason: '', detail: { onSite: true } }, now),
      )
    }
    // Europe/Vienna: 12 h from 22:00 end at 09:00 in autumn and at 11:00 in spring.
    expect(night('2026-10-24T21:00+02:00', '2026-10-24T22:00+02:00')).toMatchObject({
      at: new Date('2026-10-25T09:00+01:00'),
    })
    expect(night('2027-03-27T21:00+01:00', '2027-03-27T22:00+01:00')).toMatchObject({
      at: new Date('2027-03-28T11:00+02:00'),
    })
  })
})

describe('extension', () => {
  const extended = (extensions: number, extendedHours: number) =>
    factsIn('issued', { permit: { extensions, extendedHours } })
  const by = (count: number) => ({ detail: { hours: count, recheck: 'all checked again' } })

  test('makes the window longer and not the current validity', () => {
    expect(attempt(factsIn('issued'), 'extend', by(36))).toMatchObject({
      to: 'issued',
      effects: [
        { kind: 'set-window', from: FROM, to: hours(TO, 36) },
        { kind: 'count-extension', hours: 36 },
      ],
    })
  })

  test('at most twice and 72 hours in all', () => {
    expect(attempt(factsIn('issued'), 'extend', by(72)).kind).toBe('step')
    expect(codes(attempt(factsIn('issued'), 'extend', by(72.5)))).toEqual(['input:hours'])
    expect(attempt(extended(1, 60), 'extend', by(12)).kind).toBe('step')
    expect(codes(attempt(extended(1, 60), 'extend', by(12.1)))).toEqual(['input:hours'])
    expect(codes(attempt(extended(2, 10), 'extend', by(1)))).toEqual(['extensions'])
    expect(codes(attempt(factsIn('issued'), 'extend', by(0)))).toEqual(['input:hours'])
  })

  test('not where the site forbids it, and not once it has run out', () => {
    const policy = { extensionAllowed: false, keepDays: 1 }
    expect(codes(attempt(factsIn('issued', { policy }), 'extend'))).toEqual(['policy'])
    expect(codes(attempt(factsIn('issued'), 'extend', { at: 12.5 }))[0]).toBe('wrong-state')
  })
})

describe('stop and go on', () => {
  test('resuming gives no more time than was left', () => {
    const outcome = attempt(factsIn('suspended'), 'resume')
    expect(outcome).toMatchObject({ to: 'issued', effects: [], detail: { suspendedHours: 2 } })
    expect(codes(attempt(factsIn('suspended'), 'resume', { at: 12.5 }))[0]).toBe('wrong-state')
  })

  test('work goes on after a new site check and new tests', () => {
    const acts = factsIn('suspended').acts.filter(({ at }) => at.getTime() !== hours(FROM, 5).getTime())
    expect(codes(attempt(factsIn('suspended', { acts }), 'resume'))).toEqual(['site-check'])
    const tests = factsIn('suspended').tests.map((each) => ({ ...each, takenAt: hours(FROM, 3) }))
    // Of the six only oxygen is repeated; what is tested once need not be tested again.
    expect(codes(attempt(factsIn('suspended', { tests }), 'resume'))).toEqual(['test'])
  })

  test('terms change only with heating known to be off', () => {
    const heating = factsIn('suspended').heating
    const changed = (on: boolean | null) =>
      codes(attempt({ ...ready('change-terms', 'suspended'), heating: { ...heating, on } }, 'change-terms'))
    expect(changed(false)).toEqual([])
    expect(changed(true)).toEqual(['heating'])
    expect(changed(null)).toEqual(['heating'])
  })

  test('of a live permit the refusal says to suspend it first', () => {
    const refused = attempt(factsIn('issued'), 'change-terms')
    expect((refused as { reasons: Reason[] }).reasons[0]?.text).toContain('Suspend it')
  })

  test('changed terms void the approval and end the validity', () => {
    expect(attempt(factsIn('approved'), 'change-terms')).toMatchObject({
      to: 'requested',
      effects: [
        { kind: 'void-approval' },
        { kind: 'set-requester' },
        { kind: 'set-window' },
        { kind: 'set-current-until', at: null },
      ],
    })
  })

  test('changed terms do not make it longer than 240 hours since it went live', () => {
    const ending = (after: number, extendedHours = 0) =>
      factsIn('suspended', {
        permit: {
          extendedHours,
          content: fullContent({ from: hours(FROM, 8).toISOString(), to: hours(FROM, after).toISOString() }),
        },
      })
    // It went live half an hour into its window.
    expect(attempt(ending(240.5), 'change-terms').kind).toBe('step')
    expect(codes(attempt(ending(240.6), 'change-terms'))).toEqual(['window-total'])
    expect(attempt(ending(246, 24), 'change-terms').kind).toBe('step')
  })

  test('what has run out is never brought back', () => {
    const acts = [
      ...factsIn('expired').acts,
      ...factsIn('handed-back').acts.slice(-1),
      {
        act: 'return-to-holder' as const,
        toState: 'suspended' as const,
        personId: OFFICER,
        at: hours(FROM, 13),
        detail: null,
      },
    ]
    const facts = { ...ready('change-terms', 'suspended'), acts }
    expect(codes(attempt(facts, 'change-terms'))).toContain('expired-before')
    const returned = factsIn('suspended', { acts, permit: { currentUntil: hours(FROM, 12.5) } })
    for (const act of ['resume', 'change-terms', 'revalidate', 'accept'] as const) {
      expect(codes(attempt(returned, act, { at: 14 }))[0]).toBe('wrong-state')
    }
    // It runs out again, not earlier than it was returned.
    expect(productStep(returned, 'expire', hours(FROM, 14))).toMatchObject({ at: hours(FROM, 13) })
  })
})

describe('the end', () => {
  test('an unlocked end: no cancelling with a lock out, and the lock is named', () => {
    const refused = attempt(factsIn('handed-back', { locksOut: ['L-109'] }), 'cancel')
    expect(codes(refused)).toEqual(['locks-out'])
    expect((refused as { reasons: Reason[] }).reasons[0]?.text).toContain('L-109')
  })

  test('no hand-back and no cancelling with heating recorded as on; unknown is for people to say', () => {
    const heating = { ...factsIn('issued').heating, on: true }
    expect(codes(attempt(factsIn('issued', { heating }), 'hand-back'))).toEqual(['heating'])
    expect(codes(attempt(factsIn('handed-back', { heating }), 'cancel'))).toEqual(['heating'])
    expect(attempt(factsIn('issued', { heating: { ...heating, on: null } }), 'hand-back').kind).toBe('step')
  })

  test('locks said to be off must be off', () => {
    expect(
      codes(attempt(factsIn('issued'), 'hand-back', { detail: { ...HAND_BACK, locks: 'removed' } })),
    ).toEqual(['input:locks'])
    const off = factsIn('issued', { locksOut: [] })
    expect(
      attempt(off, 'hand-back', { detail: { ...HAND_BACK, locks: 'removed', locksText: '' } }).kind,
    ).toBe('step')
    expect(codes(attempt(off, 'hand-back', { detail: { ...HAND_BACK, locksText: '' } }))).toEqual([
      'input:locksText',
    ])
  })

  test('everything a hand-back lacks is told at once', () => {
    expect(codes(attempt(factsIn('issued'), 'hand-back', { detail: {} }))).toEqual(
      ['outcome', 'plantState', 'peopleClear', 'toolsOut', 'hottestC', 'locks'].map(
        (field) => `input:${field}`,
      ),
    )
  })

  test('work that has begun ends by hand-back, whatever became of its terms', () => {
    const acts = factsIn('issued').acts
    for (const state of ['requested', 'returned', 'approved'] as const) {
      const facts = factsIn(state, { acts, locksOut: [], permit: { holderId: HOLDER } })
      expect(attempt(facts, 'hand-back', { at: 1 })).toMatchObject({ to: 'handed-back' })
      expect(codes(attempt(facts, 'withdraw'))).toEqual(['was-live'])
    }
    expect(codes(attempt(factsIn('requested', { acts, locksOut: [] }), 'refuse'))).toEqual(['was-live'])
    // Not taken up again it has run out; there still is something to hand back.
    expect(productStep(factsIn('approved', { acts }), 'lapse', hours(FROM, 2))).toMatchObject({
      to: 'expired',
      effects: [],
    })
  })

  test('nothing is taken back while its locks hang', () => {
    expect(codes(attempt(factsIn('approved'), 'withdraw'))).toEqual(['locks-out'])
  })
})

describe('what has to be said', () => {
  test.each([
    'return',
    'refuse',
    'change-terms',
    'withdraw',
    'extend',
    'suspend',
    'resume',
    'return-to-holder',
  ] as const)('%s wants a reason', (act) => {
    const from = Object.keys(LIFE[act])[0] as PermitState
    expect(codes(attempt(ready(act, from), act, { reason: '  ' }))).toContain('input:reason')
  })

  test('a hand-over by phone is read back', () => {
    const detail = { outgoingId: HOLDER, how: 'by-phone' }
    expect(codes(attempt(factsIn('issued'), 'hand-over', { detail }))).toEqual(['input:readBack'])
    expect(attempt(factsIn('issued'), 'hand-over', { detail: { ...detail, readBack: true } })).toMatchObject({
      effects: [{ kind: 'set-holder', personId: DEPUTY }],
      detail: { outgoingId: HOLDER, incomingId: DEPUTY, how: 'by-phone', readBack: true },
    })
  })

  test('only the one who holds it hands it over', () => {
    const detail = { outgoingId: CREW, how: 'at-site' }
    expect(codes(attempt(factsIn('issued'), 'hand-over', { detail }))).toEqual(['input:outgoingId'])
  })

  test('a site check that is not in order says what', () => {
    const detail = { barriersPlaced: true, signsPosted: false, text: '' }
    expect(codes(attempt(factsIn('approved'), 'site-check', { detail }))).toEqual(['input:text'])
    expect(
      attempt(factsIn('approved'), 'site-check', { detail: { ...detail, text: 'sign at 160 m fell' } }).kind,
    ).toBe('step')
  })

  test('made safe lies behind, not ahead', () => {
    const detail = { who: 'Somebody', at: '2026-11-10T12:00:01.000Z', how: 'set off' }
    expect(codes(attempt(factsIn('suspended'), 'made-safe', { detail, at: 6 }))).toEqual(['input:at'])
  })
})
