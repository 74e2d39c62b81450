import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { buildMesh, meshNode, type TubeBranch } from '#app/physics/tube.ts'

const line: TubeBranch = {
  name: 'line',
  sections: [
    { lengthM: 150, diameterM: 0.6 },
    { lengthM: 150, diameterM: 0.5 },
  ],
  pointsM: [75, 225, 33.3],
  valves: [{ name: 'GV-1', atM: 150, boreM: 0.4 }],
}
const spur: TubeBranch = {
  name: 'spur',
  from: { branch: 'line', atM: 120 },
  sections: [{ lengthM: 90, diameterM: 0.35 }],
}
const sum = (values: Float64Array): number => values.reduce((total, value) => total + value, 0)

describe('mesh', () => {
  test('stands exactly on pumps, gauges, joints and both faces of a valve', () => {
    const mesh = buildMesh([line, spur], 10)
    for (const x of [0, 33.3, 75, 120, 150, 225, 300])
      expect(mesh.atM[meshNode(mesh, 'line', x)]).toBeCloseTo(x, 9)
    const far = mesh.valveNodes.get('GV-1')!
    expect(mesh.atM[far]).toBe(150)
    expect(mesh.parent[far]).toBe(meshNode(mesh, 'line', 150))
    expect(mesh.passageLengthM[far]).toBe(0)
    expect(mesh.passageDiameterM[far]).toBe(0.4)
    expect(() => meshNode(mesh, 'line', 76)).toThrow('position of a node, m is 76')
  })

  test('a spur hangs on the node it leaves from', () => {
    const mesh = buildMesh([line, spur], 10)
    const first = mesh.branchOf.indexOf(1)
    expect(mesh.parent[first]).toBe(meshNode(mesh, 'line', 120))
    expect(mesh.passageDiameterM[first]).toBe(0.35)
    expect(mesh.atM[mesh.count - 1]).toBe(90)
  })

  test('has the volume and the wall of the tube, and no cell longer than asked, wherever the points stand', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0, max: 300, noNaN: true }), { maxLength: 8 }),
        fc.double({ min: 2, max: 60, noNaN: true }),
        (pointsM, cellM) => {
          const mesh = buildMesh([{ ...line, pointsM }, spur], cellM)
          const volume = (Math.PI / 4) * (150 * 0.36 + 150 * 0.25 + 90 * 0.35 ** 2)
          expect(sum(mesh.volumeM3) / volume).toBeCloseTo(1, 10)
          expect(sum(mesh.wallM2) / (Math.PI * (150 * 0.6 + 150 * 0.5 + 90 * 0.35))).toBeCloseTo(1, 10)
          expect(Math.max(...mesh.passageLengthM)).toBeLessThanOrEqual(cellM * (1 + 1e-8))
          mesh.parent.forEach((parent, node) => {
            expect(parent).toBeLessThan(node)
          })
        },
      ),
    )
  })

  test('refuses what is no tube', () => {
    expect(() => buildMesh([line, { ...spur, from: { branch: 'nowhere', atM: 1 } }], 10)).toThrow(
      'an earlier branch',
    )
    expect(() => buildMesh([{ ...line, pointsM: [301] }], 10)).toThrow(
      'position on branch line is 301; expected 0 to 300',
    )
    expect(() => buildMesh([{ ...line, valves: [{ name: 'GV-0', atM: 0, boreM: 0.4 }] }], 10)).toThrow(
      'tube on both sides of every valve',
    )
    expect(() => buildMesh([line, { ...spur, name: 'line' }], 10)).toThrow('a name used once')
    expect(() => buildMesh([line], 0.3)).toThrow(
      'cellM is 0.3; expected a length of at least the diameter, 0.6 m',
    )
    expect(buildMesh([line], 0.3, { finerThanBore: true }).count).toBeGreaterThan(1000)
    expect(() => buildMesh([{ name: 'bent', sections: [{ lengthM: 10, diameterM: -1 }] }], 10)).toThrow(
      'diameterM is -1',
    )
  })
})
