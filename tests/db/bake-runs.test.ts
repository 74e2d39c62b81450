import { and, asc, eq, gte } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import {
  bakeDeviation,
  limitValue,
  pump,
  pumpPlacement,
  reading,
  record,
  rollupDue,
  segment as segmentTable,
} from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { qualityCode } from '#app/domain/readings.ts'
import type { LimitKind } from '#app/domain/register.ts'
import type { SegmentState } from '#app/domain/segment-states.ts'
import { acceptOutgassing } from '#app/services/bake-afterwards.server.ts'
import { noteDeviation, noteOwnDeviations } from '#app/services/bake-deviations.server.ts'
import { readBakeRunPage } from '#app/services/bake-runs.server.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createState,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const HOUR = 3_600_000
const STEP = 600_000
const SOAK = new Date(MORNING.getTime() - 30 * HOUR)
const HEATING = new Date(SOAK.getTime() - 13 * HOUR)
let engineer: Actor
let technician: Actor
let manager: Actor
let segment: { id: number; tag: string; lineId: number }
let channels: number[]
let crossChannel: number

async function limit(kind: LimitKind, value: number, unit: string) {
  await db.insert(limitValue).values({
    kind,
    value,
    unit,
    startsAt: new Date('2025-01-01T00:00:00Z'),
    reason: 'for a test',
    recordedAt: new Date('2025-01-01T00:00:00Z'),
  })
}

beforeEach(async () => {
  await createSite(db)
  engineer = await createUser(db, { roles: ['engineer'], name: 'Eda Moss' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  manager = await createUser(db, { roles: ['manager'], name: 'Mo Field' })
  segment = await createSegment(db, { tag: 'SG-05', startM: 600, endM: 750, lastBakeYear: 2020 })
  const source = await createSource(db, { code: 'NL-T', periodSeconds: 300 })
  channels = []
  for (let no = 1; no <= 4; no++) {
    const position = await createPosition(db, {
      tag: `TH-05-0${no}`,
      kind: 'thermocouple',
      quantity: 'temperature',
      segmentId: segment.id,
      lineId: segment.lineId,
      chainageM: 600 + no * 30,
    })
    channels.push((await createChannel(db, { sourceId: source.id, positionId: position.id })).id)
  }
  const cross = await createPosition(db, {
    tag: 'HC-05B',
    segmentId: segment.id,
    lineId: segment.lineId,
    chainageM: 675,
  })
  crossChannel = (await createChannel(db, { sourceId: source.id, positionId: cross.id })).id
  await limit('bake-temperature', 150, '°C')
  await limit('bake-hours', 168, 'h')
  await limit('ramp-rate', 10, '°C/h')
  await limit('bake-tolerance', 10, '°C')
  await limit('temperature-spread', 20, '°C')
  await limit('bake-hold-pressure', 1e-2, 'Pa')
  await limit('touch-limit', 40, '°C')
  await states(segment.id, [
    ['bake-prep', new Date(HEATING.getTime() - 48 * HOUR)],
    ['heating', HEATING],
    ['soak', SOAK],
  ])
})

/** States of a segment one after the other. */
async function states(segmentId: number, steps: readonly [SegmentState, Date][]) {
  for (const [index, [state, since]] of steps.entries()) {
    const endedAt = steps[index + 1]?.[1]
    await createState(db, {
      segmentId,
      setBy: engineer.personId,
      state,
      since,
      ...(endedAt === undefined ? {} : { endedAt }),
    })
  }
}

/** Readings every ten minutes over [from, to] on one channel. */
async function fill(channelId: number, from: Date, to: Date, value: (at: number) => number) {
  const rows = []
  for (let at = from.getTime(); at <= to.getTime(); at += STEP) {
    rows.push({
      channelId,
      at: new Date(at),
      value: value(at),
      quality: qualityCode('good'),
      importId: 1,
      lineNo: rows.length + 1,
    })
  }
  await db.insert(rollupDue).values({ channelId, fromAt: from, toAt: to })
  for (let start = 0; start < rows.length; start += 500)
    await db.insert(reading).values(rows.slice(start, start + 500))
}

/** Three even thermocouples and one whose insulation slips six hours ago. */
async function soak() {
  for (const [index, channelId] of channels.entries()) {
    await fill(channelId, HEATING, MORNING, (at) => {
      const set = Math.min(150, 20 + ((at - HEATING.getTime()) / HOUR) * 10)
      return index === 2 && at >= MORNING.getTime() - 6 * HOUR ? set - 24 : set
    })
  }
  await fill(crossChannel, HEATING, MORNING, () => 2e-4)
}

describe('a bake under way', () => {
  it('shows day, spread, worst point and the end of the soak', async () => {
    await soak()
    const run = await readBakeRunPage(db, 'SG-05', MORNING, null)
    expect(run.bake.phase).toBe('soak')
    expect(run.day).toEqual({ day: 2, of: 7 })
    expect(run.terms?.fromSite).toBe(true)
    expect(run.spread?.celsius).toBeCloseTo(24, 6)
    expect(run.worst[0]?.tag).toBe('TH-05-03')
    expect(run.end).toMatchObject({ kind: 'at', at: SOAK.getTime() + 168 * HOUR })
    expect(run.advice.map(({ kind }) => kind)).toContain('spread')
    expect(run.pressurePa).toBeCloseTo(2e-4, 9)
    expect(run.afterwards).toBeNull()
  })

  it('says which thermocouples are silent and does not count them', async () => {
    await soak()
    await db.delete(reading).where(eq(reading.channelId, channels[3] ?? 0))
    const run = await readBakeRunPage(db, 'SG-05', MORNING, null)
    expect(run.points.map(({ state }) => state)).toEqual(['fresh', 'fresh', 'fresh', 'silent'])
    expect(run.spread?.counted).toBe(3)
  })

  it('with no reading at all shows that nobody sees the tube', async () => {
    const run = await readBakeRunPage(db, 'SG-05', MORNING, null)
    expect(run.spread).toBeNull()
    expect(run.rateKH).toBeNull()
    expect(run.advice[0]).toMatchObject({ kind: 'blind', level: 'hold' })
  })

  it('of a segment that was never heated there is none', async () => {
    await createSegment(db, { tag: 'SG-01', lineId: segment.lineId })
    await expect(readBakeRunPage(db, 'SG-01', MORNING, null)).rejects.toMatchObject({ code: 'not-found' })
    await expect(readBakeRunPage(db, 'SG-05', MORNING, 5)).rejects.toMatchObject({ code: 'not-found' })
  })
})

describe('deviations', () => {
  const stored = () => db.select().from(bakeDeviation).orderBy(asc(bakeDeviation.id))

  it('are noted from the readings once, however often they are looked for, with when they were learned', async () => {
    await soak()
    expect(await noteOwnDeviations(db, MORNING)).toBe(1)
    const [first] = await stored()
    expect(first).toMatchObject({ kind: 'spread', notedBy: null, endsAt: null, notedAt: MORNING })
    expect(first?.startsAt).toEqual(new Date(MORNING.getTime() - 6 * HOUR))
    await noteOwnDeviations(db, new Date(MORNING.getTime() + HOUR))
    const again = await stored()
    expect(again).toHaveLength(1)
    expect(again[0]?.notedAt).toEqual(MORNING)
  })

  it('that late readings unmake go away, and those of people stay', async () => {
    await soak()
    await noteOwnDeviations(db, MORNING)
    await noteDeviation(db, technician, MORNING, 'SG-05', null, {
      kind: 'other',
      startsAt: SOAK,
      endsAt: null,
      detail: 'A guide banged near 640 m',
    })
    await db
      .update(reading)
      .set({ value: 150 })
      .where(
        and(eq(reading.channelId, channels[2] ?? 0), gte(reading.at, new Date(MORNING.getTime() - 6 * HOUR))),
      )
    await noteOwnDeviations(db, MORNING)
    expect((await stored()).some(({ detail }) => detail.startsWith('Spread'))).toBe(false)
    expect((await stored()).filter(({ notedBy }) => notedBy === technician.personId)).toHaveLength(1)
  })

  it('of people go on record, and need a right', async () => {
    const noted = {
      kind: 'supply' as const,
      startsAt: SOAK,
      endsAt: null,
      detail: 'HX-1 tripped and was reset',
    }
    await noteDeviation(db, technician, MORNING, 'SG-05', null, noted)
    const [entry] = await db.select().from(record)
    expect(entry).toMatchObject({ act: 'bake deviation noted', subjectId: 'SG-05' })
    await expect(noteDeviation(db, manager, MORNING, 'SG-05', null, noted)).rejects.toMatchObject({
      code: 'forbidden',
    })
  })

  it.each([
    ['before the bake', { startsAt: new Date('2026-01-01T00:00:00Z'), endsAt: null }, 'startsAt'],
    ['in the future', { startsAt: new Date(MORNING.getTime() + HOUR), endsAt: null }, 'startsAt'],
    ['with an end before its beginning', { startsAt: SOAK, endsAt: new Date(SOAK.getTime() - 1) }, 'endsAt'],
  ])('%s are refused at the field', async (_, times, field) => {
    await expect(
      noteDeviation(db, technician, MORNING, 'SG-05', null, {
        kind: 'time',
        detail: 'Something odd',
        ...times,
      }),
    ).rejects.toMatchObject({ code: 'bad-input', fields: { [field]: [expect.any(String)] } })
    expect(await stored()).toEqual([])
  })
})

describe('afterwards', () => {
  const OFF = new Date(MORNING.getTime() - 20 * 24 * HOUR)
  const COLD = new Date(OFF.getTime() + 24 * HOUR)

  async function bakedLongAgo(afterPa: number) {
    await db.update(segmentTable).set({ hydrogenQ20: 4e-10 }).where(eq(segmentTable.id, segment.id))
    const other = await createSegment(db, {
      tag: 'SG-10',
      lineId: segment.lineId,
      startM: 750,
      endM: 900,
      innerDiameterM: 0.6,
      lastBakeYear: 2026,
      hydrogenQ20: 4e-10,
    })
    const cross = await createPosition(db, {
      tag: 'HC-10B',
      segmentId: other.id,
      lineId: other.lineId,
      chainageM: 825,
    })
    const source = await createSource(db, { periodSeconds: 600 })
    const channelId = (await createChannel(db, { sourceId: source.id, positionId: cross.id })).id
    const by = engineer.personId
    const heat = new Date(OFF.getTime() - 180 * HOUR)
    await createState(db, {
      segmentId: other.id,
      setBy: by,
      state: 'bake-prep',
      since: new Date(heat.getTime() - 24 * HOUR),
    })
    await createState(db, { segmentId: other.id, setBy: by, state: 'heating', since: heat })
    await createState(db, {
      segmentId: other.id,
      setBy: by,
      state: 'soak',
      since: new Date(heat.getTime() + 13 * HOUR),
    })
    await createState(db, { segmentId: other.id, setBy: by, state: 'cooling', since: OFF })
    await createState(db, { segmentId: other.id, setBy: by, state: 'in-service', since: COLD })
    await fill(
      channelId,
      new Date(heat.getTime() - 60 * HOUR),
      new Date(heat.getTime() - 20 * HOUR),
      () => 4e-7,
    )
    await fill(channelId, COLD, MORNING, () => afterPa)
    return other
  }

  it('tells the improvement, and offers nothing without a pump in the register', async () => {
    await bakedLongAgo(4e-8)
    const run = await readBakeRunPage(db, 'SG-10', MORNING, null)
    expect(run.bake.phase).toBe('over')
    expect(run.afterwards?.improvement).toBeCloseTo(10, 3)
    expect(run.afterwards?.offer).toBeNull()
    expect(run.afterwards?.noOffer).toContain('register lacks')
    expect(run.afterwards?.plan.find(({ name }) => name === 'Soak')).toEqual({
      name: 'Soak',
      planned: '168 h',
      actual: '167.0 h',
    })
    await expect(acceptOutgassing(db, engineer, MORNING, 'SG-10', null, 1)).rejects.toMatchObject({
      code: 'bad-input',
    })
  })

  it('offers hydrogen that explains the reading, and an engineer makes it the figure of the register', async () => {
    const other = await bakedLongAgo(4e-8)
    const [placed] = await db
      .insert(pump)
      .values({ tag: 'PX-10', kind: 'getter-ion', speeds: { H2: 1.2, N2: 0.4, H2O: 0.4 } })
    await db.insert(pumpPlacement).values({
      pumpId: placed.insertId,
      segmentId: other.id,
      offsetM: 75,
      startsAt: new Date('2025-01-01T00:00:00Z'),
      reason: 'for a test',
    })
    const before = await readBakeRunPage(db, 'SG-10', MORNING, null)
    const offer = before.afterwards?.offer
    if (offer === null || offer === undefined) throw new Error('nothing was offered')
    expect(offer).toMatchObject({ field: 'hydrogenQ20', held: 4e-10 })
    // 4e-10 Pa·m/s from 283 m² into 1.2 m³/s is 9.4e-8 Pa of hydrogen, 4.0e-8 Pa as nitrogen at a sensitivity of 0.42.
    expect(offer.fitted / 4e-10).toBeGreaterThan(0.8)
    expect(offer.fitted / 4e-10).toBeLessThan(1.25)
    expect(offer.error / offer.fitted).toBeCloseTo(0.15, 2)

    const revision = before.afterwards?.revision ?? 0
    await expect(acceptOutgassing(db, technician, MORNING, 'SG-10', null, revision)).rejects.toMatchObject({
      code: 'forbidden',
    })
    await acceptOutgassing(db, engineer, MORNING, 'SG-10', null, revision)
    const [row] = await db.select().from(segmentTable).where(eq(segmentTable.id, other.id))
    expect(row?.hydrogenQ20).toBe(Number(offer.fitted.toPrecision(3)))
    expect(row?.hydrogenOrigin).toContain('Measured: HC-10B')
    await expect(acceptOutgassing(db, engineer, MORNING, 'SG-10', null, revision)).rejects.toMatchObject({
      code: 'conflict',
    })
    const after = await readBakeRunPage(db, 'SG-10', MORNING, null)
    expect((after.afterwards?.offer?.fitted ?? 0) / offer.fitted).toBeCloseTo(1, 2)
  })
})
