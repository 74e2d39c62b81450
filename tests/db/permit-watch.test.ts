import { eq } from 'drizzle-orm'
import { beforeEach, expect, onTestFinished, test, vi } from 'vitest'
import { findPermit, listPermitActs } from '#app/db/queries/permits.server.ts'
import { listSafetyEvents } from '#app/db/queries/safety-events.server.ts'
import { type permit, permitAct } from '#app/db/schema/index.ts'
import { JOB_PAYLOADS } from '#app/domain/job-kinds.ts'
import { advanceClock } from '#app/services/clock.server.ts'
import type { JobHandlers } from '#app/services/jobs.server.ts'
import { carryOutDue } from '#app/services/permit-watch.server.ts'
import { actOnPermit } from '#app/services/permits.server.ts'
import { runWorker } from '#app/worker/loop.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createClock,
  createSegment,
  createSite,
  createUser,
  type TestUser,
} from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'
import { createSupply, type TestSupply } from '#tests/support/supply.ts'

const db = freshDatabase()
const other = secondConnection()
/** End of the validity of every live permit here, 20:00 at +01:00. */
const END = after(MORNING, 12 * 3600)

let bram: TestUser
let supply: TestSupply
beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  await createSegment(db, { tag: 'SG-T1' })
  supply = await createSupply(db)
})

const make = (state: typeof permit.$inferInsert.state, more: Partial<typeof permit.$inferInsert> = {}) =>
  createPermitRow(db, { state, createdBy: bram.personId, ...more })

async function lastAct(number: string) {
  const found = await findPermit(db, number)
  return { permit: found, act: (await listPermitActs(db, found?.id ?? 0)).at(-1) }
}

test('a permit is live a millisecond before its end and expired at it', async () => {
  const { number } = await make('issued')
  expect(await carryOutDue(db, new Date(END.getTime() - 1))).toEqual({ done: 0, nextAt: END })
  expect((await findPermit(db, number))?.state).toBe('issued')
  expect(await carryOutDue(db, END)).toEqual({ done: 1, nextAt: null })
  expect((await findPermit(db, number))?.state).toBe('expired')
})

test('noticed after a night off, it has expired when it was due, and both times are kept', async () => {
  const { number } = await make('suspended')
  const noticed = after(END, 11 * 3600)
  await carryOutDue(db, noticed)
  const { permit: row, act } = await lastAct(number)
  expect(act).toMatchObject({
    act: 'expire',
    fromState: 'suspended',
    toState: 'expired',
    at: END,
    recordedAt: noticed,
    personId: null,
  })
  expect(row).toMatchObject({ state: 'expired', currentUntil: END })
})

test('an approval nobody took up lapses two hours after the beginning of its window', async () => {
  const { number } = await make('approved')
  const due = after(MORNING, 3600)
  expect(await carryOutDue(db, MORNING)).toEqual({ done: 0, nextAt: due })
  await carryOutDue(db, after(due, 86_400))
  const { act, permit: row } = await lastAct(number)
  expect(act).toMatchObject({ act: 'lapse', at: due })
  expect(row).toMatchObject({ state: 'lapsed', endedAt: due })
})

test('two workers at once expire it once', async () => {
  const numbers = await Promise.all([make('issued'), make('issued'), make('suspended')])
  const done = await Promise.all([carryOutDue(db, END), carryOutDue(other, END)])
  expect(done.reduce((sum, each) => sum + each.done, 0)).toBe(3)
  for (const { id } of numbers) {
    expect(await db.select().from(permitAct).where(eq(permitAct.permitId, id))).toHaveLength(1)
  }
})

test('what fell due does not keep others from being seen to', async () => {
  await make('draft')
  const first = await make('issued')
  const second = await make('issued', { currentUntil: after(END, 60) })
  expect(await carryOutDue(db, END)).toEqual({ done: 1, nextAt: after(END, 60) })
  expect((await findPermit(db, first.number))?.state).toBe('expired')
  expect((await findPermit(db, second.number))?.state).toBe('issued')
})

test('an act on a permit past its time finds it expired, whether or not the worker was there', async () => {
  const { number } = await make('issued', { holderId: bram.personId })
  await expect(
    actOnPermit(db, bram, END, number, {
      act: 'revalidate',
      revision: 1,
      reason: '',
      password: '',
      detail: {},
    }),
  ).rejects.toMatchObject({ code: 'conflict' })
  expect(await lastAct(number)).toMatchObject({ act: { act: 'expire', at: END } })
})

test('heat at the end of a missed revalidation is an event from that second on', async () => {
  const { number } = await make('issued')
  await supply.posts(after(END, -7200), 'off')
  await supply.posts(after(END, -3600), { volts: 23.4, amps: 1083 })
  await supply.posts(after(END, -60), { volts: 23.4, amps: 1083 })
  await carryOutDue(db, after(END, 5))
  const events = await listSafetyEvents(db, {})
  expect(events.map(({ kind, startedAt, permit: of }) => ({ kind, startedAt, of }))).toEqual(
    expect.arrayContaining([
      { kind: 'expired-while-heated', startedAt: END, of: number },
      { kind: 'revalidation-missed', startedAt: END, of: number },
    ]),
  )
  expect(events).toHaveLength(2)
})

const quiet = async () => undefined
const quietHandlers = Object.fromEntries(
  Object.keys(JOB_PAYLOADS).map((kind) => [kind, quiet]),
) as unknown as JobHandlers

function startWorker() {
  const stop = new AbortController()
  const running = runWorker({ signal: stop.signal, db: other, handlers: quietHandlers })
  onTestFinished(async () => {
    stop.abort()
    await running
  })
}

test('the worker ends a permit in time, even on a busy machine, and another that the demo clock jumps over as of its time', async () => {
  const juniper = await createUser(db, { roles: ['administrator'], name: 'Juniper' })
  const soon = new Date(MORNING.getTime() + 2_500)
  const near = await make('issued', { currentUntil: soon })
  const far = await make('issued')
  await createClock(db, { baseMachineAt: new Date() })
  startWorker()
  await vi.waitFor(async () => expect((await findPermit(db, near.number))?.state).toBe('expired'), {
    timeout: 10_000,
    interval: 50,
  })
  const { act } = await lastAct(near.number)
  expect(act?.at).toEqual(soon)
  expect(act?.recordedAt.getTime()).toBeGreaterThanOrEqual(soon.getTime())
  expect((act?.recordedAt.getTime() ?? 0) - soon.getTime()).toBeLessThan(2_000)
  expect((await findPermit(db, far.number))?.state).toBe('issued')

  await advanceClock(db, juniper, after(END, 3600), 'to see the evening')
  await vi.waitFor(async () => expect((await findPermit(db, far.number))?.state).toBe('expired'), {
    timeout: 10_000,
    interval: 50,
  })
  const jumped = await lastAct(far.number)
  expect(jumped.act?.at).toEqual(END)
  expect(jumped.act?.recordedAt.getTime()).toBeGreaterThanOrEqual(after(END, 3600).getTime())
})
