/** Deviations of the bakes that are over, noted by the product's own code from the readings there are of them. */
import type { DbOrTx } from '../../app/db/client.server.ts'
import { listSegments, listStates } from '../../app/db/queries/segments.server.ts'
import { bakesIn } from '../../app/domain/bake-history.ts'
import { noteDeviationsOf } from '../../app/services/bake-deviations.server.ts'
import { DEMO_START } from '../demo-time.ts'

/** Returns how many were noted. Those of the bakes under way are left to the worker. */
export async function seedBakeDeviations(db: DbOrTx): Promise<number> {
  let count = 0
  for (const segment of await listSegments(db, DEMO_START)) {
    for (const bake of bakesIn(await listStates(db, segment.id))) {
      if (bake.coldFrom !== null) count += await noteDeviationsOf(db, segment, bake, bake.coldFrom)
    }
  }
  return count
}
