import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import type { Db } from '#app/db/client.server.ts'
import { isCheck, isDuplicate, isForeignKey, isRetryable, isUnreachable } from '#app/db/errors.server.ts'
import { line, segment } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createLine, createSegment } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()

async function errorOf(work: Promise<unknown>): Promise<unknown> {
  try {
    await work
  } catch (error) {
    return error
  }
  throw new Error('expected a failure')
}

test('two transactions that lock the same rows crosswise both end up done', async () => {
  const [first, second] = [await createLine(db), await createLine(db)]
  let begun = 0
  let runs = 0
  const meeting: { meet: () => void } = { meet: () => undefined }
  const bothInside = new Promise<void>((resolve) => {
    meeting.meet = resolve
  })

  /** Writes one row, waits (the first time) until the other transaction has written its own, then writes the other's. */
  function crosswise(handle: Db, mine: number, theirs: number): Promise<void> {
    return tx(handle, async (inside) => {
      runs += 1
      await inside
        .update(line)
        .set({ lengthM: 100 + mine })
        .where(eq(line.id, mine))
      begun += 1
      if (begun === 2) meeting.meet()
      await bothInside
      await inside
        .update(line)
        .set({ lengthM: 100 + mine })
        .where(eq(line.id, theirs))
    })
  }

  await Promise.all([crosswise(db, first, second), crosswise(other, second, first)])
  expect(runs, 'the one the database gave up on ran again').toBeGreaterThan(2)
  const lengths = await db.select({ lengthM: line.lengthM }).from(line)
  expect(new Set(lengths.map(({ lengthM }) => lengthM)).size, 'the later one has written both rows').toBe(1)
})

test('without the retry the database reports that deadlock, and it is told from other errors', async () => {
  const [first, second] = [await createLine(db), await createLine(db)]
  let open = 0
  const waiters: (() => void)[] = []
  const bothOpen = () =>
    new Promise<void>((resolve) => {
      open += 1
      waiters.push(resolve)
      if (open === 2) for (const wake of waiters) wake()
    })
  const cross = (handle: Db, mine: number, theirs: number) =>
    handle.transaction(async (inside) => {
      await inside.update(line).set({ lengthM: 1 }).where(eq(line.id, mine))
      await bothOpen()
      await inside.update(line).set({ lengthM: 1 }).where(eq(line.id, theirs))
    })
  const results = await Promise.allSettled([cross(db, first, second), cross(other, second, first)])
  const failed = results.flatMap((result) => (result.status === 'rejected' ? [result.reason] : []))
  expect(failed).toHaveLength(1)
  expect(failed.map(isRetryable)).toEqual([true])
  expect(failed.map(isDuplicate)).toEqual([false])
})

test('an error of the work itself rolls back and is not tried again', async () => {
  let runs = 0
  const work = tx(db, async (inside) => {
    runs += 1
    await inside.insert(line).values({ code: 'ROLLED', name: 'x', lengthM: 1, sortOrder: 1 })
    throw new Error('no')
  })
  await expect(work).rejects.toThrow('no')
  expect(runs).toBe(1)
  expect(await db.select().from(line)).toEqual([])
})

test('retries end: a conflict that never clears is thrown after six runs', async () => {
  let runs = 0
  const conflict = Object.assign(new Error('Deadlock found'), { errno: 1213 })
  const work = tx(db, async () => {
    runs += 1
    throw conflict
  })
  await expect(work).rejects.toBe(conflict)
  expect(runs).toBe(6)
})

test('duplicate, missing and still-used rows are told apart', async () => {
  const { lineId } = await createSegment(db, { tag: 'SG-DUP' })
  const duplicate = await errorOf(createSegment(db, { tag: 'SG-DUP', lineId }))
  expect([isDuplicate(duplicate), isForeignKey(duplicate), isRetryable(duplicate)]).toEqual([
    true,
    false,
    false,
  ])
  const missing = await errorOf(createSegment(db, { lineId: lineId + 999 }))
  expect([isDuplicate(missing), isForeignKey(missing)]).toEqual([false, true])
  const used = await errorOf(db.delete(line).where(eq(line.id, lineId)))
  expect(isForeignKey(used)).toBe(true)
  expect(await db.select().from(segment)).toHaveLength(1)
})

test('a value that breaks a CHECK is told by its number, not by the name the driver gives it', async () => {
  const broken = await errorOf(
    db.execute("INSERT INTO pump (tag, kind, speeds) VALUES ('P-1', 'getter-ion', 'not json')"),
  )
  expect([isCheck(broken), isDuplicate(broken)]).toEqual([true, false])
})

test('a server that is not there is told from one that refuses', async () => {
  const { connect } = await import('#app/db/client.server.ts')
  const { db: nowhere, pool } = connect('mysql://eb:eb@127.0.0.1:1/ebbline')
  const gone = await errorOf(nowhere.execute('SELECT 1'))
  await pool.promise().end()
  expect([isUnreachable(gone), isRetryable(gone)]).toEqual([true, false])
  expect(isUnreachable(await errorOf(db.execute('SELECT nothing FROM nowhere')))).toBe(false)
})

test('sessions speak UTC and refuse values that do not fit', async () => {
  const [rows] = await db.execute('SELECT @@session.time_zone AS zone, @@session.tx_isolation AS level')
  expect(rows).toMatchObject([{ zone: '+00:00', level: 'READ-COMMITTED' }])
  const tooLong = await errorOf(
    db.insert(line).values({ code: 'x'.repeat(21), name: 'x', lengthM: 1, sortOrder: 1 }),
  )
  expect(String((tooLong as Error).cause)).toContain('Data too long')
})
