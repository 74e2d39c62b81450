import { describe, expect, test } from 'vitest'
import {
  GAUGE_RANGE_PA,
  type GaugedGas,
  ION_SENSITIVITY,
  ION_SENSITIVITY_SUMMERS,
  ionCurrent,
  ionGaugeReading,
  nitrogenEquivalent,
  THERMAL_FACTOR,
  thermalTruePressure,
  truePressure,
  tubePressureBehindGauge,
  X_RAY_LIMIT_PA,
} from '#app/physics/gauges.ts'
import { checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'

const idsOf = (prefix: string): string[] =>
  checkValues.map((entry) => entry.id).filter((id) => id.startsWith(prefix))
const gasOf = (id: string): GaugedGas => id.split('.').at(-1) as GaugedGas

describe('gauges', () => {
  test.each(idsOf('gauge.ion.'))('%s', (id) => expectCheck(id, ION_SENSITIVITY[gasOf(id)]))
  test.each(idsOf('gauge.ion_nasa.'))('%s', (id) => expectCheck(id, ION_SENSITIVITY_SUMMERS[gasOf(id)]!))
  test.each(idsOf('gauge.pirani.'))('%s', (id) => expectCheck(id, THERMAL_FACTOR[gasOf(id)]!))

  test('a reading is a sum over the gases, and goes back to a pressure only with the gas known', () => {
    expectCheck('gauge.mix', nitrogenEquivalent({ H2: 0.6 * 2e-7, H2O: 0.4 * 2e-7 }))
    expectCheck('gauge.ion_H2_true', truePressure(1e-7, { H2: 1 }))
    expectCheck('gauge.ion_current', ionCurrent(1e-7, 0.075, 4e-3))
    const mixture = { H2: 3e-8, N2: 1e-8, CO2: 2e-9 }
    expect(truePressure(nitrogenEquivalent(mixture), mixture)).toBeCloseTo(4.2e-8, 16)
  })

  test('a thermal-conductivity gauge is not corrected where convection rules', () => {
    expect(thermalTruePressure(10, 'Ar')).toBeCloseTo(17, 12)
    expect(() => thermalTruePressure(1000, 'Ar')).toThrow('readingPa is 1000; expected 0 to 100')
    expect(() => thermalTruePressure(1, 'Kr')).toThrow('a gas with a known factor')
  })

  test('X-rays add to a low reading, and a gauge outside its range shows no number', () => {
    const low = ionGaugeReading('hot-cathode', { N2: 1e-10 })
    expect(low).toEqual({ state: 'reading', readingPa: 1e-10 + X_RAY_LIMIT_PA['hot-cathode']! })
    expect(ionGaugeReading('hot-cathode', { N2: 1 })).toEqual({ state: 'over-range', limitPa: 0.1 })
    expect(ionGaugeReading('cold-cathode', { N2: 1e-10 })).toEqual({
      state: 'under-range',
      limitPa: GAUGE_RANGE_PA['cold-cathode'][0],
    })
  })

  test('a hot tube stands at a higher pressure than its cold gauge shows: 1.2014 times at 150 degrees', () => {
    expect(tubePressureBehindGauge(1e-6, 293.15, 423.15)).toBeCloseTo(1.20144e-6, 10)
  })
})
