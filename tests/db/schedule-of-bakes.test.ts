/** A schedule of bakes in the database: made, proposed by the worker, moved by hand, made current, written out. */
import { beforeEach, expect, test } from 'vitest'
import { crew, limitValue, pump, supplySet } from '#app/db/schema/index.ts'
import type { BakePlanContent } from '#app/domain/bake-plan.ts'
import type { LimitKind } from '#app/domain/register.ts'
import { createPlan } from '#app/services/bake-plans.server.ts'
import { actOnSchedule, createSchedule, solveSchedule } from '#app/services/schedule-of-bakes.server.ts'
import {
  readSchedulePage,
  scheduleCalendar,
  scheduleCsv,
} from '#app/services/schedule-of-bakes-page.server.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, type TestUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const { signal } = new AbortController()
let bram: TestUser
let pim: TestUser
let planIds: number[]

const content: BakePlanContent = {
  segments: ['SG-A'],
  startsAt: null,
  prepHours: 24,
  celsius: 150,
  upKH: 10,
  holdPa: 1e-2,
  abortPa: null,
  spreadK: 20,
  soakHours: 100,
  soakEnd: { fallPercent: 10, waterBehind: true },
  cooling: { kind: 'natural' },
  pumpChangeC: 80,
  coldC: 40,
  testHours: 24,
  supply: null,
  cart: null,
  targetPa: 2e-7,
  remarks: '',
}

async function limit(kind: LimitKind, value: number): Promise<void> {
  const startsAt = new Date('2020-01-01T00:00:00Z')
  await db.insert(limitValue).values({
    kind,
    value,
    unit: 'kW',
    startsAt,
    endsAt: null,
    reason: 'Cable',
    setBy: bram.personId,
    recordedAt: startsAt,
  })
}

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { name: 'Bram', roles: ['engineer'] })
  pim = await createUser(db, { name: 'Pim', roles: ['technician'] })
  const geometry = {
    innerDiameterM: 0.6,
    wallM: 0.003,
    insulationM: 0.1,
    insulationWPerMK: 0.045,
    resistance20Ohm: 0.0191,
  }
  const { lineId } = await createSegment(db, { ...geometry, tag: 'SG-A', startM: 0, endM: 150 })
  await createSegment(db, { ...geometry, tag: 'SG-B', startM: 300, endM: 450, lineId })
  await db.insert(supplySet).values({ tag: 'HX-1', maxAmps: 3000, maxVolts: 120, openCircuitVolts: 150 })
  await db.insert(pump).values({ tag: 'MC-A', kind: 'turbomolecular-cart', speeds: { N2: 0.45, H2: 0.4 } })
  await db.insert(crew).values({
    code: 'A',
    name: 'Crew A',
    size: 2,
    roster: {
      worked: [{ days: [1, 2, 3, 4, 5], from: '06:45', to: '19:00' }],
      onCall: { firstMonday: '2026-11-02', everyWeeks: 1 },
    },
  })
  planIds = []
  for (const tag of ['SG-A', 'SG-B']) {
    const plan = { title: `Bake of ${tag}`, content: { ...content, segments: [tag] } }
    planIds.push(await createPlan(db, bram, MORNING, plan))
  }
})

function made(): Promise<number> {
  return createSchedule(db, bram, MORNING, {
    title: 'November',
    fromAt: MORNING,
    days: 30,
    objective: 'earliest-finish',
    planIds,
  })
}

async function shown(id: number) {
  const { shown: found } = await readSchedulePage(db, bram, MORNING, id)
  if (found === null) throw new Error('expected a schedule')
  return found
}

test('the worker places the bakes, a person moves one and is told what breaks, and the sound one becomes current', async () => {
  await limit('power-cap-day', 200)
  await limit('power-cap-night', 260)
  const id = await made()
  await expect(
    actOnSchedule(db, pim, MORNING, { act: 'propose', scheduleId: id, revision: 1 }),
  ).rejects.toThrow(expect.objectContaining({ code: 'forbidden' }))
  await actOnSchedule(db, bram, MORNING, { act: 'propose', scheduleId: id, revision: 1 })
  await solveSchedule(db, id, signal)
  const solved = await shown(id)
  expect(solved.state).toBe('solved')
  expect(solved.outcome?.gap).toBeLessThan(0.2)
  const of = (planId: number | undefined) => solved.placements.find(({ jobId }) => jobId === String(planId))
  const [first, second] = planIds.map(of)
  // One supply set: the second waits until the first gives it back.
  const [sooner = 0, later = 0] = [first?.startH ?? 0, second?.startH ?? 0].sort((a, b) => a - b)
  expect(later - sooner).toBeGreaterThanOrEqual(100 + 13 + 4)
  expect(solved.placements.map(({ supply, cart }) => [supply, cart])).toEqual([
    ['HX-1', 'MC-A'],
    ['HX-1', 'MC-A'],
  ])
  // What the worker does twice is done once.
  await solveSchedule(db, id, signal)
  expect((await shown(id)).revision).toBe(solved.revision)

  const move = (startH: number, revision: number) =>
    actOnSchedule(db, bram, MORNING, {
      act: 'move',
      scheduleId: id,
      revision,
      planId: planIds[1] ?? 0,
      startsAt: new Date(solved.problem.fromMs + startH * 3_600_000),
      supply: 'HX-1',
      cart: 'MC-A',
      pinned: false,
    })
  expect(await move((first?.startH ?? 0) + 5, solved.revision)).toMatch(/SG-B moved; .* break/)
  await expect(move(0, solved.revision)).rejects.toThrow(expect.objectContaining({ code: 'conflict' }))
  const current = (revision: number) =>
    actOnSchedule(db, bram, MORNING, { act: 'make-current', scheduleId: id, revision })
  await expect(current(solved.revision + 1)).rejects.toThrow('it breaks')
  expect(await move(second?.startH ?? 0, solved.revision + 1)).toBe('SG-B moved; nothing breaks.')
  await current(solved.revision + 2)
  expect((await shown(id)).state).toBe('current')

  expect((await scheduleCsv(db, id)).split('\r\n')).toHaveLength(4)
  const calendar = await scheduleCalendar(db, id, MORNING)
  expect(calendar.match(/BEGIN:VEVENT/g)).toHaveLength(4)
  expect(calendar).toContain('SUMMARY:Hot: SG-A')
})

test('without a power cap the schedule is shown, and says which limit is missing and who sets it', async () => {
  const byDay =
    'The register has no limit “Power cap for bakes, 06:00 to 22:00”, so no bake can be given power.'
  const byNight = 'The register has no limit “Power cap for bakes, 22:00 to 06:00”'
  const id = await made()
  await actOnSchedule(db, bram, MORNING, { act: 'propose', scheduleId: id, revision: 1 })
  await solveSchedule(db, id, signal)
  const failed = await shown(id)
  expect(failed.state).toBe('failed')
  expect(failed.fault).toContain(byDay)
  expect(failed.fault).toContain(byNight)
  expect(failed.placements.map(({ startH }) => startH)).toEqual([null, null])
  expect(failed.problem.rules).toMatchObject({ dayKW: null, nightKW: null })
  await limit('power-cap-night', 260)
  const place = { planId: planIds[0] ?? 0, supply: 'HX-1', cart: 'MC-A', pinned: false }
  const startsAt = new Date(failed.problem.fromMs + 200 * 3_600_000)
  const move = { act: 'move', scheduleId: id, revision: failed.revision, startsAt, ...place } as const
  expect(await actOnSchedule(db, bram, MORNING, move)).toContain('break')
  const { revision, trouble } = await shown(id)
  const reasons = trouble.find(({ jobId }) => jobId === String(planIds[0]))?.reasons.join(' ')
  expect(reasons).toContain(byDay)
  expect(reasons).not.toContain(byNight)
  await expect(
    actOnSchedule(db, bram, MORNING, { act: 'make-current', scheduleId: id, revision }),
  ).rejects.toThrow('it breaks')
})
