import { eq } from 'drizzle-orm'
import { expect, test, vi } from 'vitest'
import { job } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { JOB_PAYLOADS } from '#app/domain/job-kinds.ts'
import {
  type ClaimedJob,
  claimJob,
  completeJob,
  drainJobs,
  enqueue,
  failJob,
  type JobHandlers,
  LEASE_MS,
  renewJob,
  runJob,
} from '#app/services/jobs.server.ts'
import { after } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'

const db = freshDatabase()
const other = secondConnection()

/** Machine time of these tests: given to every call, so that none waits. */
const T0 = new Date('2026-11-09T07:00:00.000Z')

function ask(options: { runAt?: Date; uniqueKey?: string; maxAttempts?: number } = {}): Promise<number> {
  return tx(db, (inside) => enqueue(inside, { kind: 'purge-sessions', payload: {}, runAt: T0, ...options }))
}

/** Handlers of which only purge-sessions is expected to be called. */
function handlers(work: JobHandlers['purge-sessions']): JobHandlers {
  const unexpected = () => Promise.reject(new Error('not expected in this test'))
  const none = Object.fromEntries(Object.keys(JOB_PAYLOADS).map((kind) => [kind, unexpected]))
  return { ...(none as unknown as JobHandlers), 'purge-sessions': work }
}

function held(claimed: ClaimedJob | null): ClaimedJob {
  if (claimed === null) throw new Error('expected a job to be due')
  return claimed
}

async function rowOf(id: number) {
  const [row] = await db.select().from(job).where(eq(job.id, id))
  return row
}

test('a job is claimed when it is due, oldest first, and not before', async () => {
  const late = await ask({ runAt: after(T0, 60) })
  const first = await ask({ runAt: after(T0, -2) })
  const second = await ask({ runAt: after(T0, -1) })
  expect((await claimJob(db, T0))?.id).toBe(first)
  expect((await claimJob(db, T0))?.id).toBe(second)
  expect(await claimJob(db, T0)).toBeNull()
  expect((await claimJob(db, after(T0, 60)))?.id).toBe(late)
})

test('a job asked for in a transaction that rolls back was never asked for', async () => {
  const failing = tx(db, async (inside) => {
    await enqueue(inside, { kind: 'purge-sessions', payload: {}, runAt: T0 })
    throw new Error('the change could not be made')
  })
  await expect(failing).rejects.toThrow('could not be made')
  expect(await claimJob(db, T0)).toBeNull()
})

test('the same key asked for twice is one job, also from two connections at once and after it is done', async () => {
  const request = { kind: 'purge-sessions', payload: {}, runAt: T0, uniqueKey: 'tick 7' } as const
  const ids = await Promise.all([
    tx(db, (inside) => enqueue(inside, request)),
    tx(other, (inside) => enqueue(inside, request)),
  ])
  expect(ids[0]).toBe(ids[1])
  const work = vi.fn(async () => undefined)
  expect(await drainJobs(db, handlers(work), T0)).toMatchObject({ done: 1 })
  expect(await tx(db, (inside) => enqueue(inside, request))).toBe(ids[0])
  expect(await drainJobs(db, handlers(work), T0)).toMatchObject({ done: 0 })
  expect(work).toHaveBeenCalledTimes(1)
})

test('a payload that does not fit its kind is refused when it is asked for', async () => {
  const payload = { surprise: 1 } as unknown as Record<string, never>
  await expect(tx(db, (inside) => enqueue(inside, { kind: 'purge-sessions', payload }))).rejects.toThrow(
    /surprise/,
  )
})

test('four claimers on two connections share sixty jobs without taking one twice', async () => {
  for (let n = 0; n < 60; n += 1) await ask()
  async function claimAll(handle: typeof db): Promise<number[]> {
    const ids: number[] = []
    for (;;) {
      const claimed = await claimJob(handle, T0)
      if (claimed === null) return ids
      ids.push(claimed.id)
    }
  }
  const shares = await Promise.all([claimAll(db), claimAll(other), claimAll(db), claimAll(other)])
  const all = shares.flat()
  expect(all).toHaveLength(60)
  expect(new Set(all).size).toBe(60)
  expect(shares.filter((share) => share.length > 0).length, 'the work was shared').toBeGreaterThan(1)
})

test('a claimer passes over a job that another transaction holds locked, and does not wait for it', async () => {
  const locked = await ask({ runAt: after(T0, -1) })
  const free = await ask()
  await other.transaction(async (inside) => {
    await inside.select().from(job).where(eq(job.id, locked)).for('update')
    expect((await claimJob(db, T0))?.id).toBe(free)
    expect(await claimJob(db, T0)).toBeNull()
  })
  expect((await claimJob(db, T0))?.id).toBe(locked)
})

test('a lease that runs out goes to the next claimer, and the first one can no longer end the job', async () => {
  const id = await ask()
  const silent = held(await claimJob(db, T0))
  const justBefore = new Date(T0.getTime() + LEASE_MS - 1)
  expect(await claimJob(other, justBefore)).toBeNull()
  const atEnd = new Date(T0.getTime() + LEASE_MS)
  const next = held(await claimJob(other, atEnd))
  expect(next).toMatchObject({ id, attempts: 2 })
  expect(await completeJob(db, silent, atEnd)).toBe(false)
  expect(await failJob(db, silent, 'late', { machine: atEnd })).toBe('lost')
  expect(await renewJob(db, silent, atEnd)).toBe(false)
  expect((await rowOf(id))?.state).toBe('running')
  expect(await completeJob(other, next, atEnd)).toBe(true)
  expect(await rowOf(id)).toMatchObject({ state: 'done', leaseOwner: null, finishedAt: atEnd })
})

test('two claimers that find the same lease run out: one gets it', async () => {
  await ask()
  held(await claimJob(db, T0))
  const later = new Date(T0.getTime() + LEASE_MS)
  const claims = await Promise.all([claimJob(db, later), claimJob(other, later)])
  expect(claims.filter((claim) => claim !== null)).toHaveLength(1)
})

test('a renewed lease is kept', async () => {
  await ask()
  const claimed = held(await claimJob(db, T0))
  expect(await renewJob(db, claimed, after(T0, 50))).toBe(true)
  expect(await claimJob(other, after(T0, 100))).toBeNull()
  expect(await claimJob(other, after(T0, 50 + LEASE_MS / 1000))).not.toBeNull()
})

test('a failing job is tried again after 5, 10, 20 and 40 s, then given up with its last error', async () => {
  const id = await ask()
  let runs = 0
  const failing = handlers(async () => {
    runs += 1
    throw new Error(`no luck ${runs}`)
  })
  let at = T0
  for (const pause of [5, 10, 20, 40]) {
    expect(await drainJobs(db, failing, at)).toMatchObject({ again: 1, failed: 0 })
    expect(await drainJobs(db, failing, after(at, pause - 1))).toMatchObject({ again: 0 })
    at = after(at, pause)
  }
  expect(await drainJobs(db, failing, at)).toMatchObject({ again: 0, failed: 1 })
  expect(runs).toBe(5)
  const row = await rowOf(id)
  expect(row).toMatchObject({ state: 'failed', attempts: 5, leaseOwner: null, finishedAt: at })
  expect(row?.lastError).toContain('no luck 5')
  expect(await drainJobs(db, failing, after(at, 86_400))).toMatchObject({ failed: 0, again: 0 })
})

test('a job that succeeds at its second attempt is done and keeps no error', async () => {
  const id = await ask()
  let runs = 0
  const flaky = handlers(async () => {
    runs += 1
    if (runs === 1) throw new Error('once')
  })
  await drainJobs(db, flaky, T0)
  expect((await rowOf(id))?.lastError).toContain('once')
  expect(await drainJobs(db, flaky, after(T0, 5))).toMatchObject({ done: 1 })
  expect(await rowOf(id)).toMatchObject({ state: 'done', attempts: 2, lastError: null })
})

test('a job that takes its worker down every time is closed after its last attempt', async () => {
  const id = await ask({ maxAttempts: 2 })
  held(await claimJob(db, T0))
  held(await claimJob(db, after(T0, 60)))
  const healthy = await ask({ runAt: after(T0, 200) })
  expect(await claimJob(db, after(T0, 120))).toBeNull()
  expect(await rowOf(id)).toMatchObject({
    state: 'failed',
    lastError: 'Its worker went silent at attempt 2 of 2.',
  })
  expect((await claimJob(db, after(T0, 200)))?.id).toBe(healthy)
})

test('a job of a kind this version does not know is given up at once and says so', async () => {
  const id = await ask()
  await db.update(job).set({ kind: 'from-next-year' }).where(eq(job.id, id))
  const work = vi.fn(async () => undefined)
  expect(await drainJobs(db, handlers(work), T0)).toMatchObject({ failed: 1 })
  expect((await rowOf(id))?.lastError).toContain('knows no job of the kind "from-next-year"')
  expect(work).not.toHaveBeenCalled()
})

test('a handler whose lease was taken over is told to stop, and its result does not count', async () => {
  vi.useFakeTimers({ toFake: ['setInterval', 'clearInterval'] })
  try {
    const id = await ask()
    const claimed = held(await claimJob(db, T0))
    const { signal } = new AbortController()
    const running = runJob(
      db,
      claimed,
      handlers(async (context) => {
        held(await claimJob(other, new Date(T0.getTime() + LEASE_MS)))
        vi.advanceTimersByTime(LEASE_MS / 3)
        await new Promise<void>((resolve) => context.signal.addEventListener('abort', () => resolve()))
      }),
      { signal },
    )
    expect(await running).toBe('lost')
    expect(await rowOf(id)).toMatchObject({ state: 'running', attempts: 2 })
  } finally {
    vi.useRealTimers()
  }
})
