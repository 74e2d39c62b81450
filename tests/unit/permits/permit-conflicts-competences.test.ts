import { describe, expect, test } from 'vitest'
import { firstGap } from '#app/domain/permit-conflicts/competences.ts'
import type { CompetenceSpan, NeededCompetence } from '#app/domain/permit-conflicts/facts.ts'
import { at, found, only, own } from './conflict-grounds.ts'

const WENDEL: NeededCompetence = {
  personId: 10,
  name: 'Wendel Quarrie',
  kind: 'electrician-licence',
  as: 'electrician',
  standIns: [{ personId: 11, name: 'Somebody Else' }],
}
const PIM: NeededCompetence = {
  personId: 1,
  name: 'Pim',
  kind: 'permit-holder',
  as: 'permit holder',
  standIns: [],
}

function held(personId: number, until: Date | null, more: Partial<CompetenceSpan> = {}): CompetenceSpan {
  const kind = personId >= 10 ? 'electrician-licence' : 'permit-holder'
  return { personId, kind, number: 'QE-1187', from: at('01 00:00'), to: until, ...more }
}

const needing = (need: NeededCompetence, competences: readonly CompetenceSpan[]) => ({
  own: own([11], { needs: [need] }),
  competences,
})

describe('K8, competences that end inside the window', () => {
  test('a licence that ends with 20 November blocks a window to the 25th, with the date and the ways out', () => {
    const k8 = only(needing(WENDEL, [held(10, at('21 00:00'))]), 'K8')
    expect(k8).toMatchObject({ key: 'K8:person:10:electrician-licence', effect: 'block', place: null })
    expect(k8.text).toContain(
      'Wendel Quarrie, electrician: “Electrician’s licence” QE-1187 ends with the day 2026-11-20',
    )
    expect(k8.text).toContain('the window runs to 2026-11-25 18:00')
    expect(k8.wayOut).toContain('another electrician')
    expect(k8.wayOut).toContain('end the window by 2026-11-21 00:00')
  })

  test('a shorter window, a renewal or a second electrician among the crew clears it', () => {
    const ends = held(10, at('21 00:00'))
    expect(found({ own: own([11], { needs: [WENDEL], to: at('21 00:00') }), competences: [ends] })).toEqual(
      [],
    )
    expect(found(needing(WENDEL, [ends, held(10, null, { from: at('21 00:00') })]))).toEqual([])
    expect(found(needing(WENDEL, [ends, held(11, null, { from: at('20 00:00') })]))).toEqual([])
    expect(found(needing(WENDEL, [ends, held(11, null, { from: at('21 01:00') })]))).toHaveLength(1)
    expect(found(needing(WENDEL, [ends, held(1, null)]))).toHaveLength(1)
  })

  test('an end to the minute of the window’s end is enough, a minute less is not', () => {
    expect(found(needing(WENDEL, [held(10, at('25 18:00'))]))).toEqual([])
    const short = only(needing(WENDEL, [held(10, at('25 17:59'))]), 'K8')
    expect(short.text).toContain('ends 2026-11-25 17:59 (UTC+01:00)')
  })

  test('one that was never entered, has ended before or begins later is blocked too', () => {
    expect(only(needing(PIM, []), 'K8').text).toContain(
      'Pim, permit holder: no “Permit holder” has been entered',
    )
    expect(only(needing(PIM, [held(1, at('05 00:00'))]), 'K8').text).toContain(
      'ended with the day 2026-11-04',
    )
    const later = only(needing(PIM, [held(1, null, { from: at('18 08:00') })]), 'K8')
    expect(later.text).toContain('begins only 2026-11-18 08:00')
    expect(later.wayOut).not.toContain('end the window')
  })

  test('what has been needed already counts no more: only the rest of the window does', () => {
    const needs = needing(PIM, [held(1, null, { from: at('18 08:00') })])
    expect(found({ ...needs, now: at('18 08:00') })).toEqual([])
  })
})

test('the first gap of several spans, whatever their order', () => {
  const window = { from: at('10 00:00'), to: at('20 00:00') }
  const span = (from: string, to: string) => ({ from: at(from), to: at(to) })
  expect(firstGap([span('14 00:00', '20 00:00'), span('01 00:00', '14 00:00')], window)).toBeNull()
  expect(firstGap([span('01 00:00', '13 00:00'), span('14 00:00', '20 00:00')], window)).toEqual(
    at('13 00:00'),
  )
  expect(firstGap([span('11 00:00', '20 00:00')], window)).toEqual(at('10 00:00'))
  expect(firstGap([], window)).toEqual(at('10 00:00'))
})
