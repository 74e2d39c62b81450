import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { closeDb, type Db, getDb } from '#app/db/client.server.ts'
import {
  listLimits,
  listPlacedPumps,
  listSegments,
  type SegmentWithState,
} from '#app/db/queries/segments.server.ts'
import { ampsAndVolts, type BakedSegment, coolHours, heatedTube, powerW } from '#app/domain/bake-load.ts'
import { tubeConductance } from '#app/physics/conductance.ts'
import { nitrogenEquivalent, truePressure } from '#app/physics/gauges.ts'
import { predictPumpDown, type SegmentModel, steadyProfile } from '#app/physics/predict.ts'
import { pumpDownSeconds } from '#app/physics/pumps.ts'
import { STEEL_DENSITY_KG_M3 } from '#app/physics/steel.ts'
import { bakeEnergyPerM, expansionM, thermalTime, wallSection } from '#app/physics/thermal.ts'
import { bakedSegments } from '#app/services/bake-plans-facts.server.ts'
import { coldModel } from '#app/services/segment-model.server.ts'
import { seededDemo } from '../support/demo-database.ts'

// The figures beside each name are those of the demo's own scenario. What is tested is that the register, as it stands
// in the database, gives them by app/physics within a tenth.

const MORNING = new Date('2026-11-09T07:00:00.000Z')
const AMBIENT_C = 18
const ROOM_K = 293.15
const HOT_K = 423.15

let db: Db
let segments: SegmentWithState[] = []
let baked: BakedSegment[] = []

beforeAll(async () => {
  process.env.DATABASE_URL = await seededDemo()
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  db = getDb()
  segments = await listSegments(db, MORNING)
  baked = await bakedSegments(db, segments)
}, 600_000)
afterAll(closeDb)

function segmentOf(tag: string): SegmentWithState {
  const found = segments.find((one) => one.tag === tag)
  if (found === undefined) throw new Error(`The register has no ${tag}`)
  return found
}

function bakedOf(tag: string): BakedSegment {
  const found = baked.find((one) => one.tag === tag)
  if (found === undefined) throw new Error(`The register has no ${tag}`)
  return found
}

const lengthOf = ({ startM, endM }: { startM: number; endM: number }) => endM - startM

/** A segment with the pump of a kind that worked on it last. */
async function modelOf(tag: string, kind: 'getter-ion' | 'turbomolecular-cart'): Promise<SegmentModel> {
  const segment = segmentOf(tag)
  const pumps = await listPlacedPumps(db, [segment.id])
  const model = coldModel(segment, pumps.filter((pump) => pump.kind === kind).slice(-1))
  if (model === null) throw new Error(`${tag} has no model on a ${kind}`)
  return model
}

/** Readings along the segment of hydrogen and leaks, the smallest and the largest, Pa nitrogen-equivalent. */
function extremes(model: SegmentModel): { least: number; most: number } {
  const readings = steadyProfile(model).map(({ n2EquivalentPa }) => n2EquivalentPa)
  return { least: Math.min(...readings), most: Math.max(...readings) }
}

/** Each computed figure over the one in the scenario, for a message that shows how far it is off. */
function ratios(computed: Record<string, number>, wanted: Record<string, number>): Record<string, number> {
  return Object.fromEntries(
    Object.entries(wanted).map(([name, value]) => [name, (computed[name] ?? Number.NaN) / value]),
  )
}

/** Names of the figures that are off by more than a tenth, with how far. */
function off(computed: Record<string, number>, wanted: Record<string, number>): string[] {
  return Object.entries(ratios(computed, wanted))
    .filter(([, ratio]) => !(Math.abs(ratio - 1) <= 0.1))
    .map(([name, ratio]) => `${name}: ${ratio.toFixed(2)} times`)
}

describe('tubes', () => {
  it.each([
    ['SG-01', { areaM2: 283, volumeM3: 42.4, massKg: 6735, coldMohm: 19.0, hotMohm: 21.6, growthMm: 337 }],
    ['SG-07', { areaM2: 264, volumeM3: 39.6, massKg: 6286, coldMohm: 17.7, hotMohm: 20.1, growthMm: 315 }],
    ['SG-08', { areaM2: 302, volumeM3: 45.2, massKg: 7183, coldMohm: 20.3, hotMohm: 23.0, growthMm: 360 }],
    ['SG-09', { areaM2: 236, volumeM3: 29.5, massKg: 5618, coldMohm: 22.8, hotMohm: 25.9, growthMm: 337 }],
    ['SP-1', { areaM2: 99, volumeM3: 8.7, massKg: 1968, coldMohm: 23.4, hotMohm: 26.6, growthMm: 202 }],
  ])('%s has the size, mass, resistance and growth of the scenario', (tag, wanted) => {
    const segment = segmentOf(tag)
    const { innerDiameterM: diameterM, wallM } = segment
    const lengthM = lengthOf(segment)
    const { amps, volts } = ampsAndVolts([bakedOf(tag)], AMBIENT_C, 150, 0)
    const computed = {
      areaM2: Math.PI * diameterM * lengthM,
      volumeM3: (Math.PI * diameterM ** 2 * lengthM) / 4,
      massKg: STEEL_DENSITY_KG_M3 * wallSection({ diameterM, wallM }) * lengthM,
      coldMohm: segment.resistance20Ohm * 1000,
      hotMohm: (volts / amps) * 1000,
      growthMm: expansionM(lengthM, ROOM_K, HOT_K) * 1000,
    }
    expect(off(computed, wanted)).toEqual([])
  })
})

describe('heating to 150 °C', () => {
  type Row = [string, Record<string, number>]
  it.each<Row>([
    ['SG-01', { lossKw: 25.3, rampKw: 9.4, soakA: 1083, rampA: 1267, soakV: 23.4, rampV: 27.3, mwh: 4.5 }],
    ['SG-07', { lossKw: 23.6, rampKw: 8.7, soakA: 1083, rampA: 1267, soakV: 21.8, rampV: 25.5, mwh: 4.2 }],
    ['SG-08', { lossKw: 27.0, rampKw: 10.0, soakA: 1083, rampA: 1267, soakV: 24.9, rampV: 29.2, mwh: 4.8 }],
    ['SG-09', { lossKw: 21.6, rampKw: 7.8, soakA: 914, rampA: 1067, soakV: 23.7, rampV: 27.6, mwh: 3.9 }],
    ['SP-1', { lossKw: 9.7, rampKw: 2.7, soakA: 603, rampA: 683, soakV: 16.0, rampV: 18.1, mwh: 1.7 }],
  ])('%s takes the power, current, voltage and energy of the scenario', (tag, wanted) => {
    const segment = bakedOf(tag)
    const soak = ampsAndVolts([segment], AMBIENT_C, 150, 0)
    const ramp = ampsAndVolts([segment], AMBIENT_C, 150, 10)
    const held = powerW(segment, AMBIENT_C, 150, 0).tubeW
    const energyJ =
      lengthOf(segment) *
      bakeEnergyPerM(heatedTube(segment, AMBIENT_C), {
        fromK: AMBIENT_C + 273.15,
        toK: HOT_K,
        rateKS: 10 / 3600,
        holdSeconds: 168 * 3600,
      })
    const computed = {
      lossKw: held / 1000,
      rampKw: (powerW(segment, AMBIENT_C, 150, 10).tubeW - held) / 1000,
      soakA: soak.amps,
      soakV: soak.volts,
      rampA: ramp.amps,
      rampV: ramp.volts,
      mwh: energyJ / 3.6e9,
    }
    expect(off(computed, wanted)).toEqual([])
  })

  it.each<Row>([
    ['SG-01', { tauH: 4.9, coolH: 8.7 }],
    ['SG-09', { tauH: 4.8, coolH: 8.5 }],
    ['SP-1', { tauH: 3.7, coolH: 6.7 }],
  ])('%s cools by itself as fast as in the scenario', (tag, wanted) => {
    const segment = bakedOf(tag)
    const computed = {
      tauH: thermalTime(heatedTube(segment, AMBIENT_C), HOT_K) / 3600,
      coolH: coolHours(segment, AMBIENT_C, 150, 40),
    }
    expect(off(computed, wanted)).toEqual([])
  })

  it('pairs in series stay under 50 V in the soak and go over it at the end of the ramp', () => {
    for (const [one, other, soakV, rampV] of [
      ['SG-01', 'SG-02', 46.7, 54.7],
      ['SG-11', 'SG-12', 47.3, 55.2],
    ] as const) {
      const pair = [bakedOf(one), bakedOf(other)]
      const computed = {
        soakV: ampsAndVolts(pair, AMBIENT_C, 150, 0).volts,
        rampV: ampsAndVolts(pair, AMBIENT_C, 150, 10).volts,
      }
      expect(off(computed, { soakV, rampV })).toEqual([])
      expect(computed.soakV).toBeLessThan(50)
      expect(computed.rampV).toBeGreaterThan(50)
    }
  })
})

describe('vacuum', () => {
  /** 5e-13 mbar·L/(s·cm²) in Pa·m/s: the outgassing of baked steel that the scenario reckons with. */
  const BAKED = { kind: 'low-hydrogen', qPaMS: 5e-10, atK: ROOM_K } as const

  it.each([
    ['SG-01', { airLs: 174, h2Ls: 663, cross: 1.2e-7, ends: 1.4e-7, crossEq: 4.9e-8, endsEq: 6.0e-8 }],
    ['SG-09', { airLs: 101, h2Ls: 384, cross: 9.8e-8, ends: 1.4e-7, crossEq: 4.1e-8, endsEq: 5.7e-8 }],
    ['SP-1', { airLs: 58, h2Ls: 219, cross: 4.1e-8, ends: 6.9e-8, crossEq: 1.7e-8, endsEq: 2.9e-8 }],
  ])('%s conducts and reads, baked, what the scenario says', async (tag, wanted) => {
    const model = { ...(await modelOf(tag, 'getter-ion')), hydrogen: BAKED }
    const { least: crossEq, most: endsEq } = extremes(model)
    const computed = {
      airLs: 1000 * tubeConductance('N2', model.diameterM, model.lengthM, ROOM_K),
      h2Ls: 1000 * tubeConductance('H2', model.diameterM, model.lengthM, ROOM_K),
      crossEq,
      endsEq,
      cross: truePressure(crossEq, { H2: 1 }),
      ends: truePressure(endsEq, { H2: 1 }),
    }
    expect(off(computed, wanted)).toEqual([])
  })

  it.each([
    ['SG-01', { after10: 1.9e-4, after100: 1.9e-5, roughH: 1.6 }],
    ['SG-09', { after10: 1.6e-4, after100: 1.6e-5, roughH: 1.1 }],
    ['SP-1', { after10: 6.6e-5, after100: 6.6e-6, roughH: 0.3 }],
  ])('%s, unbaked on a cart, falls as the scenario says, and is roughed as fast', async (tag, wanted) => {
    const segment = segmentOf(tag)
    const cart = (await modelOf('SG-11', 'turbomolecular-cart')).pumps[0]
    const model: SegmentModel = {
      ...(await modelOf(tag, 'getter-ion')),
      pumps: [{ atM: lengthOf(segment) / 2, speedM3S: cart?.speedM3S ?? {} }],
      water: { state: 'unbaked', capacityPerM2: segment.waterCapacity },
    }
    const { H2O } = predictPumpDown(model, { hours: [10, 100], atM: lengthOf(segment) / 2 }).byGasPa
    const [set] = (await listPlacedPumps(db, [segmentOf('SP-1').id])).filter(({ tag: one }) => one === 'RS-1')
    const volumeM3 = (Math.PI * segment.innerDiameterM ** 2 * lengthOf(segment)) / 4
    const computed = {
      after10: H2O[0] ?? Number.NaN,
      after100: H2O[1] ?? Number.NaN,
      roughH: pumpDownSeconds(volumeM3, set?.speeds.N2 ?? Number.NaN, 101_325, 10) / 3600,
    }
    expect(off(computed, wanted)).toEqual([])
  })
})

describe('segments on the morning', () => {
  it('SG-01 and SG-02 read what hydrogen of their baked steel gives', async () => {
    for (const [tag, ends, cross] of [
      ['SG-01', 6.3e-8, 5.1e-8],
      ['SG-02', 6.1e-8, 4.9e-8],
    ] as const) {
      const { least, most } = extremes(await modelOf(tag, 'getter-ion'))
      expect(off({ least, most }, { least: cross, most: ends }), tag).toEqual([])
    }
  })

  /** What the fired steel would have to give off for the readings of the morning, Pa·m/s at 20 °C. */
  const FIRED_BY_READINGS = 5e-10

  it('contradiction: SG-09 and SG-10 read a fifth more than the floor in the register gives, 5e-10 Pa·m/s would fit', async () => {
    for (const [tag, ends, cross] of [
      ['SG-09', 5.6e-8, 4.2e-8],
      ['SG-10', 5.9e-8, 4.0e-8],
    ] as const) {
      const model = await modelOf(tag, 'getter-ion')
      const short = ratios(extremes(model), { least: cross, most: ends })
      expect(segmentOf(tag).hydrogenQ20).toBe(4e-10)
      expect(Math.min(...Object.values(short)), tag).toBeGreaterThan(0.78)
      expect(Math.max(...Object.values(short)), tag).toBeLessThan(0.88)
      const fitting = extremes({
        ...model,
        hydrogen: { kind: 'low-hydrogen', qPaMS: FIRED_BY_READINGS, atK: ROOM_K },
      })
      expect(off(fitting, { least: cross, most: ends }), tag).toEqual([])
    }
  })

  it('SG-06 reads 1.25e-7 Pa more at the cross and a further 1.4e-7 at the end by a leak of 5e-8 Pa·m³/s there', async () => {
    const tight = await modelOf('SG-06', 'getter-ion')
    const leak = (atM: number) => ({ ...tight, airLeaks: [{ atM, qPaM3S: 5e-8 }] })
    const at = (model: SegmentModel, offsetM: number) =>
      steadyProfile(model).find((one) => one.offsetM === offsetM)?.n2EquivalentPa ?? Number.NaN
    const [middle, end] = [tight.lengthM / 2, tight.lengthM]
    const cross = at(leak(end), middle) - at(tight, middle)
    const further = at(leak(end), end) - at(tight, end) - cross
    expect(off({ cross, further }, { cross: 1.25e-7, further: 1.4e-7 })).toEqual([])
  })

  it('SG-11 reads 2.4e-5 Pa at the cross and 3.4e-5 at the end after 66 h on its cart', async () => {
    const model = await modelOf('SG-11', 'turbomolecular-cart')
    const at = (atM: number) => predictPumpDown(model, { hours: [66], atM }).n2EquivalentPa[0] ?? Number.NaN
    expect(off({ cross: at(75), end: at(0) }, { cross: 2.4e-5, end: 3.4e-5 })).toEqual([])
  })

  it('contradiction: SG-13 rises by 6.0e-6 Pa an hour, a fifth more than the floor in the register gives', () => {
    const { hydrogenQ20, innerDiameterM } = segmentOf('SG-13')
    const rise = (qPaMS: number) => nitrogenEquivalent({ H2: (qPaMS * 4 * 3600) / innerDiameterM })
    const short = rise(hydrogenQ20 ?? Number.NaN) / 6.0e-6
    expect(short).toBeGreaterThan(0.78)
    expect(short).toBeLessThan(0.88)
    expect(off({ risePaH: rise(FIRED_BY_READINGS) }, { risePaH: 6.0e-6 })).toEqual([])
  })

  it('SG-08, cooled by 10 °C an hour since its soak ended, stands at 62 °C; left alone it would be at 40', () => {
    const hours = 8.5
    expect(off({ celsius: 150 - 10 * hours }, { celsius: 62 })).toEqual([])
    expect(off({ hours: coolHours(bakedOf('SG-08'), AMBIENT_C, 150, 40) }, { hours })).toEqual([])
  })

  it('SG-16 is about 30 weeks from its limit at 6 per cent a week, from the cross', async () => {
    const limit = (await listLimits(db, MORNING)).find(
      ({ kind, segmentId }) => kind === 'operating-limit' && segmentId === null,
    )
    const weeks = Math.log((limit?.value ?? Number.NaN) / 3.4e-7) / Math.log(1.06)
    expect(off({ weeks }, { weeks: 30 })).toEqual([])
  })
})
