import { renderToStaticMarkup } from 'react-dom/server'
import { expect, test } from 'vitest'
import { HazardList } from '#app/components/permits/hazard-list.tsx'
import { type HazardView, STANDING_SENTENCE } from '#app/domain/hazards.ts'

function hazard(own: Partial<HazardView> = {}): HazardView {
  return {
    key: 'shock',
    label: 'Electric shock',
    applies: true,
    text: 'Covers of both clamps are locked.',
    facts: [
      { name: 'Across the bars', value: '54.7 V at 1267 A', how: 'current times resistance.', source: 'Ohm' },
    ],
    findings: ['75 V across an open joint.'],
    precautions: ['Only the qualified person opens covers.'],
    thresholds: [
      {
        key: 'shock-volts',
        label: 'Voltage to be guarded',
        standing: 'in-force',
        text: '50 V',
        detail: 'Site rule 7; adopted by Ione.',
      },
    ],
    ...own,
  }
}

const text = (hazards: readonly HazardView[]): string =>
  renderToStaticMarkup(<HazardList hazards={hazards} />)
    .replaceAll(/<[^>]+>/g, ' ')
    .replaceAll(/\s+/g, ' ')

test('a caution shows figures, what is beyond a limit, precautions, the site’s own text and the source', () => {
  const shown = text([hazard()])
  for (const part of [
    'Cautions for this segment while heated',
    'Electric shock',
    'Across the bars: 54.7 V at 1267 A',
    'Beyond a limit: 75 V across an open joint.',
    'Only the qualified person opens covers.',
    'At this segment: Covers of both clamps are locked.',
    'Voltage to be guarded: 50 V',
    'Voltage to be guarded, 50 V: Site rule 7; adopted by Ione.',
    'Source: Ohm.',
  ])
    expect(shown).toContain(part)
})

test('the standing sentence is there, whatever the cautions', () => {
  expect(text([hazard()])).toContain(STANDING_SENTENCE)
  expect(text([])).toContain(STANDING_SENTENCE)
})

test('a threshold that is not set is marked as such in words', () => {
  const html = renderToStaticMarkup(
    <HazardList
      hazards={[
        hazard({
          thresholds: [
            {
              key: 'shock-volts',
              label: 'Voltage to be guarded',
              standing: 'not-set',
              text: 'not set by site',
              detail: 'No value has been adopted here.',
            },
          ],
        }),
      ]}
    />,
  )
  expect(html).toMatch(/bg-warn-soft[^>]*>not set by site</)
  expect(html).toContain('No value has been adopted here.')
})

test('one without an answer says so, one that does not apply stands below with its reason', () => {
  const shown = text([
    hazard({ applies: null, text: '' }),
    hazard({ key: 'x-ray', label: 'X-ray', applies: false, text: 'No glass on this stretch.' }),
    hazard({ key: 'lifting', label: 'Lifting', applies: false, text: '' }),
  ])
  expect(shown).toContain('not answered by the requester yet')
  const below = shown.slice(shown.indexOf('Said not to apply'))
  expect(below).toContain('X-ray: No glass on this stretch.')
  expect(below).toContain('Lifting: no reason given')
  expect(shown.match(/Only the qualified person/g)).toHaveLength(1)
})
