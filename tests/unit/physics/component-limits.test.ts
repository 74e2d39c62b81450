import { describe, expect, it } from 'vitest'
import { hottestBake, objectionsTo, PART_LIMITS, type PartOnLine } from '#app/physics/component-limits.ts'

const PARTS: PartOnLine[] = [
  { kind: 'copper-gasket', name: 'joint 4' },
  { kind: 'elastomer-gate-valve-closed', name: 'valve V2' },
  { kind: 'fluoroelastomer-seal', name: 'port 7' },
]

describe('component limits', () => {
  it('names the part that sets the hottest bake', () => {
    expect(hottestBake(20, PARTS)).toEqual({ celsius: 120, setBy: PARTS[1] })
    expect(hottestBake(20, [])).toBeNull()
  })

  it('objects with the worst part first and not at the limit itself', () => {
    const found = objectionsTo(160, 20, PARTS)
    expect(found.map((o) => [o.part.name, o.excessK])).toEqual([
      ['valve V2', 40],
      ['port 7', 10],
    ])
    expect(objectionsTo(120, 20, PARTS)).toEqual([])
  })

  it('compares a bonnet by its own temperature, not by that of the tube', () => {
    // 20 + 0.7 x (150 - 20) = 111 degrees; the limit of 120 is met at 20 + 100/0.7 = 162.9 degrees of tube.
    const bonnet: PartOnLine = { kind: 'elastomer-gate-valve-closed', name: 'V4', riseShare: 0.7 }
    expect(objectionsTo(150, 20, [bonnet])).toEqual([])
    expect(hottestBake(20, [bonnet])!.celsius).toBeCloseTo(162.857, 3)
    const [objection] = objectionsTo(170, 20, [bonnet])
    expect(objection!.reachesC).toBeCloseTo(125, 9)
    expect(objection!.excessK).toBeCloseTo(5, 9)
    expect(() => hottestBake(20, [{ ...bonnet, riseShare: 0 }])).toThrow(/rise share of V4 is 0/)
  })

  it('puts the own sheet of a part before the table', () => {
    const own: PartOnLine = { kind: 'elastomer-gate-valve-closed', name: 'V3', ownLimitC: 200 }
    expect(objectionsTo(160, 20, [own])).toEqual([])
    expect(hottestBake(20, [own])!.celsius).toBe(200)
    expect(() => objectionsTo(160, 20, [{ ...own, ownLimitC: -5 }])).toThrow(/limit of V3 is -5/)
  })

  it('never lets a closed elastomer valve take more than an open one, nor a running pump more than a resting one', () => {
    expect(PART_LIMITS['elastomer-gate-valve-closed'].celsius).toBeLessThan(
      PART_LIMITS['elastomer-gate-valve-open'].celsius,
    )
    expect(PART_LIMITS['ion-pump-operating'].celsius).toBeLessThan(
      PART_LIMITS['ion-pump-with-magnets'].celsius,
    )
  })
})
