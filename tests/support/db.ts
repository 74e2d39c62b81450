/** The database of this test worker. Importing this file points the product's own handle at it. */
import { afterAll, beforeEach } from 'vitest'
import { closeDb, connect, type Db, getDb, getPool } from '#app/db/client.server.ts'
import { testDatabaseUrl } from './test-database-url.ts'

const url = testDatabaseUrl(Number(process.env.VITEST_POOL_ID ?? '1'))
// Settings are parsed at their first use, which is after this line.
process.env.DATABASE_URL = url
process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
process.env.LOG_LEVEL ??= 'silent'

/** Tables that refuse DELETE by trigger; TRUNCATE does not ask triggers. */
const APPEND_ONLY = new Set(['record', 'log_entry', 'log_amendment', 'permit_act', 'permit_version'])
const KEPT = new Set(['__drizzle_migrations', 'migration_guard'])

/** This worker's database handle, the same one the product gets from getDb(). */
export function testDb(): Db {
  return getDb()
}

/** The address of this worker's database, for a process started by a test. */
export function currentTestDatabaseUrl(): string {
  return url
}

/** Empties every table that has rows. */
export async function cleanDatabase(): Promise<void> {
  const connection = await getPool().promise().getConnection()
  try {
    const tables = await listTables(connection)
    const asked = tables.map(
      (name) => `SELECT '${name}' AS name, EXISTS(SELECT 1 FROM \`${name}\`) AS filled`,
    )
    const [rows] = await connection.query(asked.join(' UNION ALL '))
    const filled = (rows as { name: string; filled: number }[]).filter((row) => row.filled === 1)
    await connection.query('SET FOREIGN_KEY_CHECKS = 0')
    for (const { name } of filled) {
      await connection.query(APPEND_ONLY.has(name) ? `TRUNCATE TABLE \`${name}\`` : `DELETE FROM \`${name}\``)
    }
  } finally {
    await connection.query('SET FOREIGN_KEY_CHECKS = 1')
    connection.release()
  }
}

let tableNames: string[] | undefined

async function listTables(connection: {
  query(sql: string): Promise<[unknown, unknown]>
}): Promise<string[]> {
  if (tableNames === undefined) {
    const [rows] = await connection.query(
      "SELECT TABLE_NAME AS name FROM information_schema.TABLES WHERE TABLE_SCHEMA = DATABASE() AND TABLE_TYPE = 'BASE TABLE'",
    )
    tableNames = (rows as { name: string }[]).map(({ name }) => name).filter((name) => !KEPT.has(name))
  }
  return tableNames
}

/** Call at the top of a test file: an empty database before each test, the pool closed after the last. */
export function freshDatabase(): Db {
  beforeEach(cleanDatabase)
  afterAll(closeDb)
  return testDb()
}

/**
 * A second pool of connections to the same database, for what two processes do at once. Closed after the file's tests.
 */
export function secondConnection(): Db {
  const { db, pool } = connect(url, { connectionLimit: 4 })
  afterAll(() => pool.promise().end())
  return db
}
