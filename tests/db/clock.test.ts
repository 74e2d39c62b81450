import { setTimeout as sleep } from 'node:timers/promises'
import { afterEach, expect, test, vi } from 'vitest'
import { productClock, record } from '#app/db/schema/index.ts'
import {
  advanceClock,
  ensureClock,
  keepClock,
  productNow,
  readClock,
  resumeClock,
} from '#app/services/clock.server.ts'
import { keepClockGoing } from '#app/services/clock-keeping.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createClock, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
// Every handle caches the clock for a second: a handle of its own reads what stands in the table now.
const other = secondConnection()

afterEach(() => {
  vi.useRealTimers()
})

/** Slack for the time that passes while a test runs on a busy machine. */
const SLACK_MS = 20_000

function expectNear(actual: Date | undefined, expected: Date): void {
  expect(actual?.getTime()).toBeGreaterThanOrEqual(expected.getTime())
  expect(actual?.getTime()).toBeLessThan(expected.getTime() + SLACK_MS)
}

async function row() {
  const [found] = await db.select().from(productClock)
  if (found === undefined) throw new Error('expected the clock to be set up')
  return found
}

test('without a clock the product says how to set one up', async () => {
  await expect(readClock(secondConnection())).rejects.toMatchObject({
    code: 'unavailable',
    message: expect.stringContaining('npm start'),
  })
})

test('a demo clock runs at the pace of real time from where it was set', async () => {
  const twoHoursAgo = after(new Date(), -7200)
  await createClock(db, { baseMachineAt: twoHoursAgo })
  const { now, demo } = await readClock(other)
  expect(demo).toBe(true)
  expectNear(now, after(MORNING, 7200))
})

test("a real site's clock is the machine's, whatever the row says", async () => {
  const handle = secondConnection()
  await createClock(db, { demo: false, baseMachineAt: new Date(0) })
  const machine = new Date()
  const { now, demo } = await readClock(handle)
  expect(demo).toBe(false)
  expectNear(now, machine)
})

test('setting the clock up a second time leaves it as it is', async () => {
  await ensureClock(db, { demo: true, startAt: MORNING })
  await ensureClock(db, { demo: false, startAt: after(MORNING, 999) })
  expect(await row()).toMatchObject({ demo: true, baseAt: MORNING, seenAt: MORNING })
})

test('after a stop the demo clock goes on from where it was last seen, not from the time of day', async () => {
  await createClock(db, { baseMachineAt: after(new Date(), -3600) })
  await keepClock(db)
  const { seenAt } = await row()
  expectNear(seenAt, after(MORNING, 3600))
  // The product is off for a night: the row's machine time falls behind.
  await db.update(productClock).set({ baseMachineAt: after(new Date(), -50_000) })
  expect(await resumeClock(db)).toBe(true)
  expectNear(await productNow(db), seenAt)
})

test('a worker that comes back while the product runs does not set the clock back', async () => {
  await createClock(db, { baseMachineAt: after(new Date(), -3600) })
  await db.update(productClock).set({ seenAt: after(MORNING, 3595) })
  const before = await row()
  expect(await resumeClock(db)).toBe(false)
  expect(await row()).toEqual(before)
})

test('a worker gone for a minute does not set the clock back when it returns: the web server noted the time', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  const web = new AbortController()
  const kept = keepClockGoing(db, web.signal)
  try {
    // A minute passes for the product, and the web server comes round to its next note.
    vi.useFakeTimers({ toFake: ['Date'], now: Date.now() + 60_000 })
    while ((await row()).seenAt < after(MORNING, 60)) await sleep(100)
    const before = await row()
    expect(await resumeClock(other)).toBe(false)
    expect((await row()).baseAt).toEqual(before.baseAt)
    expectNear(await productNow(other), after(MORNING, 60))
  } finally {
    web.abort()
    await kept
  }
})

test("a real site's clock has nothing to resume", async () => {
  await createClock(db, { demo: false, baseMachineAt: new Date(0) })
  expect(await resumeClock(db)).toBe(false)
})

test('keeping the clock never moves it back', async () => {
  const later = after(MORNING, 86_400)
  await createClock(db, { baseMachineAt: new Date() })
  await db.update(productClock).set({ seenAt: later })
  await keepClock(db)
  expect((await row()).seenAt).toEqual(later)
})

test('the administrator moves the demo clock forward, and the record tells who, from when and why', async () => {
  const handle = secondConnection()
  await createClock(db, { baseMachineAt: new Date() })
  const juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper' })
  const to = after(MORNING, 3 * 86_400)
  await advanceClock(db, juniper, to, 'to see the night file of Thursday')
  expectNear(await productNow(db), to)
  expectNear(await productNow(handle), to)
  expect((await row()).seenAt).toEqual(to)
  const lines = await db.select().from(record)
  expect(lines).toHaveLength(1)
  expect(lines[0]).toMatchObject({
    personId: juniper.personId,
    act: 'demo clock moved forward',
    after: { now: to.toISOString() },
    reason: 'to see the night file of Thursday',
  })
  expectNear(lines[0]?.at, MORNING)
})

test.each(['technician', 'engineer', 'safety-officer', 'manager', 'contributor'] as const)(
  'a %s cannot move the clock',
  async (role) => {
    await createClock(db, { baseMachineAt: new Date() })
    const actor = await createUser(db, { roles: [role] })
    const before = await row()
    await expect(advanceClock(db, actor, after(MORNING, 86_400), 'no')).rejects.toMatchObject({
      code: 'forbidden',
      status: 403,
      message: expect.stringContaining('Administrator'),
    })
    expect(await row()).toEqual(before)
    expect(await db.select().from(record)).toEqual([])
  },
)

test.each([
  ['back', -60, 'only moves forward'],
  ['by more than 400 days', 401 * 86_400, 'At most 400 days'],
])('the clock cannot be moved %s', async (_what, seconds, message) => {
  await createClock(db, { baseMachineAt: new Date() })
  const actor = await createUser(db, { roles: ['administrator'] })
  await expect(advanceClock(db, actor, after(MORNING, seconds), 'x')).rejects.toMatchObject({
    code: 'bad-input',
    fields: { to: [expect.stringContaining(message)] },
  })
  expect((await row()).baseAt).toEqual(MORNING)
})

test("a real site's clock cannot be moved, not even by the administrator", async () => {
  await createClock(db, { demo: false, baseMachineAt: new Date() })
  const actor = await createUser(db, { roles: ['administrator'] })
  await expect(advanceClock(db, actor, after(new Date(), 60), 'x')).rejects.toMatchObject({
    code: 'conflict',
  })
})

test('of two moves at once both count from the time they find: the clock ends at the later one or refuses', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  const actor = await createUser(db, { roles: ['administrator'] })
  const [near, far] = [after(MORNING, 86_400), after(MORNING, 2 * 86_400)]
  const results = await Promise.allSettled([
    advanceClock(db, actor, far, 'far'),
    advanceClock(other, actor, near, 'near'),
  ])
  expect(results[0]?.status).toBe('fulfilled')
  expect((await row()).baseAt).toEqual(far)
})
