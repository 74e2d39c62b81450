/**
 * Every entry of the table of check values that the model of tube and gas can answer, in one place. The heat, bake
 * and analysis entries are answered beside their own modules; the last test says which they are.
 */
import { describe, expect, test } from 'vitest'
import * as conductance from '#app/physics/conductance.ts'
import { BOLTZMANN, T20_K } from '#app/physics/constants.ts'
import * as gases from '#app/physics/gases.ts'
import * as gauges from '#app/physics/gauges.ts'
import * as hydrogen from '#app/physics/hydrogen.ts'
import { PUBLISHED_RATES, powerLawRate, powerLawReleased, UNBAKED_STEEL } from '#app/physics/outgassing.ts'
import * as pumps from '#app/physics/pumps.ts'
import * as steady from '#app/physics/steady.ts'
import * as units from '#app/physics/units.ts'
import * as water from '#app/physics/water.ts'
import { checkInput, checkValue, checkValues, expectCheck } from '#tests/fixtures/physics/check-values.ts'
import { solvedTransmission } from '#tests/fixtures/physics/solved-transmission.ts'

type Answer = (id: string) => number | number[]

const tail = (id: string): string => id.split('.').at(-1)!
const gasOf = (id: string): gases.Gas => tail(id) as gases.Gas
const gauged = (id: string): gauges.GaugedGas => tail(id) as gauges.GaugedGas
const published =
  (key: keyof typeof PUBLISHED_RATES): Answer =>
  () =>
    PUBLISHED_RATES[key].ratePaMS

const specific = conductance.molecularSpecific('H2O', 1, T20_K)
const nitrogen = conductance.molecularSpecific('N2', 1, T20_K)
const stretch = { sourcePerM: 4.166666666666667e-9 * Math.PI, specific, lengthM: 250, speedM3S: 1.5 }
const airTube = conductance.transitionalFlow('air', 0.1, T20_K, 1.82e-5)
const solvedTable = (): { x: number; w: number }[] =>
  checkValues
    .filter((entry) => entry.id.startsWith('W.tube.'))
    .map((entry) => ({ x: entry.inputs.L_over_d as number, w: entry.expected as number }))
const worst = (formula: (x: number) => number, limit = Infinity): number =>
  Math.max(
    ...solvedTable()
      .filter(({ x }) => x <= limit)
      .map(({ x, w }) => Math.abs(formula(x) / w - 1)),
  )
const solved = (x: number): number => solvedTransmission(x, Math.min(4000, Math.max(300, Math.round(12 * x))))
const held = (kelvin: number, hours: number) => ({ seconds: hours * 3600, fromK: kelvin, toK: kelvin })

/** Answers by whole id, or by the beginning of the id where it ends in a dot. */
const answers: Record<string, Answer> = {
  'unit.torr': () => units.toPascal(1, 'Torr'),
  'unit.mbar': () => units.toPascal(1, 'mbar'),
  'unit.atm': () => units.toPascal(1, 'atm'),
  'unit.bar': () => units.toPascal(1, 'bar'),
  'unit.micron': () => units.toPascal(1, 'micron'),
  'unit.mmHg': () => units.toPascal(1, 'mmHg'),
  'unit.psi': () => units.toPascal(1, 'psi'),
  'unit.inHg': () => units.toPascal(1, 'inHg'),
  'unit.torr_l_s_cm2': () => units.toPaMS(1, 'Torr·l/(s·cm²)'),
  'unit.mbar_l_s_cm2': () => units.toPaMS(1, 'mbar·l/(s·cm²)'),
  'unit.mbar_l_s': () => units.toPaM3S(1, 'mbar·l/s'),
  'unit.atmcc_s': () => units.toPaM3S(1, 'atm·cm³/s'),
  'unit.throughput_molecules': () => units.moleculesPerSecond(1),
  'unit.F_to_C': () => units.fahrenheitToCelsius(300),

  'gas.vbar.': (id) => gases.meanSpeed(gasOf(id), T20_K),
  'gas.eta.': (id) => gases.viscosity(gasOf(id), T20_K),
  'gas.lambda_p.': (id) => gases.meanFreePathPressure(gasOf(id), T20_K),
  'gas.diam.': (id) => gases.viscosityDiameter(gasOf(id), 298.15),
  'gas.impinge.N2': () => gases.impingementRate('N2', 1e-4, T20_K),
  'gas.monolayer_time': () => gases.monolayerTime('N2', 1e-4, T20_K),
  'gas.n': () => gases.numberDensity(1e-7, T20_K),
  'regime.air_d1m': () => gases.meanFreePathPressure('air', T20_K) / (1.2 * 0.5),
  'regime.air_visc': () => gases.meanFreePathPressure('air', T20_K) / (1.2 * 0.01),

  'W.tube.': (id) => solved(checkInput(id, 'L_over_d')),
  'W.literature_recall': (id) => (checkValue(id).inputs.L_over_d as number[]).map(solved),
  'W.santeler_1': () => conductance.transmission(1),
  'W.santeler_err': () => worst(conductance.transmission),
  'W.berman_20': () => conductance.transmissionBerman(10),
  'W.berman_err': () => worst(conductance.transmissionBerman, 250),
  'W.dushman_err': () => worst((x) => 1 / (1 + 0.75 * x)),

  'C.aperture.H2': () => conductance.apertureConductance('H2', 1, T20_K),
  'C.tube.air_handbook': () => conductance.molecularSpecific('air', 0.05, T20_K),
  'C.tube.air': () => conductance.molecularSpecific('air', 0.05, T20_K),
  'C.tube.He': () => conductance.molecularSpecific('He', 0.05, T20_K),
  // The handbook form with its rounded 12.1 d3/L, which the product does not use.
  'C.short.entrance': () => (1e-3 * 12.1 * 5 ** 3) / 30 / (1 + (4 * 5) / (3 * 30)),
  'C.short.exact': () =>
    solved(6) * conductance.apertureConductance('air', conductance.crossSection(0.05), T20_K),
  'C.visc.air_handbook': () => conductance.viscousSpecific(0.01, 100, 1.82e-5) / 0.01,
  'C.visc.air': () => conductance.viscousSpecific(0.01, 100, 1.82e-5) / 0.01,
  'C.knudsen.air.': (id) => conductance.transitionalSpecific(airTube, checkInput(id, 'p_mean')),
  'C.knudsen.min': () => {
    const values = Array.from({ length: 400 }, (_, i) =>
      conductance.transitionalSpecific(airTube, 1e-2 * 1.01 ** i),
    )
    return Math.min(...values) / airTube.molecular
  },
  'C.choked.ratio': () => conductance.chokedRatio(1.4),
  'C.choked.subcritical': () => conductance.apertureContinuumFlow('air', 1, T20_K, 0.8),
  'C.series': () => conductance.inSeries(0.1, 0.05, 0.025),
  'C.Seff': () => conductance.effectiveSpeed(1, 0.5),
  'C.Tscale': () => conductance.molecularScale({ gas: 'air', atK: 293.15 }, { gas: 'air', atK: 423.15 }),
  'C.gas_scale.H2': () => conductance.molecularScale({ gas: 'air', atK: T20_K }, { gas: 'H2', atK: T20_K }),

  'og.powerlaw': () => powerLawRate(UNBAKED_STEEL, 360_000),
  'og.powerlaw_int': () => powerLawReleased(UNBAKED_STEEL, 3600, 360_000),
  'og.ss304_250C': published('steel-250c-bake'),
  'og.ss304_oxidised': published('steel-oxidised'),
  'og.ss304_450vac': published('steel-450c-vacuum'),
  'og.al1100_250C': published('aluminium-250c-bake'),
  'og.ss_100C_20h': published('steel-100c-bake'),
  'og.al_100C_20h': published('aluminium-100c-bake'),
  'og.ss_airbake100': published('steel-100c-air'),
  'og.al_elsey_100C': published('aluminium-100c-bake'),
  'og.cu_20h100C': published('copper-100c-bake'),
  'og.ofhc_24h100C': published('oxygen-free-copper-100c'),
  'og.ofhc_24h250C': published('oxygen-free-copper-250c'),
  'og.ss304_30h250_ohanlon': published('steel-250c-30h'),
  'og.ss_vacfurn': published('steel-vacuum-furnace'),
  'og.ss316L_800': published('316l-vacuum-furnace'),
  'og.ss316L_ral': published('316l-gauge-removed'),
  'og.ss_2p62mm_380h250': published('304l-250c-380h'),
  'og.ss_2p62mm_+140h350': published('304l-350c-140h'),
  'og.mild_80C48h': published('mild-steel-80c'),
  'og.ss316_6h150': published('316l-150c-6h'),
  'og.fkm_1h': published('fluoroelastomer-1h'),
  'og.ss_fired_bake': published('steel-fired-baked'),
  // These three come out of the model: water of the default wall, hydrogen of 2 mm steel of 1 weight ppm.
  'og.ss_unbaked_1h': () => water.waterRateTime(T20_K) / 3600,
  'og.ss_unbaked_10h': () => water.waterRateTime(T20_K) / 36_000,
  'og.ss_150C24h': () =>
    hydrogen.slabRate(
      { c0PerM3: hydrogen.atomsPerM3(1), wallM: 2e-3 },
      T20_K,
      hydrogen.MILL_AGE_M2 + hydrogen.transformedTime([held(423.15, 24)]),
    ),

  'iso.p00_293': () => water.waterScalePressure(T20_K),
  'iso.theta.': (id) => {
    const at = water.waterCoverage(checkInput(id, 'p'), checkInput(id, 'T'))
    return [at.theta, at.byLogPressure, at.byTemperature]
  },
  'iso.qt': () => water.waterRateTime(T20_K),
  'iso.front': (id) =>
    water.bakedWater(353.15, T20_K, 864_000, checkInput(id, 'A') / checkInput(id, 'S')).coldPa,
  'water.equiv_time': (id) => {
    const areaOverSpeed = checkInput(id, 'A_over_S')
    const front = water.bakedWater(393.15, T20_K, 2 * 86_400, areaOverSpeed).frontJMol
    const seconds = (hotK: number, s: number) =>
      water.bakedWater(hotK, T20_K, s, areaOverSpeed).frontJMol - front
    let [low, high] = [1e3, 1e8]
    while (high / low > 1 + 1e-9) {
      const middle = Math.sqrt(low * high)
      if (seconds(373.15, middle) < 0) low = middle
      else high = middle
    }
    return high / 86_400
  },

  'fick.sum.': (id) => hydrogen.slabSum(checkInput(id, 'Fo')),
  'fick.remain.': (id) => hydrogen.slabRemaining(checkInput(id, 'Fo')),
  'fick.short': (id) => {
    const law = { d0M2S: checkInput(id, 'D'), energyJMol: 0 }
    const sheet = { c0PerM3: checkInput(id, 'c0'), wallM: 3e-3, law }
    return hydrogen.slabAtomFlux(sheet, T20_K, checkInput(id, 'D') * checkInput(id, 't'))
  },
  'H.D.avdiaj250': (id) => (checkInput(id, 'Fo') * 1.31e-3 ** 2) / (380 * 3600),
  'H.D.avdiaj350': (id) => (checkInput(id, 'Fo') * 1.31e-3 ** 2) / (140 * 3600),
  'H.D.': (id) => hydrogen.hydrogenDiffusivity(checkInput(id, 'T')),
  'H.c0_1wtppm': () => hydrogen.atomsPerM3(1),
  'H.calder_lewin_c0': () => (2 * 300 * (101_325 / 760) * 1e-3 * 1e3) / (BOLTZMANN * 300),
  // 36 h at 450 degrees on a wall of 3.2 mm.
  'H.airbake_remain': () =>
    hydrogen.slabRemaining(hydrogen.transformedTime([held(723.15, 36)]) / 3.2e-3 ** 2),
  'H.recomb': () => hydrogen.recombinedContent(1e23, 1e-34, 2e-3, 1e6) / 1e23,
  'H.temp_coeff': () => hydrogen.hydrogenDiffusivity(303.15) / hydrogen.hydrogenDiffusivity(293.15),

  'pump.exp': () => pumps.pumpDownSeconds(1, 0.01, 101_325, 10),
  'pump.exp_ult': () => pumps.pumpDownSeconds(1, 0.01, 101_325, 10, 1),
  'pump.ss': () => pumps.steadyPressure(3e-7, 0.5),
  'pump.Q_ult': () => pumps.steadyPressure(1e-7, 1, 1e-8),
  'pump.cap_life': () => pumps.getterLife(100, 1e-5),

  'tube.c.H2O.1m': () => specific,
  'tube.c.N2.1m2': () => conductance.molecularSpecific('N2', 1.2, T20_K),
  'tube.D.N2': () => nitrogen / conductance.crossSection(1),
  'tube.periodic.avg': () => steady.periodicMean(stretch),
  'tube.periodic.pump': () => steady.periodicPressure(stretch, 0),
  'tube.periodic.quarter': () => steady.periodicPressure(stretch, 62.5),
  'tube.single.avg': () => steady.endPumpedMean(stretch),
  'tube.distributed': () => steady.wallPumpedPressure(stretch, 0.02, 250),
  'tube.leak.point': () => {
    const leaks = [{ atM: 150, loadPaM3S: 1e-6 }]
    const line = { lengthM: 250, specific, sourcePerM: 0, pumps: [{ atM: 0, speedM3S: 1.5 }], leaks }
    return steady.steadyPressures(line, steady.linePositions(line)).at(-1)!
  },
  'tube.tau.one': () => steady.slowestTime(nitrogen, conductance.crossSection(1), 2000, Infinity),
  'tube.tau.finiteS': () => steady.slowestTime(nitrogen, conductance.crossSection(1), 2000, 2),

  'gauge.ion.': (id) => gauges.ION_SENSITIVITY[gauged(id)],
  'gauge.ion_nasa.': (id) => gauges.ION_SENSITIVITY_SUMMERS[gauged(id)]!,
  'gauge.pirani.': (id) => gauges.THERMAL_FACTOR[gauged(id)]!,
  'gauge.ion_H2_true': () => gauges.truePressure(1e-7, { H2: 1 }),
  'gauge.ion_current': () => gauges.ionCurrent(1e-7, 0.075, 4e-3),
  'gauge.mix': () => gauges.nitrogenEquivalent({ H2: 1.2e-7, H2O: 0.8e-7 }),
}

/** Met by runs of the solver: benchmarks.test.ts (all of `bench` and `plan`) and transport.test.ts (`transient`). */
const SOLVER_PREFIXES = ['bench.', 'plan.', 'tube.transient.']
/** The order of several bakes: tests/unit/schedule/solve.test.ts. */
const SCHEDULE_PREFIX = 'sched.'
/** Heat, bake plans, leak rates by helium, residual gas and fits: answered beside those modules. */
const ANALYSIS_PREFIXES = ['th.', 'he.', 'rga.', 'fit.']

function answerOf(id: string): Answer | undefined {
  if (answers[id]) return answers[id]
  const prefix = Object.keys(answers).find((key) => key.endsWith('.') && id.startsWith(key))
  return prefix === undefined ? undefined : answers[prefix]
}

const answered = checkValues.filter((entry) => answerOf(entry.id))

describe('the table of check values', () => {
  test.each(answered.map((entry) => entry.id))('%s', (id) => expectCheck(id, answerOf(id)!(id)))

  test('at least 280 of the 294 entries are met; what is not, and why', () => {
    /** Heat, helium, residual gas and fits: analysis-check-values.test.ts holds each of these but `th.expand17`. */
    const notMet: Record<string, string> = {
      'th.expand17': 'a round coefficient of expansion; the law of the steel used here is within 3 % of it',
    }
    expect(checkValues).toHaveLength(294)
    const ids = checkValues.map(({ id }) => id)
    for (const id of Object.keys(notMet)) expect(ids).toContain(id)
    const met = ids.filter((id) => !notMet[id])
    for (const id of met) {
      const elsewhere = [...SOLVER_PREFIXES, ...ANALYSIS_PREFIXES, SCHEDULE_PREFIX].some((prefix) =>
        id.startsWith(prefix),
      )
      expect(elsewhere || answerOf(id) !== undefined, id).toBe(true)
    }
    expect(met.length).toBeGreaterThanOrEqual(280)
  })

  test('each entry is answered here, by a run of the solver, or beside the analysis', () => {
    const elsewhere = [...SOLVER_PREFIXES, ...ANALYSIS_PREFIXES, SCHEDULE_PREFIX]
    const open = checkValues.filter(
      ({ id }) => !answerOf(id) && !elsewhere.some((prefix) => id.startsWith(prefix)),
    )
    expect(open.map(({ id }) => id)).toEqual([])
    expect(new Set(checkValues.map(({ id }) => id)).size).toBe(checkValues.length)
  })
})
