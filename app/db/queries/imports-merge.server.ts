/**
 * From the readings of one file to the stored ones. The rows first go into a table of this connection alone, by
 * LOAD DATA, and from there into `reading`: what is held already goes no further, what differs is kept beside it.
 */
import { Readable } from 'node:stream'
import { sql } from 'drizzle-orm'
import { drizzle } from 'drizzle-orm/mysql2'
import type mysql from 'mysql2'
import { MARKS } from '../../domain/readings.ts'
import type { Db, DbOrTx } from '../client.server.ts'
import { importRange, rollupDue } from '../schema/index.ts'

/** A handle and the connection under it: whatever both do is one session, and one transaction. */
export interface OneConnection {
  db: Db
  raw: mysql.PoolConnection
}

/** Whoever holds a connection here needs a second one to read the file from; all together must not empty the pool. */
const AT_ONCE = 3
let running = 0
const waiting: (() => void)[] = []

/** Takes one connection out of the pool for statements that drizzle cannot say, and gives it back afterwards. */
export async function onOneConnection<Result>(
  db: Db,
  work: (one: OneConnection) => Promise<Result>,
): Promise<Result> {
  if (running >= AT_ONCE) await new Promise<void>((resolve) => waiting.push(resolve))
  else running += 1
  try {
    return await borrow(db, work)
  } finally {
    const next = waiting.shift()
    if (next === undefined) running -= 1
    else next()
  }
}

async function borrow<Result>(db: Db, work: (one: OneConnection) => Promise<Result>): Promise<Result> {
  const pool = (db as Db & { $client: mysql.Pool }).$client
  const raw = await new Promise<mysql.PoolConnection>((resolve, reject) => {
    pool.getConnection((error, connection) => (error === null ? resolve(connection) : reject(error)))
  })
  try {
    return await work({ db: drizzle(raw), raw })
  } finally {
    raw.release()
  }
}

/** An empty table for the file's readings, seen by this connection only. */
export async function createIncoming(tx: DbOrTx): Promise<void> {
  await tx.execute(sql`DROP TEMPORARY TABLE IF EXISTS incoming, clash`)
  await tx.execute(sql`CREATE TEMPORARY TABLE incoming (
    channel_id INT UNSIGNED NOT NULL,
    at DATETIME(3) NOT NULL,
    seq SMALLINT UNSIGNED NOT NULL,
    value DOUBLE NULL,
    bound DOUBLE NULL,
    quality TINYINT UNSIGNED NOT NULL,
    marks TINYINT UNSIGNED NOT NULL,
    line_no INT UNSIGNED NOT NULL,
    PRIMARY KEY (channel_id, at, seq)
  ) ENGINE=InnoDB`)
}

interface Loaded {
  loaded: number
  warnings: number
}

const LOADED_COLUMNS = 'channel_id, at, seq, value, bound, quality, marks, line_no'

/** Streams tab-separated rows into `incoming`; says how many arrived and how many warnings the server had. */
export function loadIncoming(raw: mysql.PoolConnection, rows: AsyncIterable<Buffer>): Promise<Loaded> {
  return loadRows(raw, rows, `INTO TABLE incoming`, '')
}

/** The same, straight into `reading` under the number of an import: for stretches where nothing is stored. */
export function loadStraight(
  raw: mysql.PoolConnection,
  rows: AsyncIterable<Buffer>,
  importId: number,
): Promise<Loaded> {
  return loadRows(raw, rows, 'INTO TABLE reading', ` SET import_id = ${raw.escape(importId)}`)
}

async function loadRows(
  raw: mysql.PoolConnection,
  rows: AsyncIterable<Buffer>,
  into: string,
  also: string,
): Promise<Loaded> {
  const faults: unknown[] = []
  // A stream that breaks would leave the server waiting for its end, so a fault ends it and is thrown afterwards.
  async function* guarded(): AsyncGenerator<Buffer> {
    try {
      yield* rows
    } catch (error) {
      faults.push(error)
    }
  }
  const loaded = await new Promise<Loaded>((resolve, reject) => {
    raw.query<mysql.ResultSetHeader>(
      {
        sql: `LOAD DATA LOCAL INFILE 'readings' ${into} CHARACTER SET ascii FIELDS TERMINATED BY '\\t' LINES TERMINATED BY '\\n' (${LOADED_COLUMNS})${also}`,
        // The server names a path; it is never opened. These rows are all it gets.
        infileStreamFactory: () => Readable.from(guarded(), { objectMode: true }),
      },
      (error, result) => {
        if (error !== null) reject(error)
        // LOCAL turns every fault into a warning; the caller decides what they mean.
        else resolve({ loaded: result.affectedRows, warnings: result.warningStatus })
      },
    )
  })
  if (faults.length > 0) throw faults[0]
  return loaded
}

export interface LoadedStretch {
  channelId: number
  firstAt: Date
  lastAt: Date
  readingCount: number
}

/** Whether no reading at all is stored for these stretches of channels, ends included. */
export async function areFree(tx: DbOrTx, stretches: readonly LoadedStretch[]): Promise<boolean> {
  if (stretches.length === 0) return true
  const any = stretches.map(
    ({ channelId, firstAt, lastAt }) =>
      sql`(channel_id = ${channelId} AND at BETWEEN ${firstAt} AND ${lastAt})`,
  )
  const [rows] = await tx.execute(sql`SELECT 1 FROM reading WHERE ${sql.join(any, sql` OR `)} LIMIT 1`)
  return (rows as unknown as unknown[]).length === 0
}

/** Notes which stretches an import has been loaded straight into. */
export async function noteStretches(
  tx: DbOrTx,
  importId: number,
  stretches: readonly LoadedStretch[],
): Promise<void> {
  if (stretches.length === 0) return
  await tx.insert(importRange).values(stretches.map((stretch) => ({ importId, ...stretch })))
  await tx
    .insert(rollupDue)
    .values(stretches.map(({ channelId, firstAt, lastAt }) => ({ channelId, fromAt: firstAt, toAt: lastAt })))
}

/** Runs a statement and says how many rows it changed. */
export async function affected(tx: DbOrTx, statement: ReturnType<typeof sql>): Promise<number> {
  const [result] = await tx.execute(statement)
  return (result as unknown as mysql.ResultSetHeader).affectedRows
}

export interface MergeCounts {
  /** Readings stored. */
  stored: number
  /** Held already: same channel, instant, value and quality. */
  held: number
  /** Stored beside a different reading of the same channel and instant. */
  conflicting: number
}

/** Moves `incoming` into `reading` under the number of the import. */
export async function mergeIncoming(tx: DbOrTx, importId: number): Promise<MergeCounts> {
  // What is held goes aside and not away: should the import that holds it be withdrawn, it takes its place.
  const held = await affected(
    tx,
    sql`INSERT INTO reading_aside (import_id, channel_id, at, seq, value, bound, quality, marks, line_no)
      SELECT DISTINCT ${importId}, incoming.channel_id, incoming.at, incoming.seq, incoming.value, incoming.bound,
        incoming.quality, incoming.marks, incoming.line_no
      FROM incoming JOIN reading ON reading.channel_id = incoming.channel_id AND reading.at = incoming.at
      WHERE reading.value <=> incoming.value AND reading.bound <=> incoming.bound AND reading.quality = incoming.quality`,
  )
  if (held > 0) {
    await tx.execute(sql`DELETE incoming FROM incoming JOIN reading_aside AS aside
      ON aside.import_id = ${importId} AND aside.channel_id = incoming.channel_id AND aside.at = incoming.at
        AND aside.line_no = incoming.line_no`)
  }
  await tx.execute(sql`CREATE TEMPORARY TABLE clash (PRIMARY KEY (channel_id, at)) ENGINE=InnoDB
    SELECT reading.channel_id, reading.at, MAX(reading.seq) AS top FROM incoming
    JOIN reading ON reading.channel_id = incoming.channel_id AND reading.at = incoming.at
    GROUP BY reading.channel_id, reading.at`)
  // From the highest number down, or a row would meet the one that has yet to move up.
  const conflicting = await affected(
    tx,
    sql`UPDATE incoming SET marks = marks | ${MARKS.conflict},
      seq = seq + 1 + (SELECT top FROM clash WHERE clash.channel_id = incoming.channel_id AND clash.at = incoming.at)
      WHERE EXISTS (SELECT 1 FROM clash WHERE clash.channel_id = incoming.channel_id AND clash.at = incoming.at)
      ORDER BY seq DESC`,
  )
  await tx.execute(sql`UPDATE reading JOIN clash ON clash.channel_id = reading.channel_id AND clash.at = reading.at
    SET reading.marks = reading.marks | ${MARKS.conflict}`)
  // Several readings of one instant inside the file: the first of them gets its mark here too.
  await tx.execute(sql`UPDATE incoming JOIN
      (SELECT channel_id, at FROM incoming GROUP BY channel_id, at HAVING COUNT(*) > 1) AS several
      ON several.channel_id = incoming.channel_id AND several.at = incoming.at
    SET incoming.marks = incoming.marks | ${MARKS.conflict}`)
  const stored = await affected(
    tx,
    sql`INSERT INTO reading (channel_id, at, seq, value, bound, quality, marks, import_id, line_no)
      SELECT channel_id, at, seq, value, bound, quality, marks, ${importId}, line_no FROM incoming`,
  )
  await tx.execute(sql`INSERT INTO import_range (import_id, channel_id, first_at, last_at, reading_count)
    SELECT ${importId}, channel_id, MIN(at), MAX(at), COUNT(*) FROM incoming GROUP BY channel_id`)
  await tx.execute(sql`INSERT INTO rollup_due (channel_id, from_at, to_at)
    SELECT channel_id, first_at, last_at FROM import_range WHERE import_id = ${importId}`)
  await tx.execute(sql`DROP TEMPORARY TABLE IF EXISTS incoming, clash`)
  return { stored, held, conflicting }
}
