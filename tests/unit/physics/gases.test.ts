import { describe, expect, test } from 'vitest'
import { T20_K } from '#app/physics/constants.ts'
import {
  flowRegime,
  GASES,
  type Gas,
  impingementRate,
  knudsenNumber,
  meanFreePathPressure,
  meanSpeed,
  monolayerTime,
  numberDensity,
  reynoldsNumber,
  viscosity,
  viscosityDiameter,
} from '#app/physics/gases.ts'
import { checkInput, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'

const idsOf = (prefix: string): string[] =>
  checkValues.map((entry) => entry.id).filter((id) => id.startsWith(prefix))
const gasOf = (id: string): Gas => GASES.find((gas) => gas === id.split('.').at(-1))!

describe('gases', () => {
  test.each(idsOf('gas.vbar.'))('%s', (id) => expectCheck(id, meanSpeed(gasOf(id), T20_K)))
  test.each(idsOf('gas.eta.'))('%s', (id) => expectCheck(id, viscosity(gasOf(id), T20_K)))
  test.each(idsOf('gas.lambda_p.'))('%s', (id) => expectCheck(id, meanFreePathPressure(gasOf(id), T20_K)))
  test.each(idsOf('gas.diam.'))('%s', (id) => expectCheck(id, viscosityDiameter(gasOf(id), 298.15)))

  test('impingement, density and the time of a layer', () => {
    expectCheck('gas.impinge.N2', impingementRate('N2', 1e-4, T20_K))
    expectCheck('gas.monolayer_time', monolayerTime('N2', 1e-4, T20_K))
    expectCheck('gas.n', numberDensity(1e-7, T20_K))
  })

  test('a wide tube is molecular below a hundredth of a pascal', () => {
    const product = meanFreePathPressure('air', T20_K)
    expectCheck('regime.air_d1m', product / (checkInput('regime.air_d1m', 'd') * 0.5))
    expectCheck('regime.air_visc', product / (checkInput('regime.air_visc', 'd') * 0.01))
    expect(flowRegime(knudsenNumber('air', 1e-3, T20_K, 0.6))).toBe('molecular')
    expect(flowRegime(knudsenNumber('air', 0.1, T20_K, 0.6))).toBe('transitional')
    expect(flowRegime(knudsenNumber('air', 10, T20_K, 0.6))).toBe('viscous')
  })

  test('mean free path, speed and viscosity agree: eta = (5 pi/32) rho v lambda of the hard sphere', () => {
    for (const gas of GASES) {
      const density =
        (numberDensity(1, T20_K) * (8 * 1.380649e-23 * T20_K)) / (Math.PI * meanSpeed(gas, T20_K) ** 2)
      const product = density * meanSpeed(gas, T20_K) * meanFreePathPressure(gas, T20_K)
      expect((((5 * Math.PI) / 32) * product) / viscosity(gas, T20_K)).toBeCloseTo(1, 10)
    }
  })

  test('Reynolds number of 20 l/s of air at one atmosphere in a 10 cm tube', () => {
    // By hand: rho v d/eta with rho = 1.2041 kg/m3 and v = 0.02/(pi 0.05^2) = 2.5465 m/s.
    expect(reynoldsNumber('air', 0.02 * 101325, 0.1, T20_K)).toBeCloseTo(
      (1.2041 * 2.54648 * 0.1) / 1.81555e-5,
      -1,
    )
  })

  test('a temperature of nothing is refused with what was found and expected', () => {
    expect(() => meanSpeed('N2', 0)).toThrow('temperatureK is 0; expected a finite number above 0')
    expect(() => meanSpeed('N2', Number.NaN)).toThrow('temperatureK is NaN')
  })
})
