import { sql } from 'drizzle-orm'
import type { DbOrTx } from '../client.server.ts'

export interface Partition {
  name: string
  /** First instant that no longer belongs to it; null for the last one, which takes everything after the others. */
  below: Date | null
}

/** Partitions of the readings table, oldest first. */
export async function listReadingPartitions(db: DbOrTx): Promise<Partition[]> {
  const [rows] = await db.execute(sql`
    SELECT PARTITION_NAME AS name, PARTITION_DESCRIPTION AS bound
    FROM information_schema.PARTITIONS
    WHERE TABLE_SCHEMA = DATABASE() AND TABLE_NAME = 'reading' AND PARTITION_NAME IS NOT NULL
    ORDER BY PARTITION_ORDINAL_POSITION`)
  return (rows as unknown as { name: string; bound: string }[]).map(({ name, bound }) => {
    // The server writes a bound as it was given, quotes included: '2025-09-01', or MAXVALUE.
    const day = /^'(\d{4}-\d{2}-\d{2})/.exec(bound)?.[1]
    return { name, below: day === undefined ? null : new Date(`${day}T00:00:00.000Z`) }
  })
}

/**
 * Cuts months off the front of the last partition. Rows already there move to where they belong. Waits at most ten
 * seconds for readers and writers of the table, because everybody after it would wait as well.
 */
export async function splitLastPartition(
  db: DbOrTx,
  lastName: string,
  months: readonly { name: string; below: Date }[],
): Promise<void> {
  const parts = months.map(
    ({ name, below }) => `PARTITION ${name} VALUES LESS THAN ('${below.toISOString().slice(0, 10)}')`,
  )
  parts.push(`PARTITION ${lastName} VALUES LESS THAN (MAXVALUE)`)
  await db.execute(
    sql.raw(
      `SET STATEMENT lock_wait_timeout = 10 FOR ALTER TABLE reading REORGANIZE PARTITION ${lastName} INTO (${parts.join(', ')})`,
    ),
  )
}
