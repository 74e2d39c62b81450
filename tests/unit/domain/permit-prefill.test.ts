/** What a new permit starts with, and what it leaves to the people. */
import { describe, expect, test } from 'vitest'
import { PermitContentSchema } from '#app/domain/permit-content.ts'
import {
  type PrefillGround,
  type PrefillHeat,
  type PrefillPlan,
  prefilledContent,
} from '#app/domain/permit-prefill.ts'

const SG05: PrefillGround = {
  segments: [
    {
      tag: 'SG-05',
      line: 'Main line',
      startM: 600,
      endM: 750,
      circuits: [
        { tag: 'BH-05', kind: 'blanket', earthing: '' },
        { tag: 'DC-05', kind: 'direct-current', earthing: 'one point, at 675 m' },
      ],
    },
  ],
  neighbours: [
    { tag: 'SG-04', blankets: [] },
    { tag: 'SG-06', blankets: ['BH-06'] },
  ],
  valves: [
    { tag: 'GV-04', kind: 'gate', between: ['SG-04', 'SG-05'] },
    { tag: 'GV-05', kind: 'gate', between: ['SG-05', 'SG-06'] },
    { tag: 'NV-05', kind: 'vent', between: ['SG-05'] },
    { tag: 'PV-05', kind: 'pump-port', between: ['SG-05'] },
  ],
  supply: { tag: 'HX-1', openCircuitVolts: 75 },
}

const HEAT: PrefillHeat = { celsius: 150, rampKH: 10, soakHours: 168, amps: 1270.02, volts: 26.91 }

const PLAN: PrefillPlan = {
  id: 7,
  version: 3,
  title: 'Bake of SG-05, November',
  cart: 'MC-A',
  link: { number: 1, of: 1 },
  from: new Date('2026-11-04T05:00:00.000Z'),
  to: new Date('2026-11-13T16:59:12.345Z'),
  earthing: '',
}

const content = prefilledContent(SG05, HEAT, PLAN)

describe('from a bake plan', () => {
  test('place, limits and plan are carried over, current and voltage never rounded down', () => {
    expect(content).toMatchObject({
      title: 'Bake of SG-05, November',
      planId: 7,
      planVersion: 3,
      segments: ['SG-05'],
      fromM: 600,
      toM: 750,
      bays: 'Main line, 600 to 750 m',
      exclusionWestM: 10,
      exclusionEastM: 10,
      maxCelsius: 150,
      rampKH: 10,
      soakHours: 168,
      supply: 'HX-1',
      maxAmps: 1271,
      maxVolts: 27,
      openCircuitVolts: 75,
      earthing: 'one point, at 675 m',
    })
    expect(content.equipment).toEqual(['HX-1', 'MC-A', 'BH-05', 'DC-05', 'GV-04', 'GV-05', 'NV-05', 'PV-05'])
  })

  test('nothing is ticked and nobody named', () => {
    expect(content.hazards).toEqual({})
    expect(content.unattended).toBeNull()
    const { holderId, deputyIds, crewIds, isolatingPersonId, electricianId, attendantId } = content
    expect([holderId, isolatingPersonId, electricianId, attendantId]).toEqual([null, null, null, null])
    expect([...deputyIds, ...crewIds]).toEqual([])
    expect([content.notIncluded, content.barriers, content.rescue, content.nightCover]).toEqual([
      '',
      '',
      '',
      '',
    ])
    expect(content.contacts).toEqual([])
  })

  test('vent valve, both gates, spare feed, the blanket next door and the crane are proposed', () => {
    expect(content.points.map(({ tag, isolates, required }) => [tag, isolates, required])).toEqual([
      ['IP-05-1', 'NV-05, vent valve', 'Shut and locked'],
      ['IP-05-2', 'GV-04, gate valve', 'Shut and locked'],
      ['IP-05-3', 'GV-05, gate valve', 'Shut and locked'],
      [
        'IP-05-4',
        'Spare feeds to the bars of SG-05, all but HX-1',
        'Links taken out, cable ends earthed and covered',
      ],
      ['IP-05-5', 'BH-06, blanket of SG-06 next door', 'Breaker off and locked'],
      ['IP-05-6', 'Crane over 600 to 750 m', 'Key withdrawn'],
    ])
  })

  test('tests that heating with current asks for, oxygen again every twelve hours', () => {
    expect(content.tests.map(({ kind }) => kind)).toEqual([
      'oxygen',
      'zero-voltage',
      'earth-continuity',
      'joint-resistance',
      'earth-fault-monitor',
      'cut-out',
      'emergency-stop',
      'communications',
    ])
    expect(content.tests[0]).toMatchObject({ low: 19.5, high: 23.5, unit: '%', everyHours: 12 })
  })

  test('the window is the plan’s to the minute, and never longer than a permit may be', () => {
    expect([content.from, content.to]).toEqual(['2026-11-04T05:00:00.000Z', '2026-11-13T17:00:00.000Z'])
    const from = new Date('2026-10-20T04:00:00.500Z')
    const long = prefilledContent(SG05, HEAT, {
      ...PLAN,
      from,
      to: new Date(from.getTime() + 240 * 3_600_000),
    })
    expect([long.from, long.to]).toEqual(['2026-10-20T04:00:00.000Z', '2026-10-30T04:00:00.000Z'])
    expect(prefilledContent(SG05, HEAT, { ...PLAN, from: null, to: null })).toMatchObject({
      from: null,
      to: null,
    })
  })

  test('a link of a chain says which one it is', () => {
    const second = prefilledContent(SG05, HEAT, { ...PLAN, link: { number: 2, of: 3 } })
    expect(second.title).toBe('Bake of SG-05, November, permit 2 of 3')
    expect(second.work).toContain('permit 2 of 3 in a chain')
    expect(content.work).not.toContain('chain')
  })

  test('it is a content that can be kept', () => {
    expect(PermitContentSchema.parse(content)).toEqual(content)
  })
})

test('the gate inside a pair stays where the plan has it, and each segment has its own tests', () => {
  const [one] = SG05.segments
  const segment = (tag: string, startM: number) =>
    ({ ...one, tag, startM, endM: startM + 150 }) as typeof one & object
  const pair = prefilledContent(
    {
      segments: [segment('SG-11', 1500), segment('SG-12', 1650)],
      neighbours: [],
      valves: [
        { tag: 'GV-10', kind: 'gate', between: ['SG-10', 'SG-11'] },
        { tag: 'GV-11', kind: 'gate', between: ['SG-11', 'SG-12'] },
        // The last gate of a line has a segment on one side only.
        { tag: 'GV-12', kind: 'gate', between: ['SG-12'] },
      ],
      supply: SG05.supply,
    },
    HEAT,
    null,
  )
  expect(pair).toMatchObject({ fromM: 1500, toM: 1800, segments: ['SG-11', 'SG-12'], planId: null })
  const gates = pair.points.filter(({ isolates }) => isolates.startsWith('GV-'))
  expect(gates.map(({ required }) => required)).toEqual([
    'Shut and locked',
    'Locked in the position that the plan names',
    'Shut and locked',
  ])
  expect(pair.tests.filter(({ kind }) => kind === 'zero-voltage')).toHaveLength(2)
  expect(pair.earthing).toBe('SG-11: one point, at 675 m; SG-12: one point, at 675 m')
})

test('without a supply nothing electrical is proposed, and without a temperature no work is made up', () => {
  const nothing: PrefillHeat = { celsius: null, rampKH: null, soakHours: null, amps: null, volts: null }
  const bare = prefilledContent({ ...SG05, supply: null }, nothing, null)
  expect(bare).toMatchObject({
    title: 'Heating of SG-05',
    work: '',
    maxCelsius: null,
    supply: null,
    maxAmps: null,
    openCircuitVolts: null,
    earthing: '',
  })
  expect(bare.tests.map(({ kind }) => kind)).toEqual([
    'oxygen',
    'cut-out',
    'emergency-stop',
    'communications',
  ])
  expect(bare.points.some(({ isolates }) => isolates.startsWith('Spare'))).toBe(false)
  expect(bare.equipment).not.toContain('DC-05')
})
