/** What the tests that kill processes in the middle of the log intake share: a file, and what has to hold afterwards. */
import { createHash } from 'node:crypto'
import { asc, sql } from 'drizzle-orm'
import { expect } from 'vitest'
import type { Db } from '#app/db/client.server.ts'
import { importFile, importRange, reading } from '#app/db/schema/index.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { claimJob, LEASE_MS, runJob } from '#app/services/jobs.server.ts'
import { JOB_HANDLERS } from '#app/worker/jobs/handlers.server.ts'

/** Seeds of this run: five, or as many as FAULT_SEEDS says (`npm run soak` asks for fifty). */
export const FAULT_SEEDS = Array.from({ length: Number(process.env.FAULT_SEEDS ?? '5') }, (_, i) => i + 1)

/** A share of a span that is the same for a seed at every run, from 0 to below 1. */
export function shareOf(seed: number, salt: number): number {
  return createHash('sha256').update(`${seed} ${salt}`).digest().readUInt32BE(0) / 2 ** 32
}

export function pause(ms: number): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve, ms))
}

const atOf = (i: number, startMs: number) => startMs + i * 1_000
const valueText = (i: number, startMs: number) =>
  `${1 + (i % 7)}.${(i + Math.floor(startMs / 1_000_000)) % 10}e-07`

/** A file of the long layout for channel HC-16A, one reading a second, of which every line is known. */
export function longFile(rows: number, startMs = 1_794_204_000_000): Uint8Array {
  const lines = Array.from(
    { length: rows },
    (_, i) => `${atOf(i, startMs)},HC-16A,${valueText(i, startMs)},Pa,OK`,
  )
  return new TextEncoder().encode(`epoch_ms,channel,value,unit,status\n${lines.join('\n')}\n`)
}

const hash = (lines: string[]) => createHash('sha256').update(lines.join('\n')).digest('hex')

/** The digest of what a `longFile` holds, worked out from its making and not by reading it. */
export function longDigest(rows: number, startMs = 1_794_204_000_000): string {
  return hash(
    Array.from(
      { length: rows },
      (_, i) => `${atOf(i, startMs)} ${Number(valueText(i, startMs))} ${i + 2} 0 0`,
    ),
  )
}

/** The digest of everything that is stored under an import: instant, value, line, number and marks. */
export async function storedDigest(db: Db, importId: number): Promise<string> {
  const rows = await db
    .select()
    .from(reading)
    .where(sql`${reading.importId} = ${importId}`)
    .orderBy(asc(reading.channelId), asc(reading.at), asc(reading.seq))
  return hash(
    rows.map(({ at, value, lineNo, seq, marks }) => `${at.getTime()} ${value} ${lineNo} ${seq} ${marks}`),
  )
}

/**
 * Every import is whole or not there: an accepted one has as many readings as its report says, a waiting one has none;
 * no reading belongs to no accepted import, none is stored twice.
 */
export async function expectWhole(db: Db): Promise<void> {
  const imports = await db.select().from(importFile)
  const rows = (await db.execute(
    sql`SELECT import_id AS importId, COUNT(*) AS n, COUNT(DISTINCT channel_id, at) AS instants FROM reading GROUP BY import_id`,
  )) as unknown as [{ importId: number; n: number; instants: number }[], unknown]
  const counts = new Map(rows[0].map((row) => [Number(row.importId), row]))
  const ranges = await db.select().from(importRange)
  for (const { id, state, readingCount, readOut } of imports) {
    const found = counts.get(id)
    const stored = Number(found?.n ?? 0)
    const noted = ranges.filter(({ importId }) => importId === id).reduce((n, r) => n + r.readingCount, 0)
    counts.delete(id)
    if (state !== 'accepted') {
      expect({ id, state, stored, noted }).toEqual({ id, state, stored: 0, noted: 0 })
      continue
    }
    const reported = (readOut as { readings: { total: number } }).readings.total
    expect({ id, stored, noted, reported, instants: Number(found?.instants) }).toEqual({
      id,
      stored: readingCount,
      noted: readingCount,
      reported: readingCount,
      instants: readingCount,
    })
  }
  expect([...counts.keys()]).toEqual([])
}

/** Does what a worker does that comes after the lease of a dead one, until nothing is left to do. */
export async function takeOver(db: Db): Promise<void> {
  const later = new Date(machineNow().getTime() + 20 * LEASE_MS)
  for (;;) {
    const held = await claimJob(db, later)
    if (held === null) return
    expect(await runJob(db, held, JOB_HANDLERS, { signal: new AbortController().signal })).toBe('done')
  }
}
