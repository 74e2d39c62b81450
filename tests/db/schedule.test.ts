import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { job, scheduleOwner, scheduleTask } from '#app/db/schema/index.ts'
import type { ScheduledTask } from '#app/domain/job-kinds.ts'
import { OWNER_LEASE_MS, releaseSchedule, runSchedule } from '#app/services/schedule.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'

const db = freshDatabase()
const other = secondConnection()

const machine = new Date('2026-12-01T10:00:00.000Z')
const hourly: ScheduledTask = { name: 'hourly', kind: 'purge-sessions', everySeconds: 3600 }
const daily: ScheduledTask = { name: 'daily', kind: 'purge-leftovers', everySeconds: 86_400 }
const tasks = [hourly, daily]

async function keys(): Promise<(string | null)[]> {
  const rows = await db.select({ key: job.dedupeKey }).from(job).orderBy(job.id)
  return rows.map(({ key }) => key)
}

test('the first look asks for every task, later looks for what has become due since', async () => {
  expect(await runSchedule(db, 'one', MORNING, { machine, tasks })).toEqual(['hourly', 'daily'])
  expect(await runSchedule(db, 'one', after(MORNING, 3599), { machine, tasks })).toEqual([])
  expect(await runSchedule(db, 'one', after(MORNING, 3600), { machine, tasks })).toEqual(['hourly'])
  expect(await keys()).toEqual([
    'hourly@2026-11-09T07:00:00.000Z',
    'daily@2026-11-09T00:00:00.000Z',
    'hourly@2026-11-09T08:00:00.000Z',
  ])
})

test('the worker that owns the schedule keeps it while it looks; another one takes over when it has gone silent', async () => {
  expect(await runSchedule(db, 'one', MORNING, { machine, tasks })).not.toBeNull()
  expect(await runSchedule(other, 'two', MORNING, { machine, tasks })).toBeNull()
  const renewedAt = new Date(machine.getTime() + OWNER_LEASE_MS - 1)
  expect(await runSchedule(db, 'one', MORNING, { machine: renewedAt, tasks })).toEqual([])
  const firstLeaseOver = new Date(machine.getTime() + OWNER_LEASE_MS)
  expect(await runSchedule(other, 'two', MORNING, { machine: firstLeaseOver, tasks })).toBeNull()
  const silent = new Date(renewedAt.getTime() + OWNER_LEASE_MS)
  expect(await runSchedule(other, 'two', after(MORNING, 3600), { machine: silent, tasks })).toEqual([
    'hourly',
  ])
  expect(await runSchedule(db, 'one', after(MORNING, 7200), { machine: silent, tasks })).toBeNull()
})

test('a worker that stops hands the schedule on at once, and cannot hand on what is not its own', async () => {
  await runSchedule(db, 'one', MORNING, { machine, tasks })
  await releaseSchedule(db, 'two', machine)
  expect(await runSchedule(other, 'two', MORNING, { machine, tasks })).toBeNull()
  await releaseSchedule(db, 'one', machine)
  expect(await runSchedule(other, 'two', MORNING, { machine, tasks })).toEqual([])
})

test('of two workers that start at once one owns the schedule, and each tick is one job', async () => {
  const looks = await Promise.all([
    runSchedule(db, 'one', MORNING, { machine, tasks }),
    runSchedule(other, 'two', MORNING, { machine, tasks }),
  ])
  expect(looks.filter((look) => look !== null)).toEqual([['hourly', 'daily']])
  expect(await keys()).toHaveLength(2)
  const [row] = await db.select().from(scheduleOwner)
  expect(['one', 'two']).toContain(row?.owner)
})

test('a tick already asked for is not asked for again, even when the note of it was lost', async () => {
  await runSchedule(db, 'one', MORNING, { machine, tasks })
  await db.delete(scheduleTask).where(eq(scheduleTask.name, 'hourly'))
  await runSchedule(db, 'one', MORNING, { machine, tasks })
  expect(await keys()).toHaveLength(2)
})

test('after a jump of the demo clock by ten days a task is asked for once, for its newest time', async () => {
  await runSchedule(db, 'one', MORNING, { machine, tasks })
  expect(await runSchedule(db, 'one', after(MORNING, 10 * 86_400 + 60), { machine, tasks })).toEqual([
    'hourly',
    'daily',
  ])
  expect(await keys()).toHaveLength(4)
  expect((await keys()).at(-1)).toBe('daily@2026-11-19T00:00:00.000Z')
})
