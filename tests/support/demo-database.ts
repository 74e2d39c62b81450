/** A database with the demo facility for the tests that look at it: seeded once a server, then copied inside it. */
import { execFile } from 'node:child_process'
import { createHash } from 'node:crypto'
import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { promisify } from 'node:util'
import mysql from 'mysql2/promise'

const PREFIX = 'ebbline_demo_'
/** What decides on the demo's content. */
const MADE_FROM = ['seeds', 'drizzle', 'app/physics', 'app/domain', 'app/db', 'app/services']
/** The longest a test waits for another one that seeds, in seconds. */
const SEEDED_WITHIN_S = 600
const run = promisify(execFile)

type Rows = Record<string, string>[]

/**
 * Makes a database of that name anew, filled with the demo, and returns its address. The server is the one of
 * TEST_DATABASE_URL.
 */
export async function demoDatabase(name: string): Promise<string> {
  return await onServer(async (connection, url) => {
    const original = await oneAtATime(connection, () => ensureOriginal(connection, url))
    await copyDatabase(connection, original, name)
    return addressOf(url, name)
  })
}

/** The address of the demo that the copies are made from, for tests that only look. */
export async function seededDemo(): Promise<string> {
  return await onServer(async (connection, url) =>
    addressOf(url, await oneAtATime(connection, () => ensureOriginal(connection, url))),
  )
}

async function onServer(work: (connection: mysql.Connection, url: URL) => Promise<string>): Promise<string> {
  const server = process.env.TEST_DATABASE_URL
  if (server === undefined || server === '') {
    throw new Error(
      'TEST_DATABASE_URL is not set. Run npm test -- build e2e, which starts a server of its own.',
    )
  }
  const url = new URL(server)
  const connection = await mysql.createConnection({
    host: url.hostname,
    port: Number(url.port || 3306),
    user: decodeURIComponent(url.username),
    password: decodeURIComponent(url.password),
  })
  try {
    return await work(connection, url)
  } finally {
    await connection.end()
  }
}

/** Two test files that ask at once are two processes: the second waits until the first has seeded. */
async function oneAtATime<Made>(connection: mysql.Connection, make: () => Promise<Made>): Promise<Made> {
  const [lock] = await rowsOf(connection, 'SELECT GET_LOCK(?, ?) AS got', [PREFIX, SEEDED_WITHIN_S])
  if (Number(lock?.got) !== 1) {
    throw new Error(
      `Another test has been seeding the demo for ${SEEDED_WITHIN_S} s. Wait for it, or end it, and run this one again.`,
    )
  }
  try {
    return await make()
  } finally {
    await connection.query('SELECT RELEASE_LOCK(?)', [PREFIX])
  }
}

/** The seeded database that the others are copied from, named after all that goes into it. */
async function ensureOriginal(connection: mysql.Connection, url: URL): Promise<string> {
  const hash = createHash('sha256')
  for (const folder of MADE_FROM) hashFolder(hash, folder)
  const wanted = `${PREFIX}${hash.digest('hex').slice(0, 12)}`
  const [rows] = await connection.query<mysql.RowDataPacket[]>('SHOW DATABASES LIKE ?', [`${PREFIX}%`])
  const present = rows.flatMap((row) => Object.values(row).map(String))
  // A younger one may be looked at by a test that began before a file was changed.
  for (const old of present) {
    if (old !== wanted && (await isOutlived(connection, old)))
      await connection.query('DROP DATABASE ??', [old])
  }
  if (present.includes(wanted) && (await isSeeded(connection, wanted))) return wanted
  // Both are idempotent, and a seeding that was cut off is completed.
  for (const file of ['app/cli/migrate.ts', 'app/cli/seed.ts']) {
    await run(process.execPath, ['--import', 'tsx', file], {
      env: {
        ...process.env,
        NODE_ENV: 'production',
        DATABASE_URL: addressOf(url, wanted),
        SESSION_SECRET: 'a secret for tests only, 32 or more',
        // Otherwise the clock would be the machine's, and the demo's morning long past.
        DEMO: '1',
      },
    })
  }
  return wanted
}

/** Whether a seeded database is older than any run of tests takes. */
async function isOutlived(connection: mysql.Connection, database: string): Promise<boolean> {
  const [row] = await rowsOf(
    connection,
    'SELECT COALESCE(MIN(CREATE_TIME) < NOW() - INTERVAL 2 HOUR, TRUE) AS outlived FROM information_schema.TABLES WHERE TABLE_SCHEMA = ?',
    [database],
  )
  return Number(row?.outlived) === 1
}

/** The site's row is the last that seeding writes. */
async function isSeeded(connection: mysql.Connection, database: string): Promise<boolean> {
  const count =
    "SELECT COUNT(*) AS n FROM information_schema.TABLES WHERE TABLE_SCHEMA = ? AND TABLE_NAME = 'site'"
  const [table] = await rowsOf(connection, count, [database])
  if (Number(table?.n) === 0) return false
  return (await rowsOf(connection, 'SELECT 1 FROM ??.site', [database])).length > 0
}

/** Copies tables with their rows, keys, partitions and triggers. */
async function copyDatabase(connection: mysql.Connection, from: string, to: string): Promise<void> {
  await connection.query('DROP DATABASE IF EXISTS ??', [to])
  await connection.query('CREATE DATABASE ?? CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci', [to])
  await connection.query('USE ??', [to])
  await connection.query('SET SESSION foreign_key_checks = 0, unique_checks = 0')
  const tables = await rowsOf(
    connection,
    "SELECT TABLE_NAME AS name FROM information_schema.TABLES WHERE TABLE_SCHEMA = ? AND TABLE_TYPE = 'BASE TABLE'",
    [from],
  )
  for (const { name } of tables) {
    const [made] = await rowsOf(connection, 'SHOW CREATE TABLE ??.??', [from, name])
    await connection.query(String(made?.['Create Table']))
    // Generated columns are worked out again and must not be written.
    const columns = await rowsOf(
      connection,
      "SELECT COLUMN_NAME AS name FROM information_schema.COLUMNS WHERE TABLE_SCHEMA = ? AND TABLE_NAME = ? AND COALESCE(GENERATION_EXPRESSION, '') = ''",
      [from, name],
    )
    const names = columns.map((column) => column.name)
    await connection.query('INSERT INTO ?? (??) SELECT ?? FROM ??.??', [name, names, names, from, name])
  }
  const triggers = await rowsOf(
    connection,
    'SELECT TRIGGER_NAME AS name FROM information_schema.TRIGGERS WHERE TRIGGER_SCHEMA = ?',
    [from],
  )
  for (const { name } of triggers) {
    const [made] = await rowsOf(connection, 'SHOW CREATE TRIGGER ??.??', [from, name])
    await connection.query(String(made?.['SQL Original Statement']))
  }
}

async function rowsOf(connection: mysql.Connection, sql: string, values: unknown[]): Promise<Rows> {
  const [rows] = await connection.query<mysql.RowDataPacket[]>(sql, values)
  return rows as Rows
}

function addressOf(server: URL, database: string): string {
  const url = new URL(server)
  url.pathname = `/${database}`
  return url.href
}

function hashFolder(hash: ReturnType<typeof createHash>, folder: string): void {
  for (const entry of readdirSync(folder, { withFileTypes: true })) {
    const path = join(folder, entry.name)
    if (entry.isDirectory()) hashFolder(hash, path)
    else hash.update(`${path}\0`).update(readFileSync(path))
  }
}
