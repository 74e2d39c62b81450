/** Puts readings into their table by LOAD DATA, which is many times faster than inserts. */
import { Readable } from 'node:stream'
import type mysql from 'mysql2'
import { type Quality, qualityCode } from '../../app/domain/readings.ts'

export interface StoredReading {
  channelId: number
  atMs: number
  seq: number
  value: number | null
  bound: number | null
  quality: Quality
  marks: number
  importId: number
  lineNo: number
}

const BLOCK = 2_000

/** First and last instant of each channel, ms. */
type Stretches = Map<number, { firstMs: number; lastMs: number }>

function* blocks(readings: Iterable<StoredReading>, seen: Stretches): Generator<Buffer> {
  let lines: string[] = []
  // The same instants come back for every channel.
  const times = new Map<number, string>()
  for (const one of readings) {
    const stretch = seen.get(one.channelId)
    if (stretch === undefined) seen.set(one.channelId, { firstMs: one.atMs, lastMs: one.atMs })
    else {
      stretch.firstMs = Math.min(stretch.firstMs, one.atMs)
      stretch.lastMs = Math.max(stretch.lastMs, one.atMs)
    }
    let time = times.get(one.atMs)
    if (time === undefined) {
      time = new Date(one.atMs).toISOString().slice(0, 23).replace('T', ' ')
      times.set(one.atMs, time)
    }
    const number = (value: number | null) => (value === null ? '\\N' : String(value))
    lines.push(
      `${one.channelId}\t${time}\t${one.seq}\t${number(one.value)}\t${number(one.bound)}\t${qualityCode(one.quality)}\t${one.marks}\t${one.importId}\t${one.lineNo}\n`,
    )
    if (lines.length === BLOCK) {
      yield Buffer.from(lines.join(''), 'latin1')
      lines = []
    }
  }
  if (lines.length > 0) yield Buffer.from(lines.join(''), 'latin1')
}

/**
 * Streams readings into the table. A row that is there already stays as it is: the demo's readings are the same at
 * every run, so a run that was cut short is finished by the next.
 *
 * @returns how many rows were new
 */
export async function loadReadings(pool: mysql.Pool, readings: Iterable<StoredReading>): Promise<number> {
  const seen: Stretches = new Map()
  const stored = await new Promise<number>((resolve, reject) => {
    pool.query<mysql.ResultSetHeader>(
      {
        sql: `LOAD DATA LOCAL INFILE 'readings' IGNORE INTO TABLE reading CHARACTER SET latin1
          (channel_id, at, seq, value, bound, quality, marks, import_id, line_no)`,
        infileStreamFactory: () => Readable.from(blocks(readings, seen)),
      },
      (error, result) => {
        if (error !== null) reject(error)
        else resolve(result.affectedRows)
      },
    )
  })
  // The worker makes rollups of these stretches.
  const due = [...seen].map(([id, { firstMs, lastMs }]) => [id, new Date(firstMs), new Date(lastMs)])
  if (due.length > 0)
    await pool.promise().query('INSERT INTO rollup_due (channel_id, from_at, to_at) VALUES ?', [due])
  return stored
}
