import { eq } from 'drizzle-orm'
import { expect, onTestFinished, test, vi } from 'vitest'
import { connect } from '#app/db/client.server.ts'
import { job, productClock, scheduleOwner, session } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { JOB_PAYLOADS, SCHEDULED_TASKS } from '#app/domain/job-kinds.ts'
import { drainJobs, enqueue, type JobHandlers, purgeJobs } from '#app/services/jobs.server.ts'
import { runSchedule } from '#app/services/schedule.server.ts'
import { JOB_HANDLERS } from '#app/worker/jobs/handlers.server.ts'
import { runWorker } from '#app/worker/loop.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createClock, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()

/** Starts a worker that a failing test stops too. */
function startWorker(handlers: Partial<JobHandlers> = {}) {
  const stop = new AbortController()
  const quiet = async () => undefined
  const running = runWorker({
    signal: stop.signal,
    db,
    handlers: {
      ...(Object.fromEntries(
        Object.keys(JOB_PAYLOADS).map((kind) => [kind, quiet]),
      ) as unknown as JobHandlers),
      ...handlers,
    },
  })
  onTestFinished(async () => {
    stop.abort()
    await running
  })
  return { stop: () => stop.abort(), running }
}

test('the worker does what the schedule asks for, keeps the clock and hands the schedule on when it stops', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  const worker = startWorker()
  await vi.waitFor(
    async () => {
      const rows = await db.select({ state: job.state }).from(job)
      expect(rows.map(({ state }) => state)).toEqual(SCHEDULED_TASKS.map(() => 'done'))
    },
    { timeout: 10_000 },
  )
  worker.stop()
  await worker.running
  const [clock] = await db.select().from(productClock)
  expect(clock?.seenAt.getTime()).toBeGreaterThan(MORNING.getTime())
  const [owner] = await db.select().from(scheduleOwner)
  expect(owner?.owner).toBe('')
})

test('a worker that starts after a night off goes on from the time last seen', async () => {
  await createClock(db, { baseMachineAt: after(new Date(), -43_200) })
  const worker = startWorker()
  await vi.waitFor(async () => expect(await db.select().from(job)).toHaveLength(SCHEDULED_TASKS.length), {
    timeout: 10_000,
  })
  worker.stop()
  await worker.running
  const [clock] = await db.select().from(productClock)
  expect(clock?.seenAt.getTime()).toBeLessThan(after(MORNING, 60).getTime())
})

test('told to stop, the worker tells the job at hand, waits for it and begins no other', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  const begun: string[] = []
  let ended = false
  const worker = startWorker({
    'purge-sessions': async ({ signal }) => {
      begun.push('purge-sessions')
      worker.stop()
      await vi.waitFor(() => expect(signal.aborted).toBe(true))
      await new Promise((resolve) => setTimeout(resolve, 200))
      ended = true
    },
  })
  const ask = () => tx(db, (inside) => enqueue(inside, { kind: 'purge-sessions', payload: {} }))
  await ask()
  await ask()
  await worker.running
  expect(ended).toBe(true)
  expect(begun).toHaveLength(1)
  const states = await db.select({ state: job.state }).from(job).where(eq(job.attempts, 1))
  expect(states.filter(({ state }) => state === 'running')).toEqual([])
})

test('a job that throws does not end the worker', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  startWorker({
    'partition-readings': async () => {
      throw new Error('no room')
    },
  })
  await vi.waitFor(
    async () => {
      const rows = await db.select({ kind: job.kind, state: job.state, error: job.lastError }).from(job)
      const byKind = new Map(rows.map((row) => [row.kind, row]))
      expect(byKind.get('partition-readings')?.error).toContain('no room')
      expect(byKind.get('purge-leftovers')?.state).toBe('done')
    },
    { timeout: 10_000 },
  )
})

test('a worker whose database is away keeps trying and still stops at once', async () => {
  const { db: nowhere, pool } = connect('mysql://eb:eb@127.0.0.1:1/ebbline')
  const stop = new AbortController()
  const running = runWorker({ signal: stop.signal, db: nowhere })
  const settled = vi.fn()
  void running.finally(settled)
  await new Promise((resolve) => setTimeout(resolve, 300))
  expect(settled).not.toHaveBeenCalled()
  const begun = performance.now()
  stop.abort()
  await running
  expect(performance.now() - begun).toBeLessThan(2_000)
  await pool.promise().end()
})

test('the real handlers do every job of the schedule', async () => {
  await createClock(db, { baseMachineAt: new Date() })
  const user = await createUser(db)
  const machine = new Date()
  const row = { personId: user.personId, createdAt: machine, userAgent: '' }
  await db.insert(session).values([
    { ...row, tokenHash: 'live', lastSeenAt: machine, expiresAt: after(machine, 3600) },
    { ...row, tokenHash: 'over', lastSeenAt: machine, expiresAt: after(machine, -1) },
    { ...row, tokenHash: 'idle', lastSeenAt: after(machine, -13 * 3600), expiresAt: after(machine, 3600) },
  ])
  await runSchedule(db, 'test', MORNING, { machine })
  expect(await drainJobs(db, JOB_HANDLERS)).toEqual({
    done: SCHEDULED_TASKS.length,
    again: 0,
    failed: 0,
    lost: 0,
  })
  const left = await db.select({ tokenHash: session.tokenHash }).from(session)
  expect(left).toEqual([{ tokenHash: 'live' }])
})

test('finished jobs are deleted after a week, failed ones after ninety days, others never', async () => {
  const machine = new Date()
  const days = (count: number) => after(machine, -count * 86_400)
  const row = { kind: 'purge-sessions', payload: {}, runAt: days(400), createdAt: days(400) }
  await db.insert(job).values([
    { ...row, state: 'done', finishedAt: days(6), dedupeKey: 'done 6' },
    { ...row, state: 'done', finishedAt: days(8), dedupeKey: 'done 8' },
    { ...row, state: 'failed', finishedAt: days(89), dedupeKey: 'failed 89' },
    { ...row, state: 'failed', finishedAt: days(91), dedupeKey: 'failed 91' },
    { ...row, state: 'waiting', dedupeKey: 'waiting' },
    { ...row, state: 'running', dedupeKey: 'running' },
  ])
  expect(await purgeJobs(db, machine)).toBe(2)
  const left = await db.select({ key: job.dedupeKey }).from(job).orderBy(job.id)
  expect(left.map(({ key }) => key)).toEqual(['done 6', 'failed 89', 'waiting', 'running'])
})
