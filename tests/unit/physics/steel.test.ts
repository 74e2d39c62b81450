import { describe, expect, it } from 'vitest'
import {
  blockedStress,
  steelConductivity,
  steelHeatCapacity,
  steelResistivity,
  steelStrain,
} from '#app/physics/steel.ts'

function near(value: number, expected: number, relative: number): void {
  expect(Math.abs(value / expected - 1)).toBeLessThanOrEqual(relative)
}

describe('steel 304L', () => {
  it('stays within a tenth of the data sheets', () => {
    // Data-sheet values: 500 J/(kg K), 16.2 W/(m K), 17.2e-6 per K from 0 to 100 degrees.
    near(steelHeatCapacity(323), 500, 0.1)
    near(steelConductivity(373), 16.2, 0.05)
    near(steelStrain(273.15, 373.15) / 100, 17.2e-6, 0.05)
  })

  it('meets the data-sheet resistivities at 20 and 650 degrees', () => {
    near(steelResistivity(293.15), 0.72e-6, 0.001)
    near(steelResistivity(923.15), 1.16e-6, 0.005)
  })

  it('expands and contracts by the same length', () => {
    expect(steelStrain(293.15, 423.15)).toBeCloseTo(-steelStrain(423.15, 293.15), 15)
    expect(steelStrain(293.15, 253.15)).toBeLessThan(0)
  })

  it('yields long before a blocked bake is over', () => {
    near(blockedStress(steelStrain(293.15, 423.15)), 421063047.067, 0.001)
  })

  it('refuses temperatures outside its formulas', () => {
    expect(() => steelHeatCapacity(20)).toThrow(/kelvin is 20; expected 200 to 1300/)
  })
})
