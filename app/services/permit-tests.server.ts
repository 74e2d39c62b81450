/** Tests of a permit as its rules and pages are told of them. They are written down by permit-site.server.ts. */
import type { DbOrTx } from '../db/client.server.ts'
import { listPermitTests, type PermitTestRow } from '../db/queries/permit-tests.server.ts'
import type { PermitRow } from '../db/queries/permits.server.ts'
import type { RequiredTest } from '../domain/permit-content.ts'
import type { TestFact } from '../domain/permit-facts.ts'
import { answers, limitsText, testFacts } from '../domain/permit-tests.ts'
import { instantWriter } from './site.server.ts'

/** Each test that the permit asks for, with the last result and whether it still counts. */
export async function readTests(db: DbOrTx, permit: PermitRow, now: Date): Promise<TestFact[]> {
  if (permit.content.tests.length === 0) return []
  const [taken, when] = await Promise.all([listPermitTests(db, permit.id), instantWriter(db)])
  return testFacts(permit.content.tests, taken, now, when)
}

/** One line of the table of tests: what the permit asks for, and the last result. */
export interface TestLine extends TestFact {
  required: RequiredTest
  unit: string
  /** In words; empty where the tester's word decides. */
  limits: string
  everyHours: number | null
  last: PermitTestRow | null
}

/** What a permit asks to be tested with the last result of each. */
export async function readTestTable(db: DbOrTx, permit: PermitRow, now: Date): Promise<TestLine[]> {
  const [facts, taken] = await Promise.all([readTests(db, permit, now), listPermitTests(db, permit.id)])
  return permit.content.tests.flatMap((required, index) => {
    const fact = facts[index]
    if (fact === undefined) return []
    const { unit, everyHours } = required
    const last = taken.find((test) => answers(required, test) && test.takenAt <= now) ?? null
    return [{ ...fact, required, unit, limits: limitsText(required), everyHours, last }]
  })
}
