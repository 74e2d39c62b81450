/** What stands against the demo's permits on its morning. */
import { afterAll, beforeAll, expect, test } from 'vitest'
import { closeDb, type Db, getDb } from '#app/db/client.server.ts'
import { findPermit } from '#app/db/queries/permits.server.ts'
import { readConflicts } from '#app/services/permit-conflicts.server.ts'
import { MORNING } from '../support/clock.ts'
import { seededDemo } from '../support/demo-database.ts'

let db: Db
beforeAll(async () => {
  process.env.DATABASE_URL = await seededDemo()
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  db = getDb()
}, 600_000)
afterAll(closeDb)

async function conflictsOf(number: string) {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error(`The demo has no ${number}`)
  return readConflicts(db, permit, MORNING)
}

test('HSP-2026-032 is blocked by the licence that ends on 20 November, and has work on the power to know of', async () => {
  const found = await conflictsOf('HSP-2026-032')
  expect(found.map(({ rule, effect }) => `${rule} ${effect}`)).toEqual(['K8 block', 'K11 warning'])
  expect(found[0]?.text).toMatch(/^Wendel Quarrie, electrician: .*QE-1187 ends with the day 2026-11-20/)
  expect(found[0]?.text).toContain('the window runs to 2026-11-25 18:00')
  expect(found[0]?.wayOut).toMatch(/another electrician.*end the window by 2026-11-21 00:00/)
})

test.each(['HSP-2026-030', 'HSP-2026-031'])('nothing stands against the live permit %s', async (number) => {
  expect(await conflictsOf(number)).toEqual([])
})

test('a permit that has ended has no conflicts', async () => {
  expect(await conflictsOf('HSP-2026-028')).toEqual([])
  expect(await conflictsOf('HSP-2026-029')).toEqual([])
})
