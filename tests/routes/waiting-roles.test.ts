/** Who may confirm a role finds the way to those that wait: from every page when there are any, else from the settings. */
import { beforeEach, expect, test } from 'vitest'
import type { Role } from '#app/domain/roles.ts'
import { machineNow } from '#app/machine-time.server.ts'
import { grantRole } from '#app/services/grants.server.ts'
import { request, signIn } from '#tests/support/app.ts'
import { MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createClock, createSite, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const LINK = 'href="/people/waiting"'

beforeEach(async () => {
  await createSite(db)
  await createClock(db, { baseAt: MORNING, baseMachineAt: machineNow() })
})

async function pageOf(role: Role, path: string): Promise<string> {
  const { personId } = await createUser(db, { roles: [role] })
  const response = await request(path, { cookie: await signIn(personId) })
  expect(response.status).toBe(200)
  return response.text()
}

test('a role that waits shows in the menu of those who may confirm it, and only theirs', async () => {
  const juniper = await createUser(db, { roles: ['administrator'] })
  await grantRole(db, juniper, MORNING, juniper.personId, {
    role: 'manager',
    startsAt: MORNING,
    until: null,
    reason: 'Covers in the holidays',
  })
  for (const role of ['safety-officer', 'manager', 'administrator'] as const) {
    const page = await pageOf(role, '/logbook')
    expect(page).toContain(LINK)
    expect(page).toContain('One role waits for you')
  }
  for (const role of ['technician', 'engineer', 'contributor'] as const)
    expect(await pageOf(role, '/logbook')).not.toContain(LINK)
  const own = await request('/logbook', { cookie: await signIn(juniper.personId) })
  expect(await own.text()).not.toContain(LINK)
})

test('with nothing waiting the settings still lead there', async () => {
  expect(await pageOf('safety-officer', '/logbook')).not.toContain(LINK)
  expect(await pageOf('safety-officer', '/account')).toContain(LINK)
  expect(await pageOf('technician', '/account')).not.toContain(LINK)
})
