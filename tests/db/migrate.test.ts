import type mysql from 'mysql2/promise'
import { afterAll, expect, test } from 'vitest'
import { closeDb, getPool } from '#app/db/client.server.ts'
import { migrateDatabase } from '#app/db/migrate.server.ts'
import { currentTestDatabaseUrl } from '#tests/support/db.ts'

const freshUrl = new URL(currentTestDatabaseUrl())
const freshName = `${freshUrl.pathname.slice(1)}_fresh`
freshUrl.pathname = `/${freshName}`

afterAll(async () => {
  await getPool().promise().query(`DROP DATABASE IF EXISTS \`${freshName}\``)
  await closeDb()
})

/** Tables, columns and triggers of a database, as text that can be compared. */
async function describeDatabase(name: string): Promise<string[]> {
  const pool = getPool().promise()
  const [columns] = await pool.query<mysql.RowDataPacket[]>(
    'SELECT TABLE_NAME AS t, COLUMN_NAME AS c, COLUMN_TYPE AS k, IS_NULLABLE AS n FROM information_schema.COLUMNS WHERE TABLE_SCHEMA = ? ORDER BY 1, 2',
    [name],
  )
  const [triggers] = await pool.query<mysql.RowDataPacket[]>(
    'SELECT TRIGGER_NAME AS t FROM information_schema.TRIGGERS WHERE TRIGGER_SCHEMA = ? ORDER BY 1',
    [name],
  )
  return [
    ...columns.map(({ t, c, k, n }) => `${t}.${c} ${k} ${n}`),
    ...triggers.map(({ t }) => `trigger ${t}`),
  ]
}

test('two processes that migrate an empty server at once apply each migration once', async () => {
  await getPool().promise().query(`DROP DATABASE IF EXISTS \`${freshName}\``)
  const both = await Promise.all([migrateDatabase(freshUrl.href), migrateDatabase(freshUrl.href)])
  const applied = both.map((result) => result.applied).sort((a, b) => a - b)
  expect(applied[0]).toBe(0)
  expect(applied[1]).toBeGreaterThan(0)

  const again = await migrateDatabase(freshUrl.href)
  expect(again.applied).toBe(0)
  const tables = await describeDatabase(freshName)
  expect(tables).toEqual(await describeDatabase(new URL(currentTestDatabaseUrl()).pathname.slice(1)))
  expect(tables).toContain('trigger record_no_update')
  expect(tables).toContain('trigger log_amendment_no_delete')
})

test('a database used by a newer version is refused, not changed', async () => {
  const pool = getPool().promise()
  await pool.query(
    `INSERT INTO \`${freshName}\`.__drizzle_migrations (hash, created_at) VALUES ('from the future', 9999999999999)`,
  )
  await expect(migrateDatabase(freshUrl.href)).rejects.toThrow(/last used by a newer version/)
  const [guards] = await pool.query<mysql.RowDataPacket[]>(
    `SELECT held_by FROM \`${freshName}\`.migration_guard WHERE id = 1`,
  )
  expect(guards[0]?.held_by, 'the guard is given back after a refusal').toBeNull()
})

test('a database name that would need quoting is refused', async () => {
  await expect(migrateDatabase('mysql://eb:eb@127.0.0.1:1/no-dashes')).rejects.toThrow(
    /may only hold letters, digits and underscores/,
  )
})

test('text is kept in utf8mb4, readings are partitioned by month', async () => {
  const pool = getPool().promise()
  const [tables] = await pool.query<mysql.RowDataPacket[]>(
    "SELECT TABLE_NAME AS name FROM information_schema.TABLES WHERE TABLE_SCHEMA = DATABASE() AND TABLE_COLLATION NOT LIKE 'utf8mb4%'",
  )
  expect(tables).toEqual([])
  const [partitions] = await pool.query<mysql.RowDataPacket[]>(
    "SELECT PARTITION_NAME AS name FROM information_schema.PARTITIONS WHERE TABLE_SCHEMA = DATABASE() AND TABLE_NAME = 'reading' ORDER BY PARTITION_ORDINAL_POSITION",
  )
  expect(partitions.at(0)?.name).toBe('p_min')
  expect(partitions.at(-1)?.name).toBe('p_max')
})
