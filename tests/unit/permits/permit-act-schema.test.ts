import { expect, test } from 'vitest'
import { PERMIT_ACT_DETAILS } from '#app/domain/permit-act-details.ts'
import { PERMIT_ACTS } from '#app/domain/permit-words.ts'
import { FORM_ACTS, permitActSchema } from '#app/domain/schemas/permit-act.ts'

const schema = permitActSchema('Europe/Vienna')
const base = { revision: '7', reason: ' fan failed ', password: 'pw' }

test('every act that is not edited, drafted or the product’s has a form', () => {
  const rest = ['draft', 'edit', 'change-terms', 'expire', 'lapse']
  expect([...FORM_ACTS, ...rest].sort()).toEqual([...PERMIT_ACTS].sort())
})

test('a hand-back is read with decimal comma, ticks and choices', () => {
  const typed = {
    outcome: 'complete',
    plantState: 'cold',
    peopleClear: 'on',
    toolsOut: 'on',
    hottestC: '31,5',
    locks: 'left',
    locksText: 'next permit',
  }
  const { detail, ...rest } = schema.parse({ act: 'hand-back', ...base, ...typed })
  expect(rest).toEqual({ act: 'hand-back', revision: 7, reason: 'fan failed', password: 'pw' })
  expect(detail).toEqual({ ...typed, peopleClear: true, toolsOut: true, hottestC: 31.5 })
  expect(PERMIT_ACT_DETAILS['hand-back'].safeParse(detail).success).toBe(true)
})

test('what was left empty stays empty, for the rules to ask for', () => {
  const { detail } = schema.parse({ act: 'hand-back', revision: '1' })
  expect(detail).toEqual({
    outcome: undefined,
    plantState: '',
    peopleClear: false,
    toolsOut: false,
    hottestC: undefined,
    locks: undefined,
    locksText: '',
  })
  expect(PERMIT_ACT_DETAILS['hand-back'].safeParse(detail).error?.issues.map(({ path }) => path[0])).toEqual([
    'outcome',
    'plantState',
    'peopleClear',
    'toolsOut',
    'hottestC',
    'locks',
  ])
})

test('what is no number is refused in the words of the act', () => {
  const { detail } = schema.parse({ act: 'extend', ...base, hours: 'two', recheck: 'all' })
  expect(PERMIT_ACT_DETAILS.extend.safeParse(detail).error?.issues[0]?.message).toBe(
    'Give the hours that are added.',
  )
})

test('made safe at a site time, on the night that comes twice with its offset', () => {
  const at = (text: string) =>
    schema.safeParse({ act: 'made-safe', ...base, who: 'Pim', how: 'off', at: text })
  expect(at('2026-11-09T16:20').data?.detail).toEqual({
    who: 'Pim',
    how: 'off',
    at: '2026-11-09T15:20:00.000Z',
  })
  expect(at('2026-10-25T02:30').error?.issues[0]).toMatchObject({
    path: ['at'],
    message: expect.stringContaining('twice'),
  })
  expect(at('2026-10-25T02:30 +01:00').data?.detail.at).toBe('2026-10-25T01:30:00.000Z')
})

test.each([{ act: 'expire' }, { act: 'edit' }, {}])('no form does %o', (typed) => {
  expect(schema.safeParse({ ...base, ...typed }).error?.issues[0]?.message).toBe(
    'Choose what is to be done with this permit.',
  )
})

test('a page without its revision is told to load again', () => {
  expect(schema.safeParse({ act: 'suspend', revision: 'x' }).error?.issues[0]?.message).toContain(
    'Load it again',
  )
})
