import { describe, expect, test } from 'vitest'
import { bakesIn } from '../../../app/domain/bake-history.ts'
import type { SegmentState } from '../../../app/domain/segment-states.ts'

const at = (day: number, hour = 0) => new Date(Date.UTC(2026, 10, day, hour))

function spans(...steps: [SegmentState, Date, string?][]) {
  return steps.map(([state, since, reason], index) => ({
    state,
    since,
    endedAt: steps[index + 1]?.[1] ?? null,
    reason: reason ?? '',
  }))
}

describe('bakes in the states of a segment', () => {
  test('none where nothing was heated', () => {
    expect(bakesIn(spans(['in-service', at(1)], ['bake-prep', at(2)], ['in-service', at(3)]))).toEqual([])
  })

  test('a whole bake has all its instants, also when the states come newest first', () => {
    const states = spans(
      ['bake-prep', at(1)],
      ['heating', at(3, 18)],
      ['soak', at(4, 7)],
      ['cooling', at(11, 8), 'A week of soak done'],
      ['post-bake-test', at(12, 9)],
    )
    const expected = {
      prepFrom: at(1),
      heatingFrom: at(3, 18),
      soakFrom: at(4, 7),
      coolingFrom: at(11, 8),
      coldFrom: at(12, 9),
      phase: 'over',
      offReason: 'A week of soak done',
    }
    expect(bakesIn(states)).toEqual([expected])
    expect(bakesIn(states.reverse())).toEqual([expected])
  })

  test.each([
    ['heating', 'heating'],
    ['soak', 'soak'],
    ['cooling', 'cooling'],
  ] as const)('one that is at %s is told so', (state, phase) => {
    const steps: [SegmentState, Date][] = [
      ['heating', at(3)],
      ['soak', at(4)],
      ['cooling', at(5)],
    ]
    const until = steps.findIndex(([each]) => each === state)
    expect(bakesIn(spans(...steps.slice(0, until + 1)))[0]?.phase).toBe(phase)
  })

  test('one broken off in the ramp has no soak', () => {
    const [found] = bakesIn(
      spans(['heating', at(3)], ['cooling', at(4), 'Supply tripped'], ['in-service', at(5)]),
    )
    expect(found).toMatchObject({ soakFrom: null, offReason: 'Supply tripped', phase: 'over' })
  })

  test('heating taken up again while cooling goes on with the same bake', () => {
    const bakes = bakesIn(
      spans(
        ['heating', at(3)],
        ['soak', at(4)],
        ['cooling', at(5), 'Trip'],
        ['heating', at(5, 4)],
        ['soak', at(5, 9)],
      ),
    )
    expect(bakes).toHaveLength(1)
    expect(bakes[0]).toMatchObject({ soakFrom: at(4), coolingFrom: null, offReason: '', phase: 'soak' })
  })

  test('two bakes come newest first', () => {
    const bakes = bakesIn(
      spans(
        ['heating', at(1)],
        ['cooling', at(2)],
        ['in-service', at(3)],
        ['heating', at(8)],
        ['soak', at(9)],
      ),
    )
    expect(bakes.map(({ heatingFrom }) => heatingFrom)).toEqual([at(8), at(1)])
  })
})
