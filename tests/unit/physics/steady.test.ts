import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { crossSection, molecularSpecific } from '#app/physics/conductance.ts'
import { T20_K } from '#app/physics/constants.ts'
import {
  bothEndsPressure,
  endPumpedMean,
  endPumpedPressure,
  linePositions,
  periodicMean,
  periodicPressure,
  slowestTime,
  steadyPressures,
  wallPumpedPressure,
} from '#app/physics/steady.ts'
import { checkInput, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'

const specific = molecularSpecific('H2O', 1, T20_K)
const stretch = { sourcePerM: 4.166666666666667e-9 * Math.PI, specific, lengthM: 250, speedM3S: 1.5 }

describe('closed forms', () => {
  test('specific conductances', () => {
    expectCheck('tube.c.H2O.1m', specific)
    expectCheck('tube.c.N2.1m2', molecularSpecific('N2', 1.2, T20_K))
    expectCheck('tube.D.N2', molecularSpecific('N2', 1, T20_K) / crossSection(1))
  })
  test('profiles', () => {
    expectCheck('tube.periodic.pump', periodicPressure(stretch, 0))
    expectCheck('tube.periodic.quarter', periodicPressure(stretch, 62.5))
    expectCheck('tube.periodic.avg', periodicMean(stretch))
    expectCheck('tube.single.avg', endPumpedMean(stretch))
    expectCheck('tube.distributed', wallPumpedPressure(stretch, 0.02, 250))
  })
  test('slowest times of a long tube', () => {
    const nitrogen = molecularSpecific('N2', 1, T20_K)
    expectCheck('tube.tau.one', slowestTime(nitrogen, crossSection(1), 2000, Infinity))
    expectCheck('tube.tau.finiteS', slowestTime(nitrogen, crossSection(1), 2000, 2))
  })
  test('every steady check has been met here', () => {
    const here = [
      'periodic.pump',
      'periodic.quarter',
      'periodic.avg',
      'single.avg',
      'distributed',
      'leak.point',
    ]
    const kept = checkValues
      .map((e) => e.id)
      .filter((id) => /^tube\.(periodic|single|both|leak|distributed)/.test(id))
    expect(kept.sort()).toEqual(here.map((id) => `tube.${id}`).sort())
  })
})

describe('nodes on a line', () => {
  const ends = (pumps: { atM: number; speedM3S: number }[], extra: number[] = []) => {
    const line = { lengthM: 250, specific, sourcePerM: stretch.sourcePerM, pumps }
    const positions = linePositions(line, extra)
    return { positions, pressures: steadyPressures(line, positions) }
  }
  test('two nodes already give the far end of a tube pumped at one end', () => {
    const { positions, pressures } = ends([{ atM: 0, speedM3S: 1.5 }])
    expect(positions).toEqual([0, 250])
    expect(pressures[1]! / endPumpedPressure(stretch, 250)).toBeCloseTo(1, 12)
  })
  test('uneven nodes meet the parabolas exactly', () => {
    const extra = [1, 3, 17, 125, 249]
    const one = ends([{ atM: 0, speedM3S: 1.5 }], extra)
    one.positions.forEach((x, i) => {
      expect(one.pressures[i]! / endPumpedPressure(stretch, x)).toBeCloseTo(1, 12)
    })
    const both = ends(
      [
        { atM: 0, speedM3S: 1.5 },
        { atM: 250, speedM3S: 1.5 },
      ],
      extra,
    )
    both.positions.forEach((x, i) => {
      expect(both.pressures[i]! / bothEndsPressure(stretch, x)).toBeCloseTo(1, 12)
    })
  })
  test('beyond a leak the pressure is level', () => {
    const leak = { atM: checkInput('tube.leak.point', 'x'), loadPaM3S: 1e-6 }
    const line = { lengthM: 250, specific, sourcePerM: 0, pumps: [{ atM: 0, speedM3S: 1.5 }], leaks: [leak] }
    const pressures = steadyPressures(line, linePositions(line))
    expectCheck('tube.leak.point', pressures[1]!)
    expect(pressures[2]! / pressures[1]!).toBeCloseTo(1, 12)
  })
  test('what the pumps take is what comes in, wherever pumps and leaks stand', () => {
    const place = fc.double({ min: 0, max: 250, noNaN: true })
    const pump = fc.record({ atM: place, speedM3S: fc.double({ min: 0.01, max: 10, noNaN: true }) })
    const leak = fc.record({ atM: place, loadPaM3S: fc.double({ min: 0, max: 1e-5, noNaN: true }) })
    fc.assert(
      fc.property(
        fc.array(pump, { minLength: 1, maxLength: 5 }),
        fc.array(leak, { maxLength: 3 }),
        (pumps, leaks) => {
          const line = { lengthM: 250, specific, sourcePerM: 1e-9, pumps, leaks }
          const positions = linePositions(line)
          const pressures = steadyPressures(line, positions)
          const at = (x: number) => pressures[positions.findIndex((y) => Math.abs(x - y) < 2.6e-7)]!
          const out = pumps.reduce((sum, p) => sum + p.speedM3S * at(p.atM), 0)
          const into = 1e-9 * 250 + leaks.reduce((sum, l) => sum + l.loadPaM3S, 0)
          expect(out / into).toBeCloseTo(1, 10)
          expect(Math.min(...pressures)).toBeGreaterThan(0)
        },
      ),
    )
  })
  test('a pump a hair from the end takes what one at the end takes', () => {
    const near = ends([{ atM: 1e-6, speedM3S: 0.01 }])
    expect(near.positions).toHaveLength(3)
    expect((near.pressures[1]! * 0.01) / (stretch.sourcePerM * 250)).toBeCloseTo(1, 13)
  })
  test('a gas that no pump takes has no steady pressure, and a pump off the tube is refused', () => {
    expect(() => ends([{ atM: 0, speedM3S: 0 }])).toThrow('at least one pump that takes the gas')
    expect(() => ends([{ atM: 251, speedM3S: 1 }])).toThrow(
      'position along the tube is 251; expected 0 to 250',
    )
  })
})
