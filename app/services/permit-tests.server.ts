/** Tests of a permit as its rules and pages are told of them. They are written down by permit-site.server.ts. */
import type { DbOrTx } from '../db/client.server.ts'
import { listPermitTests } from '../db/queries/permit-tests.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import type { TestFact } from '../domain/permit-facts.ts'
import { testFacts } from '../domain/permit-tests.ts'
import { instantWriter } from './site.server.ts'

/** Each test that the permit asks for, with the last result and whether it still counts. */
export async function readTests(db: DbOrTx, permit: PermitRow, now: Date): Promise<TestFact[]> {
  if (permit.content.tests.length === 0) return []
  const [taken, when] = await Promise.all([listPermitTests(db, permit.id), instantWriter(db)])
  return testFacts(permit.content.tests, taken, now, when)
}
