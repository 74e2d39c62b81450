/**
 * Applies the migrations in `drizzle/`, one process at a time. The guard is a row with a lease and not a named lock,
 * which a clustered server does not offer.
 */
import { readMigrationFiles } from 'drizzle-orm/migrator'
import { migrate } from 'drizzle-orm/mysql2/migrator'
import mysql from 'mysql2/promise'
import { machineNow } from '../machine-time.server.ts'
import { connect } from './client.server.ts'

const LEASE_MS = 120_000
const WAIT_MS = 180_000

/** Creates the database when it is missing (the account must be allowed to) and brings its tables up to date. */
export async function migrateDatabase(
  databaseUrl: string,
  migrationsFolder = 'drizzle',
): Promise<{ applied: number }> {
  await createDatabase(databaseUrl)
  const { db, pool } = connect(databaseUrl, { connectionLimit: 2 })
  const raw = pool.promise()
  try {
    await raw.query(
      'CREATE TABLE IF NOT EXISTS migration_guard (id TINYINT PRIMARY KEY, held_by VARCHAR(64) NULL, held_until DATETIME(3) NULL)',
    )
    await raw.query('INSERT IGNORE INTO migration_guard (id) VALUES (1)')
    const holder = `${process.pid}-${Math.random().toString(36).slice(2)}`
    await takeGuard(raw, holder)
    try {
      const before = await countApplied(raw)
      const known = readMigrationFiles({ migrationsFolder }).length
      if (before > known) {
        throw new Error(
          `The database has ${before} migrations, this program knows ${known}: it was last used by a newer version.`,
        )
      }
      if (before < known) await migrate(db, { migrationsFolder })
      return { applied: (await countApplied(raw)) - before }
    } finally {
      await raw.query(
        'UPDATE migration_guard SET held_by = NULL, held_until = NULL WHERE id = 1 AND held_by = ?',
        [holder],
      )
    }
  } finally {
    await raw.end()
  }
}

async function createDatabase(databaseUrl: string): Promise<void> {
  const url = new URL(databaseUrl)
  const name = url.pathname.slice(1)
  if (!/^[A-Za-z0-9_]{1,64}$/.test(name)) {
    throw new Error(
      `The database name "${name}" in DATABASE_URL may only hold letters, digits and underscores.`,
    )
  }
  const connection = await mysql.createConnection({
    host: url.hostname,
    port: Number(url.port || 3306),
    user: decodeURIComponent(url.username),
    password: decodeURIComponent(url.password),
  })
  try {
    await connection.query(
      `CREATE DATABASE IF NOT EXISTS \`${name}\` CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci`,
    )
  } finally {
    await connection.end()
  }
}

async function takeGuard(raw: mysql.Pool, holder: string): Promise<void> {
  const giveUpAt = machineNow().getTime() + WAIT_MS
  for (;;) {
    const now = machineNow()
    const [result] = await raw.query<mysql.ResultSetHeader>(
      'UPDATE migration_guard SET held_by = ?, held_until = ? WHERE id = 1 AND (held_by IS NULL OR held_until < ?)',
      [holder, new Date(now.getTime() + LEASE_MS), now],
    )
    if (result.affectedRows === 1) return
    if (now.getTime() > giveUpAt)
      throw new Error('Another process has been migrating this database for three minutes.')
    await new Promise((resolve) => setTimeout(resolve, 300))
  }
}

async function countApplied(raw: mysql.Pool): Promise<number> {
  const [tables] = await raw.query<mysql.RowDataPacket[]>("SHOW TABLES LIKE '__drizzle_migrations'")
  if (tables.length === 0) return 0
  const [rows] = await raw.query<mysql.RowDataPacket[]>('SELECT COUNT(*) AS n FROM __drizzle_migrations')
  return Number(rows[0]?.n ?? 0)
}
