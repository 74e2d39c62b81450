/** Thresholds of the site through the database, and what they mean for a permit's cautions. */
import { beforeEach, describe, expect, test } from 'vitest'
import { findPermit, insertPermit, type PermitRow } from '#app/db/queries/permits.server.ts'
import { heaterCircuit, supplySet, valve } from '#app/db/schema/index.ts'
import { THRESHOLD_KEYS, THRESHOLDS, type ThresholdKey } from '#app/domain/hazard-thresholds.ts'
import { emptyPermitContent, type PermitContent } from '#app/domain/permit-content.ts'
import { readHazards, unadoptedThresholds } from '#app/services/permit-hazards.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import {
  adoptedValue,
  adoptThreshold,
  endThreshold,
  readThresholdsPage,
  setBayVolume,
} from '#app/services/thresholds.server.ts'
import { after as later, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, PASSWORD, type TestUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const DAY = 86_400
const REVIEW = later(MORNING, 300 * DAY)

let ione: TestUser
let rafe: TestUser
let bram: TestUser
beforeEach(async () => {
  await createSite(db)
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  rafe = await createUser(db, { roles: ['safety-officer'], name: 'Rafe' })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
})

function adopt(
  key: ThresholdKey,
  value: number,
  options: {
    seen?: number
    actor?: TestUser
    handle?: typeof db
    now?: Date
    password?: string
    reviewAt?: Date
  } = {},
): Promise<number> {
  const {
    seen = 0,
    actor = ione,
    handle = db,
    now = MORNING,
    password = PASSWORD,
    reviewAt = REVIEW,
  } = options
  return adoptThreshold(handle, actor, now, {
    act: 'adopt',
    key,
    seen,
    value,
    source: 'Site rule 7',
    edition: '2025',
    reason: 'as the trade does it here',
    reviewAt,
    password,
  })
}

const end = (key: ThresholdKey, seen: number, now = MORNING) =>
  endThreshold(db, ione, now, {
    act: 'end',
    key,
    seen,
    reason: 'it is being worked out anew',
    password: PASSWORD,
  })

async function permitWith(own: Partial<PermitContent>): Promise<PermitRow> {
  await insertPermit(
    db,
    {
      number: 'HSP-2026-901',
      shortCode: 'ABCDEF',
      state: 'draft',
      createdBy: bram.personId,
      createdAt: MORNING,
    },
    { content: { ...emptyPermitContent(), ...own }, reason: '' },
  )
  return (await findPermit(db, 'HSP-2026-901')) as PermitRow
}

describe('adopting', () => {
  test('a value holds from its adoption until its review date, signed and on the record', async () => {
    const id = await adopt('touch-limit', 40)
    expect(await adoptedValue(db, 'touch-limit', MORNING)).toBe(40)
    expect(await adoptedValue(db, 'touch-limit', later(REVIEW, -1))).toBe(40)
    expect(await adoptedValue(db, 'touch-limit', REVIEW)).toBeNull()
    expect(await adoptedValue(db, 'oxygen-low', MORNING)).toBeNull()
    const page = await readThresholdsPage(db, bram)
    expect(page.open).toEqual([
      {
        id,
        key: 'touch-limit',
        value: 40,
        unit: '°C',
        source: 'Site rule 7',
        edition: '2025',
        reason: 'as the trade does it here',
        by: 'Ione',
        at: MORNING,
        reviewAt: REVIEW,
        endedAt: null,
        endedBy: null,
      },
    ])
    const [line] = await listRecord(db, { subjectKind: 'threshold', subjectId: 'touch-limit', limit: 5 })
    expect(line).toMatchObject({ act: 'threshold adopted', person: 'Ione', signed: true, before: null })
  })

  test('a later one takes its place and the earlier stays in the history', async () => {
    const first = await adopt('touch-limit', 40)
    const second = await adopt('touch-limit', 38, { seen: first, actor: rafe, now: later(MORNING, 60) })
    const { open, history } = await readThresholdsPage(db, ione)
    expect(open.map(({ id }) => id)).toEqual([second])
    expect(history.map(({ id, value, endedBy }) => ({ id, value, endedBy }))).toEqual([
      { id: second, value: 38, endedBy: null },
      { id: first, value: 40, endedBy: 'Rafe' },
    ])
    expect(await adoptedValue(db, 'touch-limit', later(MORNING, 60))).toBe(38)
  })

  test('ending it leaves nothing set, and says by whom', async () => {
    const id = await adopt('touch-limit', 40)
    await end('touch-limit', id, later(MORNING, 60))
    expect(await adoptedValue(db, 'touch-limit', later(MORNING, 60))).toBeNull()
    expect((await readThresholdsPage(db, ione)).history[0]).toMatchObject({ endedBy: 'Ione' })
    const [line] = await listRecord(db, { subjectKind: 'threshold', subjectId: 'touch-limit', limit: 1 })
    expect(line).toMatchObject({
      act: 'threshold ended',
      reason: 'it is being worked out anew',
      signed: true,
    })
    await expect(end('touch-limit', 0)).rejects.toMatchObject({ code: 'not-acceptable-now' })
  })

  test('only a safety officer may, with their own password, and for a day to come', async () => {
    await expect(adopt('touch-limit', 40, { actor: bram })).rejects.toMatchObject({ code: 'forbidden' })
    await expect(adopt('touch-limit', 40, { password: 'not mine' })).rejects.toMatchObject({
      code: 'signature-refused',
    })
    await expect(adopt('touch-limit', 40, { reviewAt: MORNING })).rejects.toMatchObject({
      fields: { reviewAt: [expect.stringContaining('past')] },
    })
    await expect(adopt('touch-limit', 40, { reviewAt: later(MORNING, 2000 * DAY) })).rejects.toMatchObject({
      fields: { reviewAt: [expect.stringContaining('five years')] },
    })
    expect((await readThresholdsPage(db, ione)).history).toEqual([])
  })

  test('a page that is old changes nothing', async () => {
    const first = await adopt('touch-limit', 40)
    await expect(adopt('touch-limit', 45)).rejects.toMatchObject({ code: 'conflict' })
    await expect(end('touch-limit', first + 1)).rejects.toMatchObject({ code: 'conflict' })
    expect(await adoptedValue(db, 'touch-limit', MORNING)).toBe(40)
  })

  test('of two officers at once one adopts and the other is told', async () => {
    for (const key of ['touch-limit', 'oxygen-low', 'check-in'] as const) {
      const value = THRESHOLDS[key].least
      const seen = key === 'check-in' ? await adopt(key, value) : 0
      const outcomes = await Promise.allSettled([
        adopt(key, value, { seen }),
        adopt(key, value + 0.5, { seen, actor: rafe, handle: other }),
      ])
      const refused = outcomes.filter((one) => one.status === 'rejected')
      expect(refused).toHaveLength(1)
      expect(refused[0]?.reason).toMatchObject({ code: 'conflict' })
      const { open } = await readThresholdsPage(db, ione)
      expect(open.filter((one) => one.key === key)).toHaveLength(1)
    }
  })
})

describe('cautions of a permit', () => {
  async function hotSegment(): Promise<string> {
    const { id, tag, lineId } = await createSegment(db, {
      startM: 600,
      endM: 750,
      innerDiameterM: 0.6,
      wallM: 0.003,
      bellowsCount: 10,
      bellowsRatedMm: 45,
      insulationM: 0.1,
      insulationWPerMK: 0.045,
      resistance20Ohm: 0.019,
    })
    await db.insert(supplySet).values({ tag: 'HX-9', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
    await db.insert(valve).values({
      tag: 'GV-91',
      kind: 'gate',
      lineId,
      chainageM: 600,
      eastSegmentId: id,
      seal: 'metal seat, elastomer bonnet',
      limitC: 120,
      partRiseShare: 0.7,
      normalPosition: 'open',
    })
    await db.insert(heaterCircuit).values([
      { tag: 'DC-91', kind: 'direct-current', segmentId: id, earthing: 'middle anchor' },
      { tag: 'BH-91', kind: 'blanket', segmentId: id, volts: 230, powerW: 6000 },
    ])
    return tag
  }

  test('read the plant, and change with the terms', async () => {
    const tag = await hotSegment()
    const permit = await permitWith({ segments: [tag], supply: 'HX-9', maxCelsius: 150, rampKH: 10 })
    const text = JSON.stringify(await readHazards(db, permit, MORNING)).replaceAll('\u00a0', ' ')
    // Site air of the tests is 20 °C: 17.3e-6 × 130 × 150 = 337 mm; bonnet 20 + 0.7 × 130 = 111 °C; cover 28.6 kN.
    for (const figure of [
      '337 mm',
      '111 °C of 120 °C',
      '28.6 kN',
      '75 V',
      '20.3 %',
      'middle anchor',
      '230 V',
    ])
      expect(text).toContain(figure)
    const cooler = { ...permit, content: { ...permit.content, maxCelsius: 85 } }
    const again = JSON.stringify(await readHazards(db, cooler, MORNING)).replaceAll('\u00a0', ' ')
    // 17.3e-6 × 65 × 150 = 169 mm.
    expect(again).toContain('169 mm')
    expect(again).not.toContain('337 mm')
  })

  test('stand in the way until every value they rest on is adopted, and again once one lapses', async () => {
    const tag = await hotSegment()
    const permit = await permitWith({ segments: [tag], supply: 'HX-9', maxCelsius: 150, rampKH: 10 })
    const missing = async (now = MORNING) =>
      [...new Set((await unadoptedThresholds(db, permit, now)).map(({ threshold }) => threshold))].sort()
    expect(await missing()).toEqual([...THRESHOLD_KEYS].sort())
    for (const key of THRESHOLD_KEYS) {
      const { least, most } = THRESHOLDS[key]
      const reviewAt = key === 'shock-volts' ? later(MORNING, DAY) : REVIEW
      await adopt(key, (least + most) / 2, { reviewAt })
    }
    expect(await missing()).toEqual([])
    expect(await missing(later(MORNING, DAY))).toEqual(['shock-volts'])
    const [lapsed] = await unadoptedThresholds(db, permit, later(MORNING, DAY))
    expect(lapsed?.text).toContain('not set by site')
    expect(lapsed?.text).toContain('counts no more')
  })

  test('say where the size of the bay comes from, and follow it', async () => {
    const tag = await hotSegment()
    const permit = await permitWith({ segments: [tag] })
    const oxygen = async () => {
      const views = await readHazards(db, permit, MORNING)
      const fact = views.find(({ key }) => key === 'oxygen')?.facts[0]
      return `${fact?.value} ${fact?.how}`.replaceAll('\u00a0', ' ')
    }
    expect(await oxygen()).toMatch(/^20\.3 % .*no size set by the site/)
    await setBayVolume(db, ione, MORNING, {
      act: 'bay-volume',
      seen: 0,
      volumeM3: 300,
      reason: 'measured between two doors',
      password: PASSWORD,
    })
    // By hand: 20.9 × e^(−42.41/300) = 18.14.
    expect(await oxygen()).toMatch(/^18\.1 % .*size set by the site/)
    await expect(
      setBayVolume(db, rafe, MORNING, {
        act: 'bay-volume',
        seen: 0,
        volumeM3: 400,
        reason: 'measured between two doors',
        password: PASSWORD,
      }),
    ).rejects.toMatchObject({ code: 'conflict' })
  })
})
