import { describe, expect, test } from 'vitest'
import { crossSection, molecularSpecific } from '#app/physics/conductance.ts'
import { BOLTZMANN, T20_K } from '#app/physics/constants.ts'
import type { GasRun } from '#app/physics/gas-run.ts'
import { meanSpeed } from '#app/physics/gases.ts'
import { temperatureProgramme } from '#app/physics/programme.ts'
import { type PumpCurve, pumpThroughput } from '#app/physics/pumps.ts'
import { wallPumpedPressure } from '#app/physics/steady.ts'
import { type GasHistory, runTransport } from '#app/physics/transport.ts'
import { buildMesh, meshNode } from '#app/physics/tube.ts'
import { steadyPump } from '#tests/fixtures/physics/benchmark-runs.ts'

const room = { programmes: [temperatureProgramme([{ atS: 0, kelvin: T20_K }])] }
const mesh = buildMesh([{ name: 'tube', sections: [{ lengthM: 100, diameterM: 0.5 }] }], 1)
const leakAt = (atM: number, loadPaM3S: number) => [
  { node: meshNode(mesh, 'tube', atM), loadPaM3S: [{ fromS: 0, value: loadPaM3S }] },
]
const solve = (gas: GasRun, outputsS: number[]): GasHistory =>
  runTransport({ mesh, thermal: room, fromS: 0, outputsS, gases: [gas], tolerance: 1e-3 })[0]!

describe('getters', () => {
  const walls = [{ kind: 'low-hydrogen', qPaMS: 1e-9, atK: T20_K }] as const

  test('a film on the wall and a pump at the end make the profile of the closed form', () => {
    const getter = { sticking: 0.005, capacityPerM2: 1e30 }
    const history = solve({ gas: 'H2', startPa: 1e-8, walls, getter, pumps: [steadyPump(0, 0.4)] }, [1e6])
    const stretch = {
      sourcePerM: 1e-9 * Math.PI * 0.5,
      specific: molecularSpecific('H2', 0.5, T20_K),
      lengthM: 100,
      speedM3S: 0.4,
    }
    const perM = (0.005 * Math.PI * 0.5 * meanSpeed('H2', T20_K)) / 4
    for (const x of [0, 10, 50, 100]) {
      const p = history.pressurePa[0]![meshNode(mesh, 'tube', x)]!
      // Second order in cells of 1 m against a decay length of some metres.
      expect(p / wallPumpedPressure(stretch, perM, x)).toBeCloseTo(1, 2)
    }
    expect(history.massError).toBeLessThan(1e-9)
  })

  test('a film takes what it can hold and then no more', () => {
    const capacityPerM2 = 1e17
    const wallM2 = Math.PI * 0.5 * 100
    const history = solve(
      {
        gas: 'CO',
        startPa: 1e-8,
        getter: { sticking: 0.2, capacityPerM2, wallShare: 0.5 },
        leaks: leakAt(50, 1e-5),
        pumps: [],
      },
      [100, 20_000],
    )
    const full = capacityPerM2 * 0.5 * wallM2
    expect(history.pumped[0]!).toBeLessThan(0.1 * full)
    expect(history.pumped[1]! / full).toBeCloseTo(1, 2)
    expect(history.massError).toBeLessThan(1e-9)
  })

  test('a getter pump slows down as it fills: in a closed vessel dp/dt = -(S/V) p (1 - taken/capacity)', () => {
    const volume = crossSection(0.5) * 100
    const startPa = 1e-3
    const capacityPaM3 = 0.5 * startPa * volume
    const pump = { ...steadyPump(0, 0.01), capacityPaM3 }
    const slow = solve({ gas: 'N2', startPa, pumps: [pump] }, [1000, 2000, 1e6])
    // With taken = V (p0 - p) the equation is logistic; p falls to p0 - capacity/V. One speed of 10 l/s leaves the
    // pressure even along the tube to a thousandth.
    const left = startPa - capacityPaM3 / volume
    const exact = (t: number): number => {
      const rate = (0.01 / volume) * (left / (startPa - left))
      return left / (1 - (1 - left / startPa) * Math.exp(-rate * t))
    }
    for (const [k, t] of [1000, 2000].entries()) {
      const amount = slow.held[k]! / (volume / (BOLTZMANN * T20_K))
      expect(amount / exact(t)).toBeCloseTo(1, 2)
    }
    expect(slow.held[2]! / ((left * volume) / (BOLTZMANN * T20_K))).toBeCloseTo(1, 6)
  })
})

describe('pumps whose speed depends on pressure', () => {
  const curves: [PumpCurve, number][] = [
    [{ kind: 'ion', speedM3S: 0.4 }, 2e-7],
    [{ kind: 'turbo', speedM3S: 0.3, halfSpeedPa: 1, ultimatePa: 1e-7 }, 1e-6],
    [
      {
        kind: 'roots',
        speedM3S: 0.5,
        backingM3S: 0.07,
        compression: 30,
        bypassPa: 5000,
        backingUltimatePa: 3,
      },
      0.5,
    ],
  ]
  test.each(curves)('%o settles where its throughput is the leak', (curve, loadPaM3S) => {
    const history = solve(
      {
        gas: 'N2',
        startPa: 1e-2,
        flow: 'transitional',
        leaks: leakAt(0, loadPaM3S),
        pumps: [{ node: 0, curve: [{ fromS: 0, value: curve }] }],
      },
      [1e7],
    )
    expect(pumpThroughput(curve, history.pressurePa[0]![0]!) / loadPaM3S).toBeCloseTo(1, 6)
    expect(history.massError).toBeLessThan(1e-7)
  })
})
