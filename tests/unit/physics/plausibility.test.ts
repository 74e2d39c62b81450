/**
 * A long tube as practice knows it. Common practice, no source: a kilometre-class tube of low-hydrogen steel comes down
 * to some 1e-7 Pa within about six weeks when a bake around 160 degrees is part of it, and without the bake water keeps
 * it more than ten times higher for months.
 */
import { describe, expect, test, vi } from 'vitest'
import { T20_K } from '#app/physics/constants.ts'
import type { GasRun, PointPump, WallSource } from '#app/physics/gas-run.ts'
import { nitrogenEquivalent } from '#app/physics/gauges.ts'
import { temperatureProgramme } from '#app/physics/programme.ts'
import { runTransport } from '#app/physics/transport.ts'
import { buildMesh, meshNode } from '#app/physics/tube.ts'
import { DEFAULT_WATER, WATER_FLOOR_PA } from '#app/physics/water.ts'

vi.setConfig({ testTimeout: 60_000 })

const DAY_S = 86_400
const BAKE_K = 433.15
const LENGTH_M = 2000
const rampS = ((BAKE_K - T20_K) / 3) * 3600
const coldAgainS = 4 * DAY_S + rampS + 30 * DAY_S + rampS
const endS = coldAgainS + 3 * DAY_S

const portsM = Array.from({ length: 9 }, (_, k) => 250 * k)
const mesh = buildMesh(
  [{ name: 'tube', sections: [{ lengthM: LENGTH_M, diameterM: 1.2 }], pointsM: portsM }],
  10,
)
const bake = temperatureProgramme([
  { atS: 0, kelvin: T20_K },
  { atS: 4 * DAY_S, kelvin: T20_K },
  { atS: 4 * DAY_S + rampS, kelvin: BAKE_K },
  { atS: 4 * DAY_S + rampS + 30 * DAY_S, kelvin: BAKE_K },
  { atS: coldAgainS, kelvin: T20_K },
])
const cold = temperatureProgramme([{ atS: 0, kelvin: T20_K }])

/** Ports of 0.8 m3/s every 250 m until the tube is cold, then the two ends of 2.5 m3/s alone. */
function pumps(): PointPump[] {
  return portsM.map((atM) => {
    const atEnd = atM === 0 || atM === LENGTH_M
    return {
      node: meshNode(mesh, 'tube', atM),
      mouthK: T20_K,
      curve: [
        { fromS: 0, value: { kind: 'constant', speedM3S: 0.8 } },
        { fromS: coldAgainS, value: atEnd ? { kind: 'constant', speedM3S: 2.5 } : null },
      ],
    }
  })
}

/** Mean partial pressures at the end, Pa. */
function ends(baked: boolean, hydrogen: WallSource) {
  const gases: GasRun[] = [
    { gas: 'H2O', startPa: 1, isotherm: DEFAULT_WATER, pumps: pumps() },
    { gas: 'H2', startPa: 1e-6, walls: [hydrogen], pumps: pumps() },
  ]
  const thermal = { programmes: [baked ? bake : cold] }
  const histories = runTransport({ mesh, thermal, fromS: 0, outputsS: [endS], gases, tolerance: 3e-3 })
  for (const { massError } of histories) expect(massError).toBeLessThan(1e-6)
  const mean = (values: Float64Array) =>
    values.reduce((sum, p, i) => sum + p * mesh.volumeM3[i]!, 0) /
    mesh.volumeM3.reduce((sum, volume) => sum + volume, 0)
  const [H2O, H2] = histories.map(({ pressurePa }) => mean(pressurePa[0]!)) as [number, number]
  return { H2O: Math.max(H2O, WATER_FLOOR_PA), H2 }
}

const fired: WallSource = { kind: 'low-hydrogen', qPaMS: 6.3e-11, atK: 296.15 }
const unfired: WallSource = { kind: 'sheet', sheet: { c0PerM3: 5e24, wallM: 3e-3 }, agedTauM2: 1e-9 }

describe('two kilometres of 1.2 m tube in six weeks', () => {
  const low = ends(true, fired)
  test('low-hydrogen steel, baked: about 1.5e-7 Pa of hydrogen, water at its floor', () => {
    expect(endS / DAY_S).toBeGreaterThan(37)
    expect(endS / DAY_S).toBeLessThan(45)
    expect(low.H2 / 1.5e-7).toBeGreaterThan(0.75)
    expect(low.H2 / 1.5e-7).toBeLessThan(1.35)
    expect(low.H2O).toBeLessThan(1e-10)
    expect(nitrogenEquivalent(low)).toBeLessThan(3e-7)
  })
  test('unfired steel, baked the same: about 4e-6 Pa of hydrogen', () => {
    const { H2 } = ends(true, unfired)
    expect(H2 / 4e-6).toBeGreaterThan(0.7)
    expect(H2 / 4e-6).toBeLessThan(1.4)
  })
  test('unbaked: water alone is more than ten times what the baked tube reads', () => {
    const { H2O } = ends(false, fired)
    expect(H2O).toBeGreaterThan(10 * nitrogenEquivalent(low))
    expect(H2O / 3e-6).toBeGreaterThan(0.5)
    expect(H2O / 3e-6).toBeLessThan(2)
  })
})
