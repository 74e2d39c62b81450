/**
 * Months of the readings table, made ahead. Until a month has its own partition its readings go to the last one, which
 * takes everything; nothing is lost when the worker has been off, only moved later.
 */
import type { Db } from '../db/client.server.ts'
import { listReadingPartitions, splitLastPartition } from '../db/queries/partitions.server.ts'

const MONTHS_AHEAD = 3

function startOfMonth(at: Date, plusMonths = 0): Date {
  return new Date(Date.UTC(at.getUTCFullYear(), at.getUTCMonth() + plusMonths, 1))
}

function nameOf(month: Date): string {
  return `p_${month.toISOString().slice(0, 7).replace('-', '_')}`
}

/**
 * Makes a partition for every UTC month from the end of the present ones to three months after `now`.
 *
 * @returns names of the partitions made, oldest first; empty when there was nothing to do
 */
export async function createReadingPartitions(db: Db, now: Date): Promise<string[]> {
  const missing = await missingMonths(db, now)
  if (missing === null) return []
  try {
    await splitLastPartition(db, missing.lastName, missing.months)
  } catch (error) {
    // Another worker may have made them between the look and the change; anything else is an error.
    if ((await missingMonths(db, now)) === null) return []
    throw error
  }
  return missing.months.map(({ name }) => name)
}

async function missingMonths(
  db: Db,
  now: Date,
): Promise<{ lastName: string; months: { name: string; below: Date }[] } | null> {
  const partitions = await listReadingPartitions(db)
  const last = partitions.at(-1)
  const end = partitions.at(-2)?.below
  if (last === undefined || last.below !== null || end === undefined || end === null) {
    throw new Error(
      `The readings table is not partitioned as expected: found ${JSON.stringify(partitions)}, expected months and then one partition up to MAXVALUE.`,
    )
  }
  const months: { name: string; below: Date }[] = []
  const upTo = startOfMonth(now, MONTHS_AHEAD + 1)
  for (let month = end; month < upTo; month = startOfMonth(month, 1)) {
    months.push({ name: nameOf(month), below: startOfMonth(month, 1) })
  }
  return months.length === 0 ? null : { lastName: last.name, months }
}
