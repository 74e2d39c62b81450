import fc from 'fast-check'
import { Matrix, solve } from 'ml-matrix'
import { describe, expect, test } from 'vitest'
import { hydrogenDiffusivity } from '#app/physics/hydrogen.ts'
import { hydrogenAge, temperatureAt, temperatureProgramme } from '#app/physics/programme.ts'
import { factorTree, solveTree, treeMatrix } from '#app/physics/tree-matrix.ts'

describe('elimination on a tree', () => {
  test('agrees with a dense solver on random trees', () => {
    const entry = fc.double({ min: 0.01, max: 1, noNaN: true })
    const node = fc.tuple(fc.nat(1000), entry, entry, entry)
    fc.assert(
      fc.property(fc.array(node, { minLength: 2, maxLength: 30 }), (nodes) => {
        const n = nodes.length
        const matrix = treeMatrix(Int32Array.from(nodes, ([pick], i) => (i === 0 ? -1 : pick % i)))
        const dense = Matrix.zeros(n, n)
        nodes.forEach(([, up, down], i) => {
          // Storage leaves every balance by itself.
          matrix.excess[i] = 1 + up
          dense.set(i, i, dense.get(i, i) + 1 + up)
          if (i === 0) return
          const parent = matrix.parent[i]!
          matrix.up[i] = up
          matrix.down[i] = down
          dense.set(i, i, dense.get(i, i) + up)
          dense.set(parent, i, -up)
          dense.set(parent, parent, dense.get(parent, parent) + down)
          dense.set(i, parent, -down)
        })
        const values = Float64Array.from(nodes, ([, , , right]) => right)
        const expected = solve(dense, Matrix.columnVector(Array.from(values))).to1DArray()
        factorTree(matrix)
        solveTree(matrix, values)
        expected.forEach((x, i) => {
          expect(values[i]).toBeCloseTo(x, 10)
        })
      }),
    )
  })

  test('loses no amount where flow between nodes outweighs what they hold by fifteen digits', () => {
    const n = 200
    const matrix = treeMatrix(Int32Array.from({ length: n }, (_, i) => i - 1))
    matrix.excess.fill(1)
    matrix.up.fill(1e15, 1)
    matrix.down.fill(1e15, 1)
    const values = new Float64Array(n)
    values[n - 1] = n
    factorTree(matrix)
    solveTree(matrix, values)
    expect(values.reduce((sum, value) => sum + value, 0) / n).toBeCloseTo(1, 13)
    expect(values[0]).toBeCloseTo(1, 10)
  })
})

describe('temperature programme', () => {
  const ramp = temperatureProgramme([
    { atS: 0, kelvin: 293.15 },
    { atS: 100, kelvin: 393.15 },
    { atS: 300, kelvin: 393.15 },
  ])
  test('is straight between corners and level outside', () => {
    expect([-5, 0, 25, 100, 200, 999].map((t) => temperatureAt(ramp, t))).toEqual([
      293.15, 293.15, 318.15, 393.15, 393.15, 393.15,
    ])
  })
  test('the age grows by D(T) and is the same whichever corner it is counted over', () => {
    const age = hydrogenAge(ramp, 0)
    expect(age(0)).toBe(0)
    expect((age(500) - age(300)) / (200 * hydrogenDiffusivity(393.15))).toBeCloseTo(1, 10)
    const late = hydrogenAge(ramp, 50)
    expect((age(250) - age(50)) / late(250)).toBeCloseTo(1, 9)
    expect(() => late(49)).toThrow('seconds is 49')
  })
  test('refuses corners out of order', () => {
    const corners = [
      { atS: 10, kelvin: 300 },
      { atS: 10, kelvin: 310 },
    ]
    expect(() => temperatureProgramme(corners)).toThrow('a time after the corner before it')
  })
})
