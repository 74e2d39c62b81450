import { expect, test } from 'vitest'
import { PERMIT_ACT_DETAILS } from '#app/domain/permit-act-details.ts'
import { detailWords } from '#app/domain/permit-detail.ts'

const wording = { person: (id: number) => `person ${id}`, time: (iso: string) => `at ${iso}` }

test('a hand-back is told in full', () => {
  const said = PERMIT_ACT_DETAILS['hand-back'].parse({
    outcome: 'stopped',
    plantState: 'Valves shut, supply off',
    peopleClear: true,
    toolsOut: true,
    hottestC: 61.25,
    locks: 'left',
    locksText: 'L-109 for the electrician',
  })
  expect(detailWords(said, wording)).toEqual([
    'The work was stopped',
    'Plant left: Valves shut, supply off',
    'Everybody is clear',
    'Tools and materials are out',
    'Hottest surface: 61.3 °C',
    'Locks are left on',
    'About the locks: L-109 for the electrician',
  ])
})

test('a hand-over by telephone and a stop that was made safe use the same field for different things', () => {
  expect(detailWords({ outgoingId: 2, incomingId: 3, how: 'by-phone', readBack: true }, wording)).toEqual([
    'Handed over by: person 2',
    'Taken over by: person 3',
    'By telephone',
    'The state of the work was read back',
  ])
  expect(detailWords({ who: 'Wendel', at: '2026-11-09T15:31:00.000Z', how: 'breaker off' }, wording)).toEqual(
    ['Made safe by: Wendel', 'Made safe at: at 2026-11-09T15:31:00.000Z', 'Made safe how: breaker off'],
  )
})

test('barriers that do not stand are said', () => {
  expect(
    detailWords({ barriersPlaced: false, signsPosted: true, text: 'one gate is missing' }, wording),
  ).toEqual(['Barriers do not stand', 'Signs are up', 'Remark: one gate is missing'])
})

test('why a permit ran out is said', () => {
  expect(detailWords({ because: 'revalidation' }, wording)).toEqual(['It was not revalidated in time'])
})

test('nothing, and what is no detail, give no lines', () => {
  for (const detail of [null, undefined, 'text', 7, {}, { unheardOf: 1 }]) {
    expect(detailWords(detail, wording)).toEqual([])
  }
})

test('every field that an act can say is told', () => {
  const samples: Record<string, unknown> = {
    terms: 'a',
    barriersPlaced: true,
    signsPosted: true,
    text: 'a',
    onSite: true,
    outgoingId: 1,
    how: 'at-site',
    readBack: true,
    hours: 3,
    recheck: 'abc',
    who: 'abc',
    at: '2026-01-01T00:00:00.000Z',
    outcome: 'complete',
    plantState: 'abc',
    peopleClear: true,
    toolsOut: true,
    hottestC: 40,
    locks: 'removed',
    locksText: 'abc',
    inspection: 'abc',
    lessons: 'abc',
  }
  for (const [act, schema] of Object.entries(PERMIT_ACT_DETAILS)) {
    for (const field of Object.keys(schema.shape)) {
      expect(samples, `${act}: no sample of ${field}`).toHaveProperty(field)
      expect(detailWords({ [field]: samples[field] }, wording), `${act}: ${field}`).toHaveLength(1)
    }
  }
})
