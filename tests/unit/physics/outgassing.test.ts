import { describe, expect, test } from 'vitest'
import { BOLTZMANN, T20_K } from '#app/physics/constants.ts'
import {
  atomsPerM3,
  hydrogenDiffusivity,
  LOW_HYDROGEN_ENERGY,
  lowHydrogenRate,
  recombinedContent,
  slabAtomFlux,
  slabRate,
  slabRemaining,
  slabSum,
  TYPE_316_DIFFUSIVITY,
  transformedTime,
} from '#app/physics/hydrogen.ts'
import {
  FRESH_FLUOROELASTOMER,
  PUBLISHED_RATES,
  powerLawRate,
  powerLawReleased,
  UNBAKED_STEEL,
} from '#app/physics/outgassing.ts'
import {
  bakedWater,
  DEFAULT_WATER,
  emptyingFront,
  waterCoverage,
  waterRateTime,
  waterScalePressure,
} from '#app/physics/water.ts'
import { checkInput, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'

const idsOf = (prefix: string): string[] =>
  checkValues.map((entry) => entry.id).filter((id) => id.startsWith(prefix))
const HOUR = 3600

describe('power law', () => {
  test('rate and released gas', () => {
    expectCheck('og.powerlaw', powerLawRate(UNBAKED_STEEL, 100 * HOUR))
    expectCheck('og.powerlaw_int', powerLawReleased(UNBAKED_STEEL, HOUR, 100 * HOUR))
  })
  test('released gas is the integral of the rate, also off exponent one', () => {
    const law = { oneHourPaMS: 1e-5, exponent: 0.8 }
    let sum = 0
    const n = 20_000
    for (let i = 0; i < n; i++) sum += (powerLawRate(law, HOUR + ((i + 0.5) * (9 * HOUR)) / n) * 9 * HOUR) / n
    expect(powerLawReleased(law, HOUR, 10 * HOUR) / sum).toBeCloseTo(1, 6)
  })
  test('a lead time keeps the rate finite at the start', () => {
    expect(powerLawRate(UNBAKED_STEEL, 0, 60)).toBeCloseTo(3e-6 * 60, 12)
    expect(() => powerLawRate(UNBAKED_STEEL, 0)).toThrow('seconds is 0')
  })
  test('a fresh elastomer falls slower than metal', () => {
    expectCheck('og.fkm_1h', powerLawRate(FRESH_FLUOROELASTOMER, HOUR))
    const fall = powerLawRate(FRESH_FLUOROELASTOMER, HOUR) / powerLawRate(FRESH_FLUOROELASTOMER, 10 * HOUR)
    expect(fall).toBeCloseTo(10 ** 0.8, 10)
  })
  test.each([
    ['og.ss304_250C', 'steel-250c-bake'],
    ['og.ss304_oxidised', 'steel-oxidised'],
    ['og.ss304_450vac', 'steel-450c-vacuum'],
    ['og.al1100_250C', 'aluminium-250c-bake'],
    ['og.ss_100C_20h', 'steel-100c-bake'],
    ['og.al_100C_20h', 'aluminium-100c-bake'],
    ['og.ss_airbake100', 'steel-100c-air'],
    ['og.al_elsey_100C', 'aluminium-100c-bake'],
    ['og.cu_20h100C', 'copper-100c-bake'],
    ['og.ofhc_24h100C', 'oxygen-free-copper-100c'],
    ['og.ofhc_24h250C', 'oxygen-free-copper-250c'],
    ['og.ss304_30h250_ohanlon', 'steel-250c-30h'],
    ['og.ss_vacfurn', 'steel-vacuum-furnace'],
    ['og.ss316L_800', '316l-vacuum-furnace'],
    ['og.ss316L_ral', '316l-gauge-removed'],
    ['og.ss_2p62mm_380h250', '304l-250c-380h'],
    ['og.ss_2p62mm_+140h350', '304l-350c-140h'],
    ['og.mild_80C48h', 'mild-steel-80c'],
    ['og.fkm_1h', 'fluoroelastomer-1h'],
  ] as const)('%s is in the table of published rates', (id, key) =>
    expectCheck(id, PUBLISHED_RATES[key].ratePaMS),
  )
})

describe('water on the wall', () => {
  test.each(idsOf('iso.theta.'))('%s', (id) => {
    const found = waterCoverage(checkInput(id, 'p'), checkInput(id, 'T'))
    expectCheck(id, [found.theta, found.byLogPressure, found.byTemperature])
  })
  test('scale, rate times time, front', () => {
    expectCheck('iso.p00_293', waterScalePressure(T20_K))
    expectCheck('iso.qt', waterRateTime(T20_K))
    const area = checkInput('iso.front', 'A') / checkInput('iso.front', 'S')
    expectCheck('iso.front', bakedWater(353.15, T20_K, 864_000, area).coldPa)
    const area2 = checkInput('water.equiv_time', 'A_over_S')
    const front = bakedWater(393.15, T20_K, 2 * 86400, area2).frontJMol
    expect(front).toBeCloseTo(checkInput('water.equiv_time', 'Ec_J_mol'), -1)
    // Time at 100 degrees that empties to the same energy, from the pressure that the front has there.
    const p = waterScalePressure(373.15) * Math.exp(-front / (8.31446261815324 * 373.15))
    expectCheck('water.equiv_time', (area2 * waterRateTime(373.15)) / p / 86400)
  })
  test('after one hour and ten the default wall releases what the common level says', () => {
    expectCheck('og.ss_unbaked_1h', waterRateTime(T20_K) / HOUR)
    expectCheck('og.ss_unbaked_10h', waterRateTime(T20_K) / (10 * HOUR))
  })
  test('slopes are derivatives, at both ends of the coverage too', () => {
    for (const p of [1e-14, 1e-6, 1, 1e4]) {
      const h = 1e-5
      const up = waterCoverage(p * (1 + h), T20_K).theta
      const down = waterCoverage(p / (1 + h), T20_K).theta
      expect(waterCoverage(p, T20_K).byLogPressure).toBeCloseTo((up - down) / (2 * Math.log1p(h)), 7)
      const warm = waterCoverage(p, T20_K + 1e-3).theta - waterCoverage(p, T20_K - 1e-3).theta
      expect(waterCoverage(p, T20_K).byTemperature).toBeCloseTo(warm / 2e-3, 7)
    }
  })
  test('says when the wall is emptied and the closed form ends', () => {
    expect(bakedWater(423.15, T20_K, 864_000, 283).emptied).toBe(true)
    expect(bakedWater(353.15, T20_K, 864_000, 283).emptied).toBe(false)
    expect(emptyingFront(1e-6, T20_K)).toBeLessThan(DEFAULT_WATER.highJMol)
    expect(() => waterCoverage(0, T20_K)).toThrow('pressurePa is 0')
  })
})

describe('hydrogen in the wall', () => {
  test.each(idsOf('fick.sum.'))('%s', (id) => expectCheck(id, slabSum(checkInput(id, 'Fo'))))
  test.each(idsOf('fick.remain.'))('%s', (id) => expectCheck(id, slabRemaining(checkInput(id, 'Fo'))))
  test.each(idsOf('H.D.').filter((id) => /\d$/.test(id) && !id.includes('avdiaj')))('%s', (id) =>
    expectCheck(id, hydrogenDiffusivity(checkInput(id, 'T'))),
  )

  test('at short times the flux is c0 sqrt(D/(pi t))', () => {
    const [c0, d, t] = ['c0', 'D', 't'].map((name) => checkInput('fick.short', name)) as [
      number,
      number,
      number,
    ]
    const law = { d0M2S: d, energyJMol: 0 }
    expectCheck('fick.short', slabAtomFlux({ c0PerM3: c0, wallM: 3e-3, law }, T20_K, d * t))
  })

  test('contents, recombination and the temperature coefficient', () => {
    expectCheck('H.c0_1wtppm', atomsPerM3(1))
    expectCheck('H.recomb', recombinedContent(1e23, 1e-34, 2e-3, 1e6) / 1e23)
    expectCheck('H.temp_coeff', hydrogenDiffusivity(303.15) / hydrogenDiffusivity(293.15))
    // 0.3 Torr l per cm3 at 300 K, two atoms per molecule.
    expectCheck('H.calder_lewin_c0', (2 * 300 * (101325 / 760) * 1e-3 * 1e3) / (BOLTZMANN * 300))
    // Diffusivities implied by published Fourier numbers over the half thickness; the default law stays within 10 %.
    for (const [id, kelvin] of [
      ['H.D.avdiaj250', 523.15],
      ['H.D.avdiaj350', 623.15],
    ] as const) {
      const seconds = id === 'H.D.avdiaj250' ? 380 * HOUR : 140 * HOUR
      const implied = (checkInput(id, 'Fo') * 1.31e-3 ** 2) / seconds
      expectCheck(id, implied)
      expect(Math.abs(hydrogenDiffusivity(kelvin) / implied - 1)).toBeLessThan(0.1)
    }
    expect(hydrogenDiffusivity(423.15, TYPE_316_DIFFUSIVITY) / hydrogenDiffusivity(423.15)).toBeCloseTo(
      1.26,
      1,
    )
  })

  test('flux is the loss of content: 2 J dt = -w dc, over the joint of both series', () => {
    const sheet = { c0PerM3: 5e24, wallM: 3e-3 }
    const d = hydrogenDiffusivity(423.15)
    for (const fourier of [1e-3, 0.006, 0.0075, 0.02, 0.05, 0.3]) {
      const h = fourier * 1e-4
      const loss =
        (sheet.c0PerM3 * sheet.wallM * (slabRemaining(fourier - h) - slabRemaining(fourier + h))) / (2 * h)
      const out = (2 * slabAtomFlux(sheet, 423.15, fourier * 9e-6) * 9e-6) / d
      expect(out / loss).toBeCloseTo(1, 6)
    }
  })

  test('a blocked outer face makes the sheet act twice as thick', () => {
    const tau = 1e-6
    const one = slabAtomFlux({ c0PerM3: 1e24, wallM: 2e-3, openFaces: 1 }, T20_K, tau)
    expect(one).toBeCloseTo(slabAtomFlux({ c0PerM3: 1e24, wallM: 4e-3 }, T20_K, tau), -3)
  })

  test('the age of a ramp is the integral of D over it', () => {
    const ramp = [{ seconds: 26 * HOUR, fromK: T20_K, toK: 423.15 }]
    let sum = 0
    const n = 100_000
    for (let i = 0; i < n; i++) sum += (hydrogenDiffusivity(T20_K + (130 * (i + 0.5)) / n) * 26 * HOUR) / n
    expect(transformedTime(ramp) / sum).toBeCloseTo(1, 9)
    const hold = [{ seconds: 100, fromK: 423.15, toK: 423.15 }]
    expect(transformedTime(hold) / (100 * hydrogenDiffusivity(423.15))).toBeCloseTo(1, 12)
  })

  test('unfired steel after ten days at 150 degrees gives the common 3e-9 Pa m/s, and after one day more', () => {
    const sheet = { c0PerM3: 5e24, wallM: 3e-3 }
    const hold = (days: number) =>
      1e-9 + transformedTime([{ seconds: days * 86400, fromK: 423.15, toK: 423.15 }])
    expect(slabRate(sheet, T20_K, hold(10)) / 3.06e-9).toBeCloseTo(1, 1)
    expect(slabRate({ ...sheet, wallM: 2e-3 }, T20_K, hold(1))).toBeGreaterThan(3e-9)
  })

  test('low-hydrogen steel rises by about 7 % per kelvin', () => {
    const warm = lowHydrogenRate(4e-10, T20_K, T20_K + 1) / 4e-10
    expect(warm).toBeCloseTo(Math.exp(LOW_HYDROGEN_ENERGY / 8.314 / (293.15 * 294.15)), 4)
    expect(warm).toBeGreaterThan(1.07)
    expect(warm).toBeLessThan(1.09)
  })
})
