import { expect, test } from 'vitest'
import { permitStory, type StoryEvent } from '#app/domain/permit-story.ts'
import { PERMIT_ACTS, SAFETY_EVENT_KINDS } from '#app/domain/permit-words.ts'

const AT = new Date('2026-11-04T15:05:00.000Z')
const minutes = (n: number) => new Date(AT.getTime() + n * 60_000)

type Act = Extract<StoryEvent, { kind: 'act' }>

function act(change: Partial<Act>): StoryEvent {
  return {
    kind: 'act',
    at: AT,
    act: 'approve',
    fromState: 'requested',
    toState: 'approved',
    who: 'Ione Castellbrook',
    reason: '',
    details: [],
    revision: 5,
    version: 2,
    differences: [],
    ...change,
  }
}

function told(event: StoryEvent): string {
  return permitStory([event])[0]?.text ?? ''
}

test('an approval names who, which version, and that it is signed', () => {
  const [line] = permitStory([act({ signed: true })])
  expect(line).toMatchObject({
    text: 'Ione Castellbrook approved version 2, in principle and for its window.',
    signed: true,
    revision: 5,
    tone: 'plain',
  })
})

test('what the product noticed late has both times', () => {
  const expiry = act({ act: 'expire', who: null, at: AT, recordedAt: minutes(42) })
  expect(permitStory([expiry])[0]).toMatchObject({
    at: AT,
    recordedAt: minutes(42),
    text: 'It ran out and can never be live again.',
    tone: 'bad',
  })
})

test('what was written down at once has one time', () => {
  const seconds = new Date(AT.getTime() + 59_000)
  expect(permitStory([act({ recordedAt: seconds })])[0]?.recordedAt).toBeNull()
})

test('a step of somebody without a log-in names the witness', () => {
  expect(
    told({
      kind: 'lock-on',
      at: AT,
      tag: 'IP-05-4',
      isolates: 'HX-2 spare feed',
      lock: 'L-117',
      who: 'Wendel Quarrie',
      witness: 'Odalys Fennimore',
    }),
  ).toBe(
    'Wendel Quarrie (witnessed and entered by Odalys Fennimore) hung lock L-117 on IP-05-4 (HX-2 spare feed).',
  )
})

test('a lock removed without its owner stands out', () => {
  const [line] = permitStory([
    {
      kind: 'lock-off',
      at: AT,
      tag: 'IP-05-1',
      lock: 'L-114',
      who: 'Ione Castellbrook',
      witness: null,
      how: 'owner-absent',
      note: 'Off site since noon; told by telephone.',
    },
  ])
  expect(line).toMatchObject({ tone: 'stop', more: ['Off site since noon; told by telephone.'] })
  expect(line?.text).toContain('while its owner was away')
})

test('a test that was not passed is bad, with value and instrument', () => {
  const [line] = permitStory([
    {
      kind: 'test',
      at: AT,
      test: 'oxygen',
      place: 'bay 5',
      result: '19.2 %',
      passed: false,
      instrument: 'OX-11',
      who: 'Pim Larkspur',
      witness: null,
      note: '',
    },
  ])
  expect(line).toMatchObject({
    tone: 'bad',
    text: 'Pim Larkspur tested at bay 5: Oxygen, 19.2 % (instrument OX-11): not passed.',
  })
})

test('an attempt that was not let is told with why', () => {
  const [line] = permitStory([
    { kind: 'attempt', at: AT, who: 'Dr Bram Thistlewood', what: 'approve', reason: 'planned the bake' },
  ])
  expect(line).toMatchObject({
    text: 'Dr Bram Thistlewood tried to approve and was not let.',
    more: ['Why not: planned the bake'],
    tone: 'bad',
  })
})

test('a change of terms after approval says that the approval is void, and what changed', () => {
  const [line] = permitStory([
    act({
      act: 'change-terms',
      fromState: 'approved',
      toState: 'requested',
      version: 3,
      reason: 'hotter',
      details: ['Told by radio'],
      differences: [{ section: 'work', label: 'Highest temperature', before: '150 °C', after: '160 °C' }],
    }),
  ])
  expect(line?.text).toMatch(/approval is void/)
  expect(line?.more).toEqual([
    'Reason: hotter',
    'Told by radio',
    'Highest temperature: “150 °C” became “160 °C”',
  ])
})

test('what happened comes in order of when it happened, not of how it was found', () => {
  const story = permitStory([
    act({ act: 'request', at: minutes(10) }),
    { kind: 'round', at: minutes(5), who: 'Pim Larkspur', hottestC: 74, atM: 1195, inOrder: true, text: '' },
    act({ act: 'draft', at: AT }),
  ])
  expect(story.map(({ text }) => text)).toEqual([
    'Ione Castellbrook began the draft.',
    'Pim Larkspur made a round, hottest surface 74 °C at 1195 m: in order.',
    'Ione Castellbrook asked for the permit with version 2.',
  ])
})

test('each act has a sentence of its own, and each names who acted unless a time did', () => {
  const sentences = PERMIT_ACTS.map((each) => told(act({ act: each, who: 'Pim Larkspur' })))
  expect(new Set(sentences).size).toBe(PERMIT_ACTS.length)
  const byTime = ['lapse', 'expire']
  PERMIT_ACTS.forEach((each, i) => {
    expect(sentences[i]?.startsWith('Pim Larkspur'), each).toBe(!byTime.includes(each))
  })
})

test('dangers begin, are let go on with a reason, and end', () => {
  for (const event of SAFETY_EVENT_KINDS) {
    const story = permitStory([
      { kind: 'danger', at: AT, event, text: 'found' },
      { kind: 'danger-tolerated', at: minutes(1), event, who: 'Ione Castellbrook', reason: 'cooling slowly' },
      { kind: 'danger-over', at: minutes(2), event, who: null, reason: '' },
    ])
    expect(story.map(({ tone }) => tone)).toEqual(['bad', 'stop', 'plain'])
    expect(story[1]?.more).toEqual(['Reason: cooling slowly'])
  }
})
