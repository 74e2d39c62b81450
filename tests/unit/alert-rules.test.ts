import { expect, test } from 'vitest'
import { AlertRuleContentSchema, missingSentences } from '#app/domain/alert-rules.ts'

const FULL = {
  title: 'Spread along the tube',
  scope: { kind: 'segments', tags: [] },
  figures: { limitK: 20 },
  onDelayS: 600,
  offDelayS: 600,
  coverage: 0.6,
  priority: 'high',
  suppressedIn: ['vented'],
  resetBy: [],
  why: 'A slipped jacket leaves a cold stretch.',
  whatToDo: 'Hold the setpoint; two people look along the segment.',
  howLong: 'An hour.',
  who: 'The permit holder.',
}

test('a rule that says why, what to do, how long there is and who acts lacks nothing', () => {
  expect(missingSentences(AlertRuleContentSchema.parse(FULL))).toEqual([])
})

test('blanks are no sentence, and each missing one is named', () => {
  const rule = AlertRuleContentSchema.parse({ ...FULL, why: '  ', who: '' })
  expect(missingSentences(rule)).toEqual(['why', 'who'])
})

test('a rule for a state that no segment can be in is refused', () => {
  expect(AlertRuleContentSchema.safeParse({ ...FULL, suppressedIn: ['on fire'] }).success).toBe(false)
})
