import { expect, test } from 'vitest'
import { permitStages } from '#app/domain/permit-progress.ts'
import { PERMIT_STATES, type PermitState } from '#app/domain/permit-words.ts'

const hour = (h: number) => new Date(Date.UTC(2026, 10, 4, h))
const acts = (...states: PermitState[]) => states.map((toState, i) => ({ toState, at: hour(i) }))
const words = (state: PermitState, ...states: PermitState[]) =>
  permitStages(state, acts(...states)).map(({ state: each, status }) => `${each} ${status}`)

test('a request waits between a draft that is done and an approval to come', () => {
  expect(permitStages('requested', acts('draft', 'draft', 'requested'))).toEqual([
    { state: 'draft', label: 'Draft', status: 'done', at: hour(0), odd: false },
    { state: 'requested', label: 'Requested', status: 'now', at: hour(2), odd: false },
    { state: 'approved', label: 'Approved', status: 'coming', at: null, odd: false },
    { state: 'issued', label: 'Issued (live)', status: 'coming', at: null, odd: false },
    { state: 'handed-back', label: 'Handed back', status: 'coming', at: null, odd: false },
    { state: 'cancelled', label: 'Cancelled', status: 'coming', at: null, odd: false },
  ])
})

test('a suspended permit shows its stop behind the live state, and what is still to come', () => {
  expect(words('suspended', 'draft', 'requested', 'approved', 'issued', 'suspended')).toEqual([
    'draft done',
    'requested done',
    'approved done',
    'issued done',
    'suspended now',
    'handed-back coming',
    'cancelled coming',
  ])
})

test('a resumed permit no longer shows the stop, and is live since it was resumed', () => {
  const stages = permitStages(
    'issued',
    acts('draft', 'requested', 'approved', 'issued', 'suspended', 'issued'),
  )
  expect(stages.map(({ state }) => state)).not.toContain('suspended')
  expect(stages.find(({ state }) => state === 'issued')?.at).toEqual(hour(5))
})

test('that a permit ran out stays visible after its hand-back and its cancellation', () => {
  const way: PermitState[] = [
    'draft',
    'requested',
    'approved',
    'issued',
    'expired',
    'handed-back',
    'cancelled',
  ]
  expect(words('cancelled', ...way)).toEqual(way.map((state, i) => `${state} ${i === 6 ? 'now' : 'done'}`))
})

test.each([
  ['refused', ['draft', 'requested', 'refused'], ['draft done', 'requested done', 'refused now']],
  [
    'withdrawn',
    ['draft', 'requested', 'approved', 'withdrawn'],
    ['draft done', 'requested done', 'approved done', 'withdrawn now'],
  ],
  ['discarded', ['draft', 'discarded'], ['draft done', 'discarded now']],
  [
    'discarded',
    ['draft', 'requested', 'returned', 'discarded'],
    ['draft done', 'requested done', 'discarded now'],
  ],
] as [PermitState, PermitState[], string[]][])('%s ends the way', (state, way, expected) => {
  expect(words(state, ...way)).toEqual(expected)
})

test('an approval that a change of terms has made void is to come again', () => {
  const stages = permitStages('requested', acts('draft', 'requested', 'approved', 'requested'))
  expect(stages.find(({ state }) => state === 'approved')).toMatchObject({ status: 'coming', at: null })
  expect(stages.find(({ state }) => state === 'requested')?.at).toEqual(hour(3))
})

test('whatever the state, exactly one stage is the present one', () => {
  for (const state of PERMIT_STATES) {
    const now = permitStages(state, acts('draft', state)).filter(({ status }) => status === 'now')
    expect(now.map((stage) => stage.state)).toEqual([state])
  }
})
