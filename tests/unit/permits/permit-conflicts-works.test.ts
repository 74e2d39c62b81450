import { describe, expect, test } from 'vitest'
import { findConflicts } from '#app/domain/permit-conflicts.ts'
import { at, facts, found, only, own, place, SEGMENTS, work } from './conflict-grounds.ts'

const stretch = (fromM: number, toM: number, line = 'MAIN') => ({ line, fromM, toM })

describe('K3, people within the exclusion', () => {
  test('a leak check from 750 m on comes 10 m into the exclusion of a segment that ends at 750 m', () => {
    const k3 = only({ works: [work()] }, 'K3')
    expect(k3).toMatchObject({ key: 'K3:work:12', effect: 'ruling', place: stretch(750, 760) })
    expect(k3.text).toContain('750 to 900 m')
    expect(k3.text).toContain('within 10 m of SG-05, heated up to 150 °C: 750 to 760 m')
  })

  test.each([
    ['exactly 10 m off', stretch(760, 900), false],
    ['a hand’s breadth nearer', stretch(759.9, 900), true],
    ['on the west side', stretch(500, 590.5), true],
    ['on the west side, exactly 10 m off', stretch(450, 590), false],
    ['at a point inside', stretch(755, 755), true],
    ['at a point on the edge', stretch(760, 760), false],
    ['on another line with the same chainage', stretch(750, 900, 'SPUR'), false],
  ])('work %s', (_, where, meets) => {
    expect(found({ works: [work({ stretch: where })] }).some((key) => key.startsWith('K3'))).toBe(meets)
  })

  test('times that only touch are no conflict', () => {
    expect(found({ works: [work({ from: at('15 08:00'), to: at('16 06:00') })] })).toEqual([])
    expect(found({ works: [work({ from: at('25 18:00'), to: at('25 19:00') })] })).toEqual([])
  })

  test('what is refused, over or called off is no longer reckoned with; what has begun is, until it is finished', () => {
    for (const state of ['refused', 'finished', 'called-off'] as const)
      expect(found({ works: [work({ state })] })).toEqual([])
    const overrun = { now: at('18 08:00'), works: [work({ state: 'started' as const })] }
    expect(found(overrun)).toContain('K3:work:12 ruling')
    expect(found({ ...overrun, works: [work()] })).toEqual([])
  })

  test('steel up to 60 °C needs no exclusion; unknown heat is taken as hot', () => {
    expect(found({ own: own([5], { maxCelsius: 60 }), works: [work()] })).toEqual([])
    expect(found({ own: own([5], { maxCelsius: 60.5 }), works: [work()] })).toContain('K3:work:12 ruling')
    expect(only({ own: own([5], { maxCelsius: null }), works: [work()] }, 'K3').text).toContain(
      'not said yet',
    )
  })

  test('a permit may ask for a longer exclusion, never for a shorter one than the site', () => {
    const works = [work({ stretch: stretch(765, 900) })]
    expect(found({ own: own([5], { exclusionEastM: 20 }), works })).toContain('K3:work:12 ruling')
    expect(found({ own: own([5], { exclusionWestM: 20 }), works })).toEqual([])
    expect(found({ own: own([5], { exclusionEastM: 5 }), works: [work()] })).toContain('K3:work:12 ruling')
  })

  test('the exclusion goes round the corner into a spur', () => {
    const root = work({ stretch: stretch(0, 90, 'SPUR') })
    expect(only({ own: own([8]), works: [root] }, 'K3').place).toEqual(stretch(0, 10, 'SPUR'))
    expect(found({ own: own([8]), works: [work({ stretch: stretch(10, 90, 'SPUR') })] })).toEqual([])
  })

  test('at the heated segment itself no ruling helps', () => {
    expect(only({ works: [work({ stretch: stretch(700, 720) })] }, 'K3').effect).toBe('block')
  })

  test('work that does not say where is taken to come near, but for what concerns the whole site', () => {
    expect(only({ works: [work({ kind: 'bay-work', stretch: null })] }, 'K3')).toMatchObject({
      effect: 'ruling',
      place: null,
    })
    for (const kind of ['visit', 'power-maintenance'] as const)
      expect(found({ works: [work({ kind, stretch: null })] })).toEqual(['K11:work:12 warning'])
  })

  test('a visit through the exclusion is people like any others', () => {
    expect(found({ works: [work({ kind: 'visit', stretch: stretch(700, 1000) })] })).toEqual([
      'K3:work:12 block',
    ])
  })
})

describe('K4, gas let in next door', () => {
  const vent = work({ kind: 'vent', stretch: stretch(780, 900) })
  const point = { tag: 'IP-05-3', isolates: 'GV-05, gate valve', required: 'shut', holds: false }

  test('is blocked while no point of the permit keeps the gate valve shut', () => {
    const k4 = only({ works: [vent] }, 'K4')
    expect(k4).toMatchObject({ key: 'K4:work:12:GV-05', effect: 'block', place: stretch(750, 750) })
    for (const other of [
      { ...point, isolates: 'GV-051' },
      { ...point, required: 'open' },
      { ...point, isolates: 'GV-04' },
    ])
      expect(only({ own: own([5], { points: [other] }), works: [vent] }, 'K4').effect).toBe('block')
  })

  test('is to be known while the point is planned, and nothing once its lock is verified', () => {
    expect(only({ own: own([5], { points: [point] }), works: [vent] }, 'K4').effect).toBe('warning')
    expect(found({ own: own([5], { points: [{ ...point, holds: true }] }), works: [vent] })).toEqual([])
  })

  test('concerns vents, openings and entries of a neighbour, not of a segment further on', () => {
    for (const kind of ['opening', 'entry'] as const)
      expect(found({ works: [work({ kind, stretch: stretch(780, 900) })] })).toEqual([
        'K4:work:12:GV-05 block',
      ])
    expect(found({ works: [work({ kind: 'bay-work', stretch: stretch(780, 900) })] })).toEqual([])
    expect(found({ works: [work({ kind: 'vent', stretch: stretch(910, 1000) })] })).toEqual([])
  })

  test('opening the heated segment itself is blocked whatever is locked', () => {
    expect(
      found({
        own: own([5], { points: [{ ...point, holds: true }] }),
        works: [work({ kind: 'opening', stretch: stretch(620, 640) })],
      }),
    ).toEqual(['K4:work:12 block'])
  })

  test('a neighbour that is open to gas already counts as well', () => {
    const segments = SEGMENTS.map((one) => (one.tag === 'SG-06' ? place(6, 'vented') : one))
    expect(found({ segments })).toEqual(['K4:state:SG-06:GV-05 block'])
    expect(found({ segments, own: own([5], { points: [{ ...point, holds: true }] }) })).toEqual([])
  })
})

describe('K9 to K12', () => {
  test('K9: fire detection out of order here, or nobody says where', () => {
    const off = { kind: 'fire-detection-off', people: '' } as const
    expect(only({ works: [work({ ...off, stretch: null })] }, 'K9').effect).toBe('ruling')
    expect(found({ works: [work({ ...off, stretch: stretch(755, 1000) })] })).toEqual(['K9:work:12 ruling'])
    expect(found({ works: [work({ ...off, stretch: stretch(760, 1000) })] })).toEqual([])
  })

  test('K10: a lift over the segment is blocked, one beside it is people in the exclusion', () => {
    expect(only({ works: [work({ kind: 'lifting', stretch: stretch(700, 900) })] }, 'K10')).toMatchObject({
      effect: 'block',
      place: stretch(700, 750),
    })
    expect(found({ works: [work({ kind: 'lifting', stretch: stretch(750, 760) })] })).toEqual([
      'K3:work:12 ruling',
    ])
  })

  test('K11: work on the power is to be known wherever it is', () => {
    const power = work({ kind: 'power-maintenance', stretch: stretch(2000, 2100) })
    expect(only({ works: [power] }, 'K11').effect).toBe('warning')
  })

  test('K11: the clock is put back on 25 October 2026 and forward on 28 March 2027', () => {
    const autumn = own([5], { from: new Date('2026-10-24T04:00:00Z'), to: new Date('2026-10-26T04:00:00Z') })
    const back = only({ now: new Date('2026-10-20T00:00:00Z'), own: autumn }, 'K11')
    expect(back.key).toBe('K11:clock:2026-10-25')
    expect(back.text).toContain('UTC+02:00 becomes UTC+01:00 at 2026-10-25 02:00 (UTC+01:00)')
    const spring = own([5], { from: new Date('2027-03-27T05:00:00Z'), to: new Date('2027-03-29T04:00:00Z') })
    expect(only({ own: spring }, 'K11').text).toContain('UTC+01:00 becomes UTC+02:00 at 2027-03-28 03:00')
    const after = own([5], { from: new Date('2026-10-25T01:00:00Z'), to: new Date('2026-10-26T04:00:00Z') })
    expect(found({ now: new Date('2026-10-20T00:00:00Z'), own: after })).toEqual([])
  })

  test('K11: a holiday in the window, its first and last day included', () => {
    const holidays = [{ day: '2026-11-25', name: 'Local feast' }]
    expect(found({ holidays })).toEqual(['K11:holiday:2026-11-25 warning'])
    expect(found({ holidays, own: own([5], { to: at('25 00:00') }) })).toEqual([])
  })

  test('K11: hours in which no crew is at work or on call', () => {
    const worked = [{ days: [1, 2, 3, 4, 5], from: '06:45', to: '19:00' }]
    const roster = { worked, onCall: { firstMonday: '2026-11-16', everyWeeks: 2 } }
    const crews = [{ code: 'A', roster, endsMs: null }]
    // Monday 23rd to Wednesday 25th November 18:00 is no week on call: 7 h, 12 h and 12 h of night.
    const alone = only({ crews }, 'K11')
    expect(alone.key).toBe('K11:on-call')
    expect(alone.text).toContain('31 hours')
    expect(alone.text).toContain('2026-11-23 00:00')
    expect(
      found({
        crews: [
          ...crews,
          { ...crews[0]!, roster: { ...roster, onCall: { ...roster.onCall, everyWeeks: 1 } } },
        ],
      }),
    ).toEqual([])
  })

  test('K12: spraying beside hot steel is to be known', () => {
    const k12 = findConflicts(facts({ works: [work()] })).filter(({ rule }) => rule === 'K12')
    expect(k12).toMatchObject([{ key: 'K12:work:12', effect: 'warning', place: stretch(750, 760) }])
    expect(found({ works: [work({ kind: 'bay-work' })] })).toEqual(['K3:work:12 ruling'])
  })
})
