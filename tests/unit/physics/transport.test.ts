import { describe, expect, test } from 'vitest'
import { crossSection, molecularSpecific } from '#app/physics/conductance.ts'
import { BOLTZMANN, T20_K } from '#app/physics/constants.ts'
import type { GasRun } from '#app/physics/gas-run.ts'
import { meanSpeed } from '#app/physics/gases.ts'
import { temperatureProgramme } from '#app/physics/programme.ts'
import { linePositions, steadyPressures } from '#app/physics/steady.ts'
import { type GasHistory, runTransport, TransportError, type TransportRun } from '#app/physics/transport.ts'
import { buildMesh, meshNode, type TubeBranch } from '#app/physics/tube.ts'
import { caseC, steadyPump } from '#tests/fixtures/physics/benchmark-runs.ts'
import { checkInput, expectCheck } from '#tests/fixtures/physics/check-values.ts'

const room = { programmes: [temperatureProgramme([{ atS: 0, kelvin: T20_K }])] }

function run(
  branches: TubeBranch[],
  cellM: number,
  gas: (node: (x: number, branch?: string) => number) => GasRun,
) {
  const mesh = buildMesh(branches, cellM)
  const node = (x: number, branch = branches[0]!.name): number => meshNode(mesh, branch, x)
  return { mesh, node, base: { mesh, thermal: room, fromS: 0, gases: [gas(node)] } }
}
const only = (transport: TransportRun): GasHistory => runTransport(transport)[0]!

describe('against exact answers', () => {
  test('a long tube of nitrogen opened to a sink follows the Fourier series', () => {
    const id = 'tube.transient.closed_end'
    const [length, d, t] = ['L', 'd', 't'].map((name) => checkInput(id, name)) as [number, number, number]
    const diffusivity = molecularSpecific('N2', d, T20_K) / crossSection(d)
    let far = 0
    let mean = 0
    for (let n = 0; n < 60; n++) {
      const k = ((2 * n + 1) * Math.PI) / (2 * length)
      const decay = Math.exp(-diffusivity * k * k * t)
      far += ((n % 2 === 0 ? 4 : -4) / ((2 * n + 1) * Math.PI)) * decay
      mean += (8 / ((2 * n + 1) ** 2 * Math.PI ** 2)) * decay
    }
    expectCheck(id, far)
    expectCheck('tube.transient.mean', mean)
    const { base, node } = run(
      [{ name: 'tube', sections: [{ lengthM: length, diameterM: d }] }],
      10,
      (at) => ({
        gas: 'N2',
        startPa: 1e-4,
        pumps: [steadyPump(at(0), 1e6)],
      }),
    )
    const history = only({ ...base, outputsS: [t], tolerance: 1e-4 })
    expect(history.pressurePa[0]![node(length)]! / (1e-4 * far)).toBeCloseTo(1, 3)
    const amount = (1e-4 * crossSection(d) * length) / (BOLTZMANN * T20_K)
    expect(history.held[0]! / (amount * mean)).toBeCloseTo(1, 3)
  })

  test('comes to the steady profile of pumps and a leak', () => {
    const line = {
      lengthM: 150,
      specific: molecularSpecific('H2', 0.6, T20_K),
      sourcePerM: 5e-10 * Math.PI * 0.6,
      pumps: [{ atM: 75, speedM3S: 1.2 }],
      leaks: [{ atM: 20, loadPaM3S: 1e-8 }],
    }
    const { base, node } = run(
      [{ name: 'tube', sections: [{ lengthM: 150, diameterM: 0.6 }], pointsM: [20, 75] }],
      5,
      (at) => ({
        gas: 'H2',
        startPa: 1e-3,
        walls: [{ kind: 'low-hydrogen', qPaMS: 5e-10, atK: T20_K }],
        pumps: [steadyPump(at(75), 1.2)],
        leaks: [{ node: at(20), loadPaM3S: [{ fromS: 0, value: 1e-8 }] }],
      }),
    )
    const history = only({ ...base, outputsS: [1e5] })
    const positions = linePositions(line)
    steadyPressures(line, positions).forEach((p, i) => {
      expect(history.pressurePa[0]![node(positions[i]!)]! / p).toBeCloseTo(1, 7)
    })
  })

  test('a hot half of a closed tube stands higher by the root of the temperatures', () => {
    const { base, mesh, node } = run(
      [{ name: 'tube', sections: [{ lengthM: 20, diameterM: 0.5 }] }],
      1,
      () => ({
        gas: 'N2',
        startPa: 1e-5,
        pumps: [],
      }),
    )
    const zoneOfNode = Int32Array.from(mesh.atM, (x) => (x > 10 ? 1 : 0))
    const programmes = [293.15, 423.15].map((kelvin) => temperatureProgramme([{ atS: 0, kelvin }]))
    const history = only({ ...base, thermal: { programmes, zoneOfNode }, outputsS: [1e4] })
    const p = history.pressurePa[0]!
    expect(p[node(20)]! / p[node(0)]!).toBeCloseTo(Math.sqrt(423.15 / 293.15), 8)
    expect(history.massError).toBeLessThan(1e-12)
  })

  test('a pump with a cold mouth on a hot tube takes p S/sqrt(T_mouth T_wall)', () => {
    const { base } = run([{ name: 'tube', sections: [{ lengthM: 10, diameterM: 0.5 }] }], 1, (at) => ({
      gas: 'H2',
      startPa: 1e-5,
      pumps: [{ ...steadyPump(at(0), 1), mouthK: 293.15 }],
      leaks: [{ node: at(0), loadPaM3S: [{ fromS: 0, value: 1e-6 }] }],
    }))
    const hot = { programmes: [temperatureProgramme([{ atS: 0, kelvin: 423.15 }])] }
    const p = only({ ...base, thermal: hot, outputsS: [1e4] }).pressurePa[0]![0]!
    expect(p / (1e-6 * Math.sqrt(423.15 / 293.15))).toBeCloseTo(1, 8)
  })
})

test('a gas that nothing feeds any more is pumped to nothing without trouble', () => {
  const { base } = run([{ name: 'tube', sections: [{ lengthM: 20, diameterM: 0.5 }] }], 1, (at) => ({
    gas: 'N2',
    startPa: 1e-4,
    pumps: [steadyPump(at(0), 0.4)],
  }))
  const history = only({ ...base, outputsS: [100, 1e6] })
  const slow = (crossSection(0.5) * 20) / 0.4
  expect(history.pressurePa[0]![20]! / 1e-4).toBeGreaterThan(Math.exp(-100 / slow))
  for (const p of history.pressurePa[1]!) expect(p >= 0 && p < 1e-20).toBe(true)
  expect(history.pumped[1]! / ((1e-4 * crossSection(0.5) * 20) / (BOLTZMANN * T20_K))).toBeCloseTo(1, 9)
  expect(history.steps).toBeLessThan(2000)
})

describe('valves and spurs', () => {
  const branches: TubeBranch[] = [
    {
      name: 'line',
      sections: [{ lengthM: 40, diameterM: 0.6 }],
      valves: [{ name: 'GV', atM: 20, boreM: 0.5 }],
    },
    { name: 'spur', from: { branch: 'line', atM: 10 }, sections: [{ lengthM: 30, diameterM: 0.35 }] },
  ]
  const leakAtSpurEnd = run(branches, 2, (at) => ({
    gas: 'N2',
    startPa: 1e-6,
    pumps: [steadyPump(at(0), 0.4)],
    leaks: [{ node: at(30, 'spur'), loadPaM3S: [{ fromS: 0, value: 1e-7 }] }],
  }))

  test('a shut valve keeps its side as it was, an open one adds the resistance of its bore', () => {
    const { base, node, mesh } = leakAtSpurEnd
    const valves = [
      {
        name: 'GV',
        open: [
          { fromS: 0, value: false },
          { fromS: 2000, value: true },
        ],
      },
    ]
    const history = only({ ...base, valves, outputsS: [2000, 4000] })
    const beyond = mesh.valveNodes.get('GV')!
    expect(history.pressurePa[0]![beyond]! / 1e-6).toBeCloseTo(1, 12)
    // Later both sides stand alike, since no gas comes from beyond the valve: at the joint, Q (1/S + 10 m/c).
    const atJoint = 1e-7 / 0.4 + (1e-7 * 10) / molecularSpecific('N2', 0.6, T20_K)
    expect(history.pressurePa[1]![node(40)]! / atJoint).toBeCloseTo(1, 6)
    expect(history.massError).toBeLessThan(1e-11)
    const flow = run([branches[0]!], 2, (at) => ({
      gas: 'N2',
      startPa: 1e-6,
      pumps: [steadyPump(at(0), 0.4)],
      leaks: [{ node: at(40), loadPaM3S: [{ fromS: 0, value: 1e-7 }] }],
    }))
    const p = only({ ...flow.base, outputsS: [1e5] }).pressurePa[0]!
    const across = p[flow.mesh.valveNodes.get('GV')!]! - p[flow.node(20)]!
    expect(across / (1e-7 / ((crossSection(0.5) * meanSpeed('N2', T20_K)) / 4))).toBeCloseTo(1, 6)
  })

  test('from an atmosphere a valve chokes: 1.7 times what it would pass in molecular flow', () => {
    // Two vessels of 3 m3 and a valve of 20 mm between; the pump keeps the near one near vacuum.
    const sections = [{ lengthM: 10, diameterM: 0.618 }]
    const tube: TubeBranch = {
      name: 'line',
      sections: [...sections, ...sections],
      valves: [{ name: 'GV', atM: 10, boreM: 0.02 }],
    }
    const { base, mesh, node } = run([tube], 5, (at) => ({
      gas: 'air',
      startPa: 1e5,
      flow: 'transitional',
      pumps: [steadyPump(at(0), 2)],
    }))
    // Shut until the near side is empty.
    const valves = [
      {
        name: 'GV',
        open: [
          { fromS: 0, value: false },
          { fromS: 60, value: true },
        ],
      },
    ]
    const history = only({ ...base, valves, outputsS: [60, 70, 100], tolerance: 1e-3 })
    const far = history.pressurePa.map((p) => p[node(20)]!)
    expect(history.pressurePa[1]![mesh.valveNodes.get('GV')! - 1]!).toBeLessThan(0.1 * far[1]!)
    // Choked flow empties a volume as a constant speed of A 198.6 m/s does.
    const volume = crossSection(0.618) * 10
    const speed = (volume / 30) * Math.log(far[1]! / far[2]!)
    expect(speed / (crossSection(0.02) * 198.6)).toBeCloseTo(1, 2)
    expect(history.massError).toBeLessThan(1e-7)
  })

  test('a leak at the end of a spur shows there by Q L/c of the spur more than at its joint', () => {
    const { base, node } = leakAtSpurEnd
    const p = only({ ...base, outputsS: [1e5] }).pressurePa[0]!
    const rise = (1e-7 * 30) / molecularSpecific('N2', 0.35, T20_K)
    expect((p[node(30, 'spur')]! - p[node(10)]!) / rise).toBeCloseTo(1, 6)
  })

  test('an isolated tube rises by q A/V', () => {
    const { base } = run([{ name: 'tube', sections: [{ lengthM: 150, diameterM: 0.6 }] }], 10, () => ({
      gas: 'H2',
      startPa: 1e-6,
      walls: [{ kind: 'low-hydrogen', qPaMS: 5e-10, atK: T20_K }],
      pumps: [],
    }))
    const history = only({ ...base, outputsS: [3600, 7200] })
    const perHour = history.pressurePa[1]![5]! - history.pressurePa[0]![5]!
    expect(perHour / ((5e-10 * 4 * 3600) / 0.6)).toBeCloseTo(1, 9)
  })
})

describe('stopping', () => {
  const long = () => caseC([86_400], 1e-4, 423.15)
  test('tells how far it is, and stops when cancelled, saying where', () => {
    const shares: number[] = []
    runTransport({ ...long(), onProgress: (share) => shares.push(share) })
    expect(shares.at(-1)).toBeCloseTo(1, 12)
    expect(shares).toEqual([...shares].sort((a, b) => a - b))
    let asked = 0
    const cancelled = () => ++asked > 3
    expect(() => runTransport({ ...long(), cancelled })).toThrow(TransportError)
    expect(asked).toBe(4)
  })
  test('gives up with a reason when the steps run out', () => {
    try {
      runTransport({ ...long(), maxSteps: 20 })
      expect.unreachable()
    } catch (error) {
      expect(error).toBeInstanceOf(TransportError)
      expect((error as TransportError).reason).toBe('too-many-steps')
    }
  })
  test('no step works where the input is no number, and no such number gets out', () => {
    const broken = long()
    const walls = [
      { kind: 'power-law', law: { oneHourPaMS: 1e-6, exponent: Number.NaN }, leadS: 60, gasK: T20_K },
    ] as const
    const gases = [{ ...broken.gases[0]!, walls }]
    expect(() => runTransport({ ...broken, gases })).toThrow('exponent is NaN; expected 0 to 10')
    // A pressure whose molecules no longer fit into a number leaves no step that works.
    const vast = [{ ...broken.gases[0]!, startPa: 1e300 }]
    expect(() => runTransport({ ...broken, gases: vast })).toThrow(/No step from 0 s on meets the tolerance/)
  })
  test('refuses what cannot be run', () => {
    const base = long()
    expect(() => runTransport({ ...base, outputsS: [5, 5] })).toThrow(
      'time of an output, s is 5; expected a time after 5',
    )
    expect(() => runTransport({ ...base, gases: [{ ...base.gases[0]!, startPa: 0 }] })).toThrow(
      'startPa is 0',
    )
    expect(() => runTransport({ ...base, valves: [{ name: 'GV-9', open: [] }] })).toThrow(
      'a valve of the mesh',
    )
    const pumps = [steadyPump(9999, 1)]
    expect(() => runTransport({ ...base, gases: [{ ...base.gases[0]!, pumps }] })).toThrow('node is 9999')
  })
})
