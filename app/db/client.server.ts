/** The pool and the typed database handle. One a process, kept on globalThis so that a development reload does not leak it. */
import { drizzle, type MySql2Database } from 'drizzle-orm/mysql2'
import mysql from 'mysql2'
import { env } from '../env.server.ts'

export type Db = MySql2Database
/** A transaction, or the handle itself: queries take either. */
export type DbOrTx = Db | Parameters<Parameters<Db['transaction']>[0]>[0]

interface Connection {
  db: Db
  pool: mysql.Pool
}

const store = globalThis as typeof globalThis & { __ebblineDb?: Connection }

/** Opens a pool on a database URL. Sessions run in UTC with strict SQL and READ COMMITTED, which keeps gap locks few. */
export function connect(databaseUrl: string, options: { connectionLimit?: number } = {}): Connection {
  const url = new URL(databaseUrl)
  const pool = mysql.createPool({
    host: url.hostname,
    port: Number(url.port || 3306),
    user: decodeURIComponent(url.username),
    password: decodeURIComponent(url.password),
    database: url.pathname.slice(1),
    connectionLimit: options.connectionLimit ?? 10,
    timezone: 'Z',
    charset: 'utf8mb4',
    supportBigNumbers: true,
    // The stream for LOAD DATA LOCAL is given per statement; a path asked for by the server is never opened.
    flags: ['LOCAL_FILES'],
  })
  pool.on('connection', (connection) => {
    connection.query(
      "SET time_zone = '+00:00', sql_mode = 'STRICT_ALL_TABLES,NO_ZERO_DATE,NO_ZERO_IN_DATE,ERROR_FOR_DIVISION_BY_ZERO'",
    )
    connection.query('SET SESSION TRANSACTION ISOLATION LEVEL READ COMMITTED')
  })
  return { db: drizzle(pool), pool }
}

function connection(): Connection {
  store.__ebblineDb ??= connect(env().DATABASE_URL)
  return store.__ebblineDb
}

/** The process-wide database handle. */
export function getDb(): Db {
  return connection().db
}

/** The process-wide raw pool, for what drizzle cannot say (streams, LOAD DATA, partitions). */
export function getPool(): mysql.Pool {
  return connection().pool
}

/** Closes the pool; a command that forgets this never ends. */
export async function closeDb(): Promise<void> {
  const open = store.__ebblineDb
  if (open === undefined) return
  delete store.__ebblineDb
  await open.pool.promise().end()
}
