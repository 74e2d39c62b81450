import { inArray } from 'drizzle-orm'
import type { PermitTimes } from '../../domain/permit-clock.ts'
import type { DbOrTx } from '../client.server.ts'
import { permit } from '../schema/index.ts'

/** The times of every permit to which time alone may do something. */
export async function listPermitTimes(db: DbOrTx): Promise<(PermitTimes & { number: string })[]> {
  return db
    .select({
      number: permit.number,
      state: permit.state,
      windowFrom: permit.windowFrom,
      windowTo: permit.windowTo,
      currentUntil: permit.currentUntil,
    })
    .from(permit)
    .where(inArray(permit.state, ['approved', 'issued', 'suspended']))
}
