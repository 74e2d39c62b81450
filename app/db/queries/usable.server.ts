import { type SQL, sql } from 'drizzle-orm'
import { qualityCode, UNTIMED_MARKS, USABLE_QUALITIES } from '../../domain/readings.ts'
import { reading } from '../schema/index.ts'

/** SQL for "may be used as a measured value". */
export const usable: SQL = sql`${reading.quality} IN (${sql.join(
  USABLE_QUALITIES.map((quality) => sql`${qualityCode(quality)}`),
  sql`, `,
)})
  AND (${reading.marks} & ${UNTIMED_MARKS}) = 0 AND ${reading.value} IS NOT NULL`
