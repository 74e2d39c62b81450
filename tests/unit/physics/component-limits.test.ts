import { describe, expect, it } from 'vitest'
import { hottestBake, objectionsTo, PART_LIMITS, type PartOnLine } from '#app/physics/component-limits.ts'

const PARTS: PartOnLine[] = [
  { kind: 'copper-gasket', name: 'joint 4' },
  { kind: 'elastomer-gate-valve-closed', name: 'valve V2' },
  { kind: 'fluoroelastomer-seal', name: 'port 7' },
]

describe('component limits', () => {
  it('names the part that sets the hottest bake', () => {
    expect(hottestBake(PARTS)).toEqual({ celsius: 120, setBy: PARTS[1] })
    expect(hottestBake([])).toBeNull()
  })

  it('objects with the worst part first and not at the limit itself', () => {
    const found = objectionsTo(160, PARTS)
    expect(found.map((o) => [o.part.name, o.excessK])).toEqual([
      ['valve V2', 40],
      ['port 7', 10],
    ])
    expect(objectionsTo(120, PARTS)).toEqual([])
  })

  it('puts the own sheet of a part before the table', () => {
    const own: PartOnLine = { kind: 'elastomer-gate-valve-closed', name: 'V3', ownLimitC: 200 }
    expect(objectionsTo(160, [own])).toEqual([])
    expect(hottestBake([own])!.celsius).toBe(200)
    expect(() => objectionsTo(160, [{ ...own, ownLimitC: -5 }])).toThrow(/limit of V3 is -5/)
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
