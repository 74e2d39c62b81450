import { expect, test } from 'vitest'
import { annexComplete, missingParts, windowFault } from '#app/domain/permit-completeness.ts'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import { PERMIT_SECTIONS } from '#app/domain/permit-words.ts'
import { fullContent } from '#tests/support/permit-content.ts'

const fields = (content: PermitContent, keys: Parameters<typeof missingParts>[1] = []) =>
  missingParts(content, keys).map(({ field }) => field)

test('a permit that says everything lacks nothing', () => {
  expect(missingParts(fullContent(), [])).toEqual([])
})

test('an empty permit lacks something in every section, told in the order of the form', () => {
  const sections = missingParts(emptyPermitContent(), ['oxygen']).map(({ section }) => section)
  expect([...new Set(sections)]).toEqual(PERMIT_SECTIONS)
})

test.each<[string, Partial<PermitContent>, string[]]>([
  ['no title', { title: '  ' }, ['title']],
  ['no segment', { segments: [] }, ['segments']],
  ['the same segment twice', { segments: ['SG-1', 'SG-1'] }, ['segments']],
  ['a stretch that ends where it begins', { fromM: 150, toM: 150 }, ['toM']],
  ['exclusion of nothing is an answer', { exclusionWestM: 0 }, []],
  ['a soak of nothing is an answer', { soakHours: 0 }, []],
  ['no open-circuit voltage of a supply', { openCircuitVolts: null }, ['openCircuitVolts']],
  [
    'no supply needs no volts, no electrician, no earthing and no test for voltage',
    {
      supply: null,
      maxAmps: null,
      maxVolts: null,
      openCircuitVolts: null,
      electricianId: null,
      earthing: '',
      tests: fullContent().tests.filter(({ kind }) => !['zero-voltage', 'earth-continuity'].includes(kind)),
    },
    [],
  ],
  ['nobody besides the holder', { deputyIds: [], crewIds: [1] }, ['crewIds']],
  ['a deputy is somebody besides the holder', { deputyIds: [2], crewIds: [] }, []],
  ['unattended is not answered', { unattended: null }, ['unattended']],
  [
    'unattended without an annex',
    { unattended: true },
    ['nightCover', 'annex.alarms', 'annex.onCallMinutes', 'annex.shutOff'],
  ],
  [
    'unattended with its annex',
    { unattended: true, nightCover: 'On-call pair', annex: { alarms: 'A', onCallMinutes: 30, shutOff: 'B' } },
    [],
  ],
  ['no end of the window', { to: null }, ['to']],
  ['an end before the start', { to: '2026-11-10T05:00:00.000Z' }, ['to']],
  ['240 hours', { to: '2026-11-20T06:00:00.000Z' }, []],
  ['one second more than 240 hours', { to: '2026-11-20T06:00:01.000Z' }, ['to']],
  [
    'no point to heat by',
    { points: fullContent().points.map((p) => ({ ...p, purpose: 'to-work' as const })) },
    ['points'],
  ],
  [
    'a tag that comes twice, whatever its letters',
    { points: fullContent().points.map((point, i) => ({ ...point, tag: i === 0 ? 'ip-1' : 'IP-1' })) },
    ['points'],
  ],
  ['no test of the cut-out', { tests: fullContent().tests.slice(1) }, ['tests']],
  ['nobody to call', { contacts: [] }, ['contacts']],
])('%s', (_, changes, expected) => {
  expect(fields(fullContent(changes))).toEqual(expected)
})

test('each hazard wants an answer, and a reason where it does not apply', () => {
  const keys = ['fire', 'oxygen', 'x-ray'] as const
  expect(fields(fullContent(), keys)).toEqual([
    'hazards.fire.applies',
    'hazards.oxygen.applies',
    'hazards.x-ray.applies',
  ])
  const answered = fullContent({
    hazards: {
      fire: { applies: true, text: '' },
      oxygen: { applies: null, text: 'written, not ticked' },
      'x-ray': { applies: false, text: '' },
    },
  })
  expect(fields(answered, keys)).toEqual(['hazards.oxygen.applies', 'hazards.x-ray.text'])
})

test('where oxygen can run low, its test is listed', () => {
  const hazards = { oxygen: { applies: true, text: '' } }
  const tests = fullContent().tests.filter(({ kind }) => kind !== 'oxygen')
  expect(missingParts(fullContent({ hazards, tests }), [])).toMatchObject([
    { section: 'tests', text: expect.stringContaining('Oxygen') },
  ])
})

test('an annex counts only while heating is unattended and it says everything', () => {
  const annex = { alarms: 'A', onCallMinutes: 30, shutOff: 'B' }
  const whole = fullContent({ unattended: true, nightCover: 'pair', annex })
  expect(annexComplete(whole)).toBe(true)
  expect(annexComplete({ ...whole, unattended: false })).toBe(false)
  expect(annexComplete({ ...whole, nightCover: ' ' })).toBe(false)
  expect(annexComplete({ ...whole, annex: { ...annex, shutOff: '' } })).toBe(false)
  expect(annexComplete({ ...whole, annex: { ...annex, onCallMinutes: null } })).toBe(false)
})

test('240 hours are elapsed hours on both nights on which the clock changes', () => {
  // Europe/Vienna 2026-10-25 has 25 hours: ten days on the wall are 241 elapsed.
  expect(windowFault(new Date('2026-10-20T06:00+02:00'), new Date('2026-10-30T06:00+01:00'))).toContain('241')
  expect(windowFault(new Date('2026-10-20T06:00+02:00'), new Date('2026-10-30T05:00+01:00'))).toBeNull()
  // 2027-03-28 has 23: ten days and an hour on the wall are 240 elapsed.
  expect(windowFault(new Date('2027-03-25T06:00+01:00'), new Date('2027-04-04T07:00+02:00'))).toBeNull()
  expect(windowFault(new Date('2027-03-25T06:00+01:00'), new Date('2027-04-04T08:00+02:00'))).toContain('241')
})
