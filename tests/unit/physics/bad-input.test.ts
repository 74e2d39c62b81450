/**
 * Whatever number goes in, no "not a number" comes out: every number of a good call is made bad in turn, and the
 * function either refuses with a typed error that names argument, value and range, or gives numbers.
 */
import { describe, expect, test, vi } from 'vitest'
import * as bake from '#app/physics/bake.ts'
import { bakeChoice } from '#app/physics/bake-options.ts'
import * as limits from '#app/physics/component-limits.ts'
import * as conductance from '#app/physics/conductance.ts'
import { T20_K } from '#app/physics/constants.ts'
import { PhysicsError } from '#app/physics/errors.ts'
import { readSpectrum } from '#app/physics/fingerprints.ts'
import { forecastTimeToTarget } from '#app/physics/forecast.ts'
import * as gases from '#app/physics/gases.ts'
import * as gauges from '#app/physics/gauges.ts'
import * as helium from '#app/physics/helium.ts'
import * as hydrogen from '#app/physics/hydrogen.ts'
import { locateLeak } from '#app/physics/leak-locator.ts'
import * as outgassing from '#app/physics/outgassing.ts'
import * as predict from '#app/physics/predict.ts'
import { temperatureProgramme } from '#app/physics/programme.ts'
import * as fit from '#app/physics/pump-down-fit.ts'
import * as pumps from '#app/physics/pumps.ts'
import { simulateSegment } from '#app/physics/simulate.ts'
import * as statistics from '#app/physics/statistics.ts'
import * as steady from '#app/physics/steady.ts'
import * as steel from '#app/physics/steel.ts'
import * as thermal from '#app/physics/thermal.ts'
import { marchLine } from '#app/physics/thermal-line.ts'
import { runTransport, TransportError } from '#app/physics/transport.ts'
import { buildMesh } from '#app/physics/tube.ts'
import * as units from '#app/physics/units.ts'
import * as water from '#app/physics/water.ts'

vi.setConfig({ testTimeout: 60_000 })

const model: predict.SegmentModel = {
  lengthM: 150,
  diameterM: 0.6,
  wallM: 3e-3,
  temperatureK: T20_K,
  pumps: [{ atM: 75, speedM3S: { H2: 1.2, N2: 0.4 } }],
  hydrogen: { kind: 'diffusion', c0PerM3: 7e23, agedTauM2: 1e-6 },
  water: { state: 'unbaked', capacityPerM2: 5e19 },
  airLeaks: [{ atM: 20, qPaM3S: 1e-8 }],
  unbakedArea: { share: 1e-3, followShare: 0.3, agedTauM2: 1e-9 },
}
const fired: predict.SegmentModel = {
  ...model,
  hydrogen: { kind: 'low-hydrogen', qPaMS: 6e-11, atK: 296 },
  water: { state: 'baked', floorPa: 1e-11 },
}
const tube = { diameterM: 0.6, wallM: 3e-3, lossWM2K: 0.7, ambientK: T20_K }
const hours = Array.from({ length: 60 }, (_, i) => 1 + i)
const series = { hours, pa: hours.map((h, i) => (1e-4 / h) * (1 + 0.01 * Math.sin(7 * i))) }
const stretch = { sourcePerM: 1e-8, specific: 100, lengthM: 250, speedM3S: 1.5 }
const line = { lengthM: 150, specific: 50, sourcePerM: 1e-9, pumps: [{ atM: 75, speedM3S: 1 }] }
const sheet = { c0PerM3: 5e24, wallM: 3e-3 }
const roots = {
  kind: 'roots',
  speedM3S: 0.5,
  backingM3S: 0.07,
  compression: 30,
  bypassPa: 5000,
  backingUltimatePa: 3,
} as const
const mesh = buildMesh([{ name: 'tube', sections: [{ lengthM: 20, diameterM: 0.5 }] }], 2)
const room = { programmes: [temperatureProgramme([{ atS: 0, kelvin: T20_K }])] }
const step = <Value>(value: Value) => [{ fromS: 0, value }]
const wet = {
  gas: 'H2O',
  startPa: 1e-3,
  isotherm: water.DEFAULT_WATER,
  unbaked: { share: 0.01, followShare: 0.5, roomK: T20_K },
  getter: { sticking: 0.01, capacityPerM2: 1e19, wallShare: 0.5 },
  pumps: [{ node: 0, mouthK: 290, capacityPaM3: 5, curve: step({ kind: 'constant', speedM3S: 1 } as const) }],
  leaks: [{ node: 3, gasK: 293, loadPaM3S: step(1e-8) }],
} as const
const dense = {
  gas: 'air',
  startPa: 1e3,
  flow: 'transitional',
  viscosityPaS: 1.8e-5,
  walls: [{ kind: 'power-law', law: { oneHourPaMS: 3e-6, exponent: 1 }, leadS: 60, gasK: T20_K }],
  pumps: [{ node: 0, curve: step(roots) }],
} as const
const stale = {
  gas: 'H2',
  startPa: 1e-6,
  walls: [
    { kind: 'sheet', sheet, agedTauM2: 1e-9 },
    { kind: 'low-hydrogen', qPaMS: 1e-10, atK: 296 },
  ],
  pumps: [
    { node: 0, curve: step({ kind: 'turbo', speedM3S: 1, halfSpeedPa: 1, ultimatePa: 1e-9 } as const) },
  ],
} as const
const transport = (gas: object, numbers: { fromS: number; outputsS: number[]; tolerance: number }) =>
  runTransport({ mesh, thermal: room, gases: [gas as never], maxSteps: 2000, ...numbers })[0]
const when = { fromS: 0, outputsS: [10, 100], tolerance: 0.01 }

type Call = (...args: never[]) => unknown
/** Good calls; every number in the arguments is made bad in turn. */
const calls: [string, Call, unknown[]][] = Object.entries({
  // Conductance.
  apertureConductance: [conductance.apertureConductance, ['N2', 0.1, T20_K]],
  crossSection: [conductance.crossSection, [0.5]],
  transmission: [conductance.transmission, [3]],
  transmissionBerman: [conductance.transmissionBerman, [3]],
  tubeConductance: [conductance.tubeConductance, ['N2', 0.1, 1, T20_K]],
  molecularSpecific: [conductance.molecularSpecific, ['N2', 0.1, T20_K]],
  viscousSpecific: [conductance.viscousSpecific, [0.1, 100, 1.8e-5]],
  slipPerPascal: [conductance.slipPerPascal, ['N2', 0.1, T20_K, 1.8e-5]],
  transitionalFlow: [conductance.transitionalFlow, ['N2', 0.1, T20_K, 1.8e-5]],
  transitionalSpecific: [
    (p: number) => conductance.transitionalSpecific(conductance.transitionalFlow('air', 0.1, T20_K), p),
    [10],
  ],
  transitionalSlope: [
    (p: number) => conductance.transitionalSlope(conductance.transitionalFlow('air', 0.1, T20_K), p),
    [10],
  ],
  chokedRatio: [conductance.chokedRatio, [1.4]],
  apertureContinuumFlow: [conductance.apertureContinuumFlow, ['air', 1, T20_K, 0.7]],
  apertureThroughput: [
    (bore: number, kelvin: number, eta: number, up: number, down: number) =>
      conductance.apertureThroughput(conductance.apertureFlow('air', bore, kelvin, eta), up, down),
    [0.1, T20_K, 1.8e-5, 10, 1],
  ],
  inSeries: [conductance.inSeries, [1, 2]],
  inParallel: [conductance.inParallel, [1, 2]],
  molecularScale: [
    conductance.molecularScale,
    [
      { gas: 'air', atK: 293 },
      { gas: 'H2', atK: 400 },
    ],
  ],
  effectiveSpeed: [conductance.effectiveSpeed, [1, 0.5]],
  // Gases and units.
  meanSpeed: [gases.meanSpeed, ['N2', T20_K]],
  viscosity: [gases.viscosity, ['N2', T20_K]],
  numberDensity: [gases.numberDensity, [1e-7, T20_K]],
  impingementRate: [gases.impingementRate, ['N2', 1e-7, T20_K]],
  monolayerTime: [gases.monolayerTime, ['N2', 1e-7, T20_K, 1e19, 0.5]],
  viscosityDiameter: [gases.viscosityDiameter, ['N2', T20_K]],
  meanFreePathPressure: [gases.meanFreePathPressure, ['N2', T20_K]],
  knudsenNumber: [gases.knudsenNumber, ['N2', 1, T20_K, 0.1]],
  flowRegime: [gases.flowRegime, [0.2, { molecularAbove: 0.5, viscousBelow: 0.01 }]],
  reynoldsNumber: [gases.reynoldsNumber, ['N2', 1, 0.1, T20_K]],
  toPascal: [units.toPascal, [1, 'Torr']],
  fromPascal: [units.fromPascal, [1, 'Torr']],
  toPaM3S: [units.toPaM3S, [1, 'mbar·l/s']],
  toPaMS: [units.toPaMS, [1, 'Pa·m/s']],
  celsiusToKelvin: [units.celsiusToKelvin, [20]],
  kelvinToCelsius: [units.kelvinToCelsius, [300]],
  fahrenheitToCelsius: [units.fahrenheitToCelsius, [300]],
  moleculesPerSecond: [units.moleculesPerSecond, [1e-7, 300]],
  // Walls.
  powerLawRate: [outgassing.powerLawRate, [{ oneHourPaMS: 3e-6, exponent: 1 }, 100, 60]],
  powerLawReleased: [outgassing.powerLawReleased, [{ oneHourPaMS: 3e-6, exponent: 0.8 }, 100, 6000]],
  hydrogenDiffusivity: [hydrogen.hydrogenDiffusivity, [T20_K, { d0M2S: 1e-6, energyJMol: 5e4 }]],
  atomsPerM3: [hydrogen.atomsPerM3, [1]],
  slabSum: [hydrogen.slabSum, [0.1]],
  slabRemaining: [hydrogen.slabRemaining, [0.1]],
  slabAtomFlux: [hydrogen.slabAtomFlux, [sheet, T20_K, 1e-8]],
  slabRate: [hydrogen.slabRate, [sheet, T20_K, 1e-8, T20_K]],
  transformedTime: [hydrogen.transformedTime, [[{ seconds: 1e4, fromK: 293, toK: 423 }]]],
  lowHydrogenRate: [hydrogen.lowHydrogenRate, [6e-11, 296, 400, 57e3]],
  recombinedContent: [hydrogen.recombinedContent, [1e23, 1e-34, 2e-3, 1e6]],
  waterScalePressure: [water.waterScalePressure, [T20_K, water.DEFAULT_WATER]],
  waterCoverage: [water.waterCoverage, [1e-6, T20_K, water.DEFAULT_WATER]],
  waterRateTime: [water.waterRateTime, [T20_K, water.DEFAULT_WATER]],
  emptyingFront: [water.emptyingFront, [1e-6, T20_K, water.DEFAULT_WATER]],
  bakedWater: [water.bakedWater, [400, T20_K, 1e5, 200]],
  cooledWater: [water.cooledWater, [1e-5, 400, T20_K, water.DEFAULT_WATER, { share: 0.01, atK: 300 }]],
  // Pumps and gauges.
  pumpDownSeconds: [pumps.pumpDownSeconds, [1, 0.01, 1e5, 10, 1]],
  steadyPressure: [pumps.steadyPressure, [1e-7, 1, 1e-8]],
  saturatedIonPumpShare: [pumps.saturatedIonPumpShare, [1e-6]],
  getterSpeedPerMetre: [pumps.getterSpeedPerMetre, ['H2', 0.6, 0.01, T20_K]],
  captureSpeed: [pumps.captureSpeed, ['H2O', 0.1, 0.9, T20_K]],
  getterLife: [pumps.getterLife, [100, 1e-5]],
  turboUltimate: [pumps.turboUltimate, [10, 1e6]],
  speedFor: [pumps.speedFor, ['ion', 'H2', 0.4]],
  nitrogenEquivalent: [gauges.nitrogenEquivalent, [{ H2: 1e-7, H2O: 1e-8 }]],
  truePressure: [gauges.truePressure, [1e-7, { H2: 1, H2O: 2 }]],
  thermalTruePressure: [gauges.thermalTruePressure, [10, 'Ar']],
  ionCurrent: [gauges.ionCurrent, [1e-7, 0.075, 4e-3]],
  ionGaugeReading: [gauges.ionGaugeReading, ['hot-cathode', { H2: 1e-7 }]],
  tubePressureBehindGauge: [gauges.tubePressureBehindGauge, [1e-7, 293, 423]],
  // Steady lines.
  steadyPressures: [(one: typeof line) => steady.steadyPressures(one, steady.linePositions(one)), [line]],
  periodicPressure: [steady.periodicPressure, [stretch, 10]],
  periodicMean: [steady.periodicMean, [stretch]],
  endPumpedPressure: [steady.endPumpedPressure, [stretch, 10]],
  endPumpedMean: [steady.endPumpedMean, [stretch]],
  bothEndsPressure: [steady.bothEndsPressure, [stretch, 10]],
  wallPumpedPressure: [steady.wallPumpedPressure, [stretch, 0.02, 10]],
  slowestTime: [steady.slowestTime, [100, 1, 2000, 2]],
  // Heat.
  steelHeatCapacity: [steel.steelHeatCapacity, [400]],
  steelConductivity: [steel.steelConductivity, [400]],
  steelResistivity: [steel.steelResistivity, [400]],
  steelStrain: [steel.steelStrain, [293, 400]],
  blockedStress: [steel.blockedStress, [1e-3]],
  heatCapacityPerM: [thermal.heatCapacityPerM, [tube, 400]],
  storedHeatPerM: [thermal.storedHeatPerM, [tube, 293, 400]],
  holdPower: [thermal.holdPower, [tube, 400]],
  rampPower: [thermal.rampPower, [tube, 400, 0.003]],
  thermalTime: [thermal.thermalTime, [tube, 400]],
  heatUpSeconds: [thermal.heatUpSeconds, [tube, 300, 293, 400]],
  coolSeconds: [thermal.coolSeconds, [tube, 400, 300]],
  bakeEnergyPerM: [thermal.bakeEnergyPerM, [tube, { fromK: 293, toK: 423, rateKS: 0.003, holdSeconds: 1e5 }]],
  joulePower: [thermal.joulePower, [{ diameterM: 0.6, wallM: 3e-3 }, 1250, 400]],
  currentFor: [thermal.currentFor, [{ diameterM: 0.6, wallM: 3e-3 }, 200, 400]],
  seriesVolts: [thermal.seriesVolts, [{ diameterM: 0.6, wallM: 3e-3 }, 1250, 400, 150, 0.01]],
  insulationLoss: [thermal.insulationLoss, [0.6, { thicknessM: 0.1, conductivityWMK: 0.045, filmWM2K: 8 }]],
  radiationLoss: [thermal.radiationLoss, [0.2, 423, 293]],
  finLength: [thermal.finLength, [16, 0.003, 0.7]],
  finTemperature: [thermal.finTemperature, [1, 0.27, 293, 423]],
  expansionM: [thermal.expansionM, [15, 293, 423]],
  transpirationRatio: [thermal.transpirationRatio, [423, 293, { gas: 'N2', diameterM: 0.04, pressurePa: 1 }]],
  marchLine: [
    (one: { startK: number; lengthM: number }, power: number, until: number) =>
      marchLine({ ...one, tube, intervals: 10 }, () => power, [until], 600),
    [{ startK: 293, lengthM: 10 }, 100, 3600],
  ],
  objectionsTo: [limits.objectionsTo, [200, 20, [{ kind: 'silica-window', name: 'W1', ownLimitC: 150 }]]],
  hottestBake: [limits.hottestBake, [20, [{ kind: 'silica-window', name: 'W1', riseShare: 0.7 }]]],
  // Segments.
  predictPumpDown: [predict.predictPumpDown, [model, { hours: [1, 10], atM: 0 }]],
  steadyProfile: [predict.steadyProfile, [fired]],
  hoursToReach: [predict.hoursToReach, [model, 1e-5, 75]],
  bakeHoursToReach: [predict.bakeHoursToReach, [model, { targetPa: 1e-7, bakeK: 400, atM: 75 }]],
  afterBake: [bake.afterBake, [model, { bakeK: 400, holdHours: 50, upKH: 5, downKH: 6, coldHours: 3 }, 75]],
  holdToMeet: [bake.holdToMeet, [model, { bakeK: 400, upKH: 5 }, 1e-7, 75]],
  equivalentHold: [bake.equivalentHold, ['water', 393, 1e5, 373, 200]],
  bakeChoice: [
    bakeChoice,
    [{ model, atM: 75, targetPa: 1e-6, tube, coolestC: 80, hottestC: 160, stepC: 20, upKH: 10 }],
  ],
  simulateSegment: [
    (one: predict.SegmentModel, options: Parameters<typeof simulateSegment>[1]) => {
      // A lake of a vessel or an hour without end would take all day: what matters is known sooner.
      let asked = 0
      return simulateSegment(one, { ...options, cancelled: () => ++asked > 100 })
    },
    [
      model,
      {
        corners: [
          { atS: 0, kelvin: 293 },
          { atS: 9e4, kelvin: 350 },
        ],
        hours: [1, 30],
        atM: 0,
        tolerance: 0.03,
      },
    ],
  ],
  'transport of water': [transport, [wet, when]],
  'transport of dense air': [transport, [dense, when]],
  'transport of hydrogen': [transport, [stale, when]],
  buildMesh: [
    buildMesh,
    [
      [
        {
          name: 'a',
          sections: [{ lengthM: 10, diameterM: 0.5 }],
          pointsM: [3],
          valves: [{ name: 'V', atM: 5, boreM: 0.2 }],
        },
      ],
      2,
    ],
  ],
  temperatureProgramme: [
    temperatureProgramme,
    [
      [
        { atS: 0, kelvin: 300 },
        { atS: 10, kelvin: 310 },
      ],
    ],
  ],
  // Analysis.
  airLeakFrom: [
    helium.airLeakFrom,
    [{ heliumPaM3S: 1e-9, heliumShare: 0.5, temperatureK: 293, sprayedSeconds: 50, responseSeconds: 40 }],
  ],
  airOverHelium: [helium.airOverHelium, ['laminar', 293]],
  heliumResponseSeconds: [helium.heliumResponseSeconds, [40, 0.45]],
  signalShare: [helium.signalShare, [60, 94]],
  locateLeak: [
    locateLeak,
    [
      { lengthM: 150, diameterM: 0.6, temperatureK: 293, pumps: [{ atM: 75, speedM3S: 0.45 }] },
      [0, 75, 150].map((atM) => ({ atM, beforePa: 6e-8, afterPa: 3e-7 + atM * 1e-9 })),
      { repeat: 0.03, scale: 0.15 },
    ],
  ],
  readSpectrum: [readSpectrum, [{ 2: 1e-9, 18: 3e-9, 28: 1e-9, 32: 2e-10, 40: 1e-11 }, 1e-13]],
  confidenceLimits: [() => fit.confidenceLimits(fit.fitPumpDown(series)), []],
  crossingTime: [(target: number) => fit.crossingTime(fit.fitPumpDown(series), target), [1e-7]],
  outgassingAtOneHour: [fit.outgassingAtOneHour, [1e-4, 0.4, 280]],
  forecastTimeToTarget: [
    (target: number, from: number) =>
      forecastTimeToTarget(series, { targetPa: target, windowStartHours: from }),
    [1e-6, 2],
  ],
  studentQuantile: [statistics.studentQuantile, [0.9, 5]],
  fisherTail: [statistics.fisherTail, [2, 1, 5]],
  fisherQuantile: [statistics.fisherQuantile, [0.05, 1, 5]],
  chiSquareQuantile: [statistics.chiSquareQuantile, [0.1, 2]],
  normalQuantile: [statistics.normalQuantile, [0.9]],
}).map(([name, [call, args]]) => [name, call as Call, args as unknown[]])

/** Paths of all numbers in a value. */
function numbersIn(value: unknown, path: (string | number)[] = []): (string | number)[][] {
  if (typeof value === 'number') return [path]
  if (value === null || typeof value !== 'object') return []
  return Object.entries(value).flatMap(([key, inner]) => numbersIn(inner, [...path, key]))
}

function withValue(value: unknown, path: (string | number)[], bad: number): unknown {
  const [key, ...rest] = path
  if (key === undefined) return bad
  const copy = (Array.isArray(value) ? [...value] : { ...(value as object) }) as Record<
    string | number,
    unknown
  >
  copy[key] = withValue(copy[key], rest, bad)
  return copy
}

const holdsNoNumber = (value: unknown): boolean => {
  if (typeof value === 'number') return Number.isNaN(value)
  if (value === null || typeof value !== 'object') return false
  return Object.values(value).some(holdsNoNumber)
}

describe('no bad number comes out as "not a number"', () => {
  test.each(calls)('%s', (name, call, args) => {
    expect(holdsNoNumber(call(...(args as never[]))), `${name}: the good call`).toBe(false)
    for (const path of numbersIn(args)) {
      for (const bad of [Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, -1, 0, 1e300]) {
        const where = `${name} with ${path.join('.')} = ${bad}`
        try {
          const found = call(...(withValue(args, path, bad) as never[]))
          expect(holdsNoNumber(found), where).toBe(false)
          if (Number.isNaN(bad)) expect.fail(`${where} is not refused`)
        } catch (error) {
          if (error instanceof PhysicsError) {
            expect(error.message, where).toMatch(/ is .*; expected /)
            continue
          }
          if (error instanceof TransportError) continue
          throw new Error(`${where}: ${String(error)}`)
        }
      }
    }
  })
})
