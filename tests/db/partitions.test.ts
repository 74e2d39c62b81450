import { sql } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { listReadingPartitions } from '#app/db/queries/partitions.server.ts'
import { reading } from '#app/db/schema/index.ts'
import { createReadingPartitions } from '#app/services/partitions.server.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'

const db = freshDatabase()
const other = secondConnection()

// As the migrations leave it: other tests of this file, and of others, make months.
beforeEach(async () => {
  await db.execute(
    sql.raw(
      "ALTER TABLE reading PARTITION BY RANGE COLUMNS(at) (PARTITION p_min VALUES LESS THAN ('2025-09-01'), PARTITION p_max VALUES LESS THAN (MAXVALUE))",
    ),
  )
})

async function rowsByPartition(): Promise<Record<string, number>> {
  const counts: Record<string, number> = {}
  for (const { name } of await listReadingPartitions(db)) {
    const [rows] = await db.execute(sql.raw(`SELECT COUNT(*) AS n FROM reading PARTITION (${name})`))
    const n = Number((rows as unknown as { n: number }[])[0]?.n)
    if (n > 0) counts[name] = n
  }
  return counts
}

async function read(...instants: string[]): Promise<void> {
  await db.insert(reading).values(
    instants.map((at) => ({
      channelId: 1,
      at: new Date(at),
      value: 1e-8,
      quality: 0,
      importId: 1,
      lineNo: 1,
    })),
  )
}

test('makes each month from the last one to three months ahead, and the catch-all stays last', async () => {
  const made = await createReadingPartitions(db, new Date('2025-11-09T07:00:00.000Z'))
  expect(made).toEqual(['p_2025_09', 'p_2025_10', 'p_2025_11', 'p_2025_12', 'p_2026_01', 'p_2026_02'])
  const partitions = await listReadingPartitions(db)
  expect(partitions.map(({ name }) => name)).toEqual(['p_min', ...made, 'p_max'])
  expect(partitions.find(({ name }) => name === 'p_2025_12')?.below).toEqual(
    new Date('2026-01-01T00:00:00.000Z'),
  )
})

test('does nothing until the next month begins', async () => {
  await createReadingPartitions(db, new Date('2025-11-01T00:00:00.000Z'))
  expect(await createReadingPartitions(db, new Date('2025-11-30T23:59:59.999Z'))).toEqual([])
  expect(await createReadingPartitions(db, new Date('2025-12-01T00:00:00.000Z'))).toEqual(['p_2026_03'])
})

test('readings that came before their month was made move into it, to the millisecond of UTC', async () => {
  await read(
    '2025-08-31T23:59:59.999Z',
    '2025-09-01T00:00:00.000Z',
    '2025-10-31T23:59:59.999Z',
    '2025-11-01T00:00:00.000Z',
  )
  expect(await rowsByPartition()).toEqual({ p_min: 1, p_max: 3 })
  await createReadingPartitions(db, new Date('2025-09-09T07:00:00.000Z'))
  expect(await rowsByPartition()).toEqual({ p_min: 1, p_2025_09: 1, p_2025_10: 1, p_2025_11: 1 })
})

test('a reading far ahead of every month is still taken', async () => {
  await createReadingPartitions(db, new Date('2025-09-09T07:00:00.000Z'))
  await read('2031-01-01T00:00:00.000Z')
  expect(await rowsByPartition()).toEqual({ p_max: 1 })
})

test('two workers that make the same months at once leave each month once', async () => {
  const now = new Date('2025-11-09T07:00:00.000Z')
  await Promise.all([createReadingPartitions(db, now), createReadingPartitions(other, now)])
  const names = (await listReadingPartitions(db)).map(({ name }) => name)
  expect(names).toHaveLength(8)
  expect(new Set(names).size).toBe(8)
})

test('a table without the catch-all is reported, not guessed at', async () => {
  await db.execute(sql.raw('ALTER TABLE reading REMOVE PARTITIONING'))
  await expect(createReadingPartitions(db, new Date('2025-11-09T07:00:00.000Z'))).rejects.toThrow(
    /not partitioned as expected: found \[\]/,
  )
})

test('the query planner reads only the months asked for', async () => {
  await createReadingPartitions(db, new Date('2025-11-09T07:00:00.000Z'))
  const [rows] = await db.execute(
    sql`EXPLAIN PARTITIONS SELECT * FROM reading WHERE channel_id = 1 AND at >= '2025-10-05' AND at < '2025-11-02'`,
  )
  expect((rows as unknown as { partitions: string }[])[0]?.partitions).toBe('p_2025_10,p_2025_11')
})
