import { expect, test } from 'vitest'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import { permitDifferences, permitLines } from '#app/domain/permit-differences.ts'

const wording = { person: (id: number) => `person ${id}`, time: (iso: string) => `at ${iso}` }

function content(change: Partial<PermitContent>): PermitContent {
  return { ...emptyPermitContent(), ...change }
}

test('ten degrees more are one difference, with both figures', () => {
  expect(permitDifferences(content({ maxCelsius: 150 }), content({ maxCelsius: 160 }), wording)).toEqual([
    { section: 'work', label: 'Highest temperature', before: '150 °C', after: '160 °C' },
  ])
})

test('what has not changed is no difference', () => {
  const one = content({ title: 'Bake of SG-05', crewIds: [4, 2], from: '2026-11-04T05:00:00.000Z' })
  expect(permitDifferences(one, structuredClone(one), wording)).toEqual([])
})

test('people and times are written for the reader', () => {
  const found = permitDifferences(
    content({ deputyIds: [3], to: null }),
    content({ deputyIds: [3, 7], to: '2026-11-13T17:00:00.000Z' }),
    wording,
  )
  expect(found).toEqual([
    { section: 'people', label: 'Deputies', before: 'person 3', after: 'person 3, person 7' },
    { section: 'validity', label: 'Window to', before: '', after: 'at 2026-11-13T17:00:00.000Z' },
  ])
})

test('a point that has gone, one that is new and one that asks for more are three differences', () => {
  const point = { isolates: 'vent valve', required: 'shut', purpose: 'to-heat' as const, boxed: false }
  const found = permitDifferences(
    content({
      points: [
        { tag: 'A', ...point },
        { tag: 'B', ...point },
      ],
    }),
    content({
      points: [
        { tag: 'B', ...point, required: 'shut and blanked' },
        { tag: 'C', ...point },
      ],
    }),
    wording,
  )
  expect(found.map(({ label, before, after }) => [label, before !== '', after !== ''])).toEqual([
    ['Point B', true, true],
    ['Point C', false, true],
    ['Point A', true, false],
  ])
})

test('a hazard ruled out where it applied before is told with its reason', () => {
  const [found] = permitDifferences(
    content({ hazards: { fire: { applies: true, text: 'Watch for an hour' } } }),
    content({ hazards: { fire: { applies: false, text: 'No insulation left' } } }),
    wording,
  )
  expect(found).toMatchObject({
    label: 'Fire',
    before: 'applies: Watch for an hour',
    after: 'does not apply: No insulation left',
  })
})

test('limits of tests are read with their ends, and a change of any of them shows', () => {
  const oxygen = { kind: 'oxygen' as const, place: 'bay 5', low: 19.5, high: 23.5, unit: '%', everyHours: 12 }
  const before = content({ tests: [oxygen] })
  expect(permitLines(before, wording).filter(({ section }) => section === 'tests')).toEqual([
    {
      key: 'tests:oxygen@bay 5',
      section: 'tests',
      label: 'Test: Oxygen at bay 5',
      text: '19.5 to 23.5 %, again every 12 h',
    },
  ])
  const after = content({ tests: [{ ...oxygen, everyHours: null }] })
  expect(permitDifferences(before, after, wording)).toHaveLength(1)
})

test('every field of the content leads to a line: a change of any of them is seen', () => {
  const full: PermitContent = {
    title: 'a',
    related: [{ kind: 'electrical', number: 'E-1' }],
    planId: 1,
    planVersion: 2,
    segments: ['SG-01'],
    fromM: 1,
    toM: 2,
    bays: 'a',
    exclusionWestM: 1,
    exclusionEastM: 1,
    equipment: ['a'],
    work: 'a',
    notIncluded: 'a',
    maxCelsius: 100,
    rampKH: 1,
    soakHours: 1,
    supply: 'HX-1',
    maxAmps: 1,
    maxVolts: 1,
    openCircuitVolts: 1,
    earthing: 'a',
    unattended: true,
    nightCover: 'a',
    annex: { alarms: 'a', onCallMinutes: 1, shutOff: 'a' },
    holderId: 1,
    deputyIds: [2],
    crewIds: [3],
    isolatingPersonId: 4,
    electricianId: 5,
    attendantId: 6,
    from: '2026-01-01T00:00:00.000Z',
    to: '2026-01-02T00:00:00.000Z',
    shifts: 'a',
    hazards: { fire: { applies: true, text: 'a' } },
    points: [{ tag: 'A', isolates: 'a', required: 'a', purpose: 'to-heat', boxed: true }],
    tests: [{ kind: 'oxygen', place: 'a', low: 1, high: 2, unit: '%', everyHours: 1 }],
    protectiveEquipment: 'a',
    barriers: 'a',
    signs: 'a',
    lighting: 'a',
    rescue: 'a',
    assemblyPoint: 'a',
    contacts: [{ role: 'a', name: 'a', phone: '1' }],
  }
  const empty = emptyPermitContent()
  for (const field of Object.keys(full) as (keyof PermitContent)[]) {
    // A plan's version means nothing without its plan, and a stretch nothing with one end.
    const kept = { ...full, [field]: empty[field] }
    expect(permitDifferences(full, kept, wording), field).not.toEqual([])
  }
})
