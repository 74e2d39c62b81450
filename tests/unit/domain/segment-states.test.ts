import { expect, test } from 'vitest'
import {
  isSegmentState,
  isUsualChange,
  SEGMENT_STATE_CODES,
  SEGMENT_STATES,
} from '#app/domain/segment-states.ts'

test('there are fourteen states, each with a label of its own', () => {
  expect(SEGMENT_STATE_CODES).toHaveLength(14)
  expect(new Set(SEGMENT_STATE_CODES.map((code) => SEGMENT_STATES[code].label)).size).toBe(14)
})

test('every state can be reached and left', () => {
  for (const code of SEGMENT_STATE_CODES) {
    expect(
      SEGMENT_STATE_CODES.some((from) => isUsualChange(from, code)),
      `into ${code}`,
    ).toBe(true)
    expect(
      SEGMENT_STATE_CODES.some((to) => isUsualChange(code, to)),
      `out of ${code}`,
    ).toBe(true)
  }
})

test('the cycle of a bake is usual in order and unusual out of order', () => {
  const cycle = [
    'pumping',
    'bake-prep',
    'heating',
    'soak',
    'cooling',
    'post-bake-test',
    'in-service',
  ] as const
  for (let step = 1; step < cycle.length; step += 1) {
    const [from, to] = [cycle[step - 1], cycle[step]]
    if (from !== undefined && to !== undefined) expect(isUsualChange(from, to), `${from} to ${to}`).toBe(true)
  }
  expect(isUsualChange('soak', 'in-service')).toBe(false)
  expect(isUsualChange('heating', 'vented')).toBe(false)
  expect(isUsualChange('vented', 'heating')).toBe(false)
})

test('a hot segment is not quietly put into maintenance', () => {
  for (const hot of ['heating', 'soak', 'cooling'] as const)
    expect(isUsualChange(hot, 'maintenance')).toBe(false)
  expect(isUsualChange('in-service', 'maintenance')).toBe(true)
})

test('a state is not a change to itself, and a word from outside is not a state', () => {
  for (const code of SEGMENT_STATE_CODES) expect(isUsualChange(code, code)).toBe(false)
  expect(isSegmentState('soak')).toBe(true)
  expect(isSegmentState('constructor')).toBe(false)
})
