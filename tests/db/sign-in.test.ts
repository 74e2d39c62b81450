import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import {
  closeSession,
  openSession,
  purgeSessions,
  readSession,
  sessionCookie,
} from '#app/auth/session.server.ts'
import { authenticator } from '#app/auth/sign-in.server.ts'
import { roleGrant, session } from '#app/db/schema/index.ts'
import { type Role, rolesAt } from '#app/domain/roles.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createClock, createUser, PASSWORD } from '#tests/support/factories.ts'

const db = freshDatabase()
beforeEach(() => createClock(db, { baseMachineAt: new Date() }))

function signIn(email: string, password: string): Promise<{ personId: number }> {
  const body = new URLSearchParams({ email, password })
  return authenticator.authenticate('form', new Request('http://site.test/sign-in', { method: 'POST', body }))
}

/** A request that carries the cookie of a Set-Cookie header. */
function requestWith(setCookie: string): Request {
  return new Request('http://site.test/', { headers: { Cookie: setCookie.split(';')[0] ?? '' } })
}

async function refusalOf(work: Promise<unknown>): Promise<{ code: string; message: string }> {
  const error = await work.then(
    () => null,
    (thrown: unknown) => thrown,
  )
  expect(error).toMatchObject({ code: expect.any(String), message: expect.any(String) })
  return error as { code: string; message: string }
}

test('the right address and password sign in, in any case of the address', async () => {
  const user = await createUser(db)
  expect(await signIn(user.email, PASSWORD)).toEqual({ personId: user.personId })
  expect(await signIn(`  ${user.email.toUpperCase()} `, PASSWORD)).toEqual({ personId: user.personId })
})

test('a wrong password, an unknown address and a person without a password get one and the same answer', async () => {
  const user = await createUser(db)
  const noPassword = await createUser(db, { noPassword: true })
  const refusals = [
    await refusalOf(signIn(user.email, 'wrong')),
    await refusalOf(signIn('nobody@example.test', PASSWORD)),
    await refusalOf(signIn(noPassword.email, PASSWORD)),
  ]
  expect(refusals.map(({ code }) => code)).toEqual(['not-signed-in', 'not-signed-in', 'not-signed-in'])
  expect(new Set(refusals.map(({ message }) => message)).size).toBe(1)
})

test('ten wrong passwords stop an address for a while, known or not, and no other address', async () => {
  const [user, other] = [await createUser(db), await createUser(db)]
  for (const email of [user.email, 'no.such.person@example.test']) {
    for (let n = 0; n < 10; n += 1)
      expect((await refusalOf(signIn(email, 'guess'))).code).toBe('not-signed-in')
    expect(await refusalOf(signIn(email.toUpperCase(), PASSWORD))).toMatchObject({
      code: 'rate-limited',
      message: expect.stringContaining('Wait 5 minutes'),
    })
  }
  expect(await signIn(other.email, PASSWORD)).toEqual({ personId: other.personId })
})

test('other spellings of one address share its ten tries', async () => {
  const user = await createUser(db, { name: 'Zoe' })
  for (let n = 0; n < 5; n += 1) {
    expect((await refusalOf(signIn(user.email, 'guess'))).code).toBe('not-signed-in')
    expect((await refusalOf(signIn('Zoë@example.test', 'guess'))).code).toBe('not-signed-in')
  }
  expect((await refusalOf(signIn('ZOÈ@example.test', PASSWORD))).code).toBe('rate-limited')
})

test('an account that has ended by the product clock is told so, but only with the right password', async () => {
  const user = await createUser(db, { endsAt: MORNING })
  expect((await refusalOf(signIn(user.email, PASSWORD))).message).toContain('has ended')
  expect((await refusalOf(signIn(user.email, 'wrong'))).message).not.toContain('ended')
})

test('empty fields are named', async () => {
  expect(await refusalOf(signIn('', ''))).toMatchObject({
    code: 'bad-input',
    fields: { email: [expect.any(String)], password: [expect.any(String)] },
  })
})

test('a session brings the person back, with a cookie scripts and other sites cannot use', async () => {
  const user = await createUser(db, { roles: ['engineer'] })
  const setCookie = await openSession(db, user.personId, { userAgent: 'a browser' })
  expect(setCookie).toMatch(/; HttpOnly/)
  expect(setCookie).toMatch(/; SameSite=Lax/)
  expect(await readSession(db, requestWith(setCookie), MORNING)).toMatchObject({
    id: user.personId,
    name: user.name,
    pressureUnit: 'Pa',
    theme: 'system',
    grants: [{ role: 'engineer', endsAt: null, revokedAt: null }],
  })
})

test('the table holds no token that could be put into a cookie', async () => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const token: unknown = await sessionCookie().parse(setCookie.split(';')[0] ?? '')
  const [row] = await db.select().from(session)
  expect(row?.tokenHash).toMatch(/^[0-9a-f]{64}$/)
  expect(row?.tokenHash).not.toBe(token)
})

test('a cookie that is changed, forged or missing is nobody', async () => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const [pair = ''] = setCookie.split(';')
  const changed = pair.slice(0, -3) + (pair.endsWith('AAA') ? 'BBB' : 'AAA')
  for (const cookie of [changed, 'ebbline_session=abc', '']) {
    const request = new Request('http://site.test/', { headers: { Cookie: cookie } })
    expect(await readSession(db, request, MORNING)).toBeNull()
  }
  const unknown = await sessionCookie().serialize('a token that was never given')
  expect(await readSession(db, requestWith(unknown), MORNING)).toBeNull()
})

test('signing out ends the session itself, not only the cookie', async () => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const elsewhere = await openSession(db, user.personId, { userAgent: '' })
  expect(await closeSession(db, requestWith(setCookie))).toMatch(/Max-Age=0/)
  expect(await readSession(db, requestWith(setCookie), MORNING)).toBeNull()
  expect(await readSession(db, requestWith(elsewhere), MORNING)).not.toBeNull()
})

test.each([
  ['used 11 h 59 min ago', { idleMinutes: 719, leftMinutes: 60 }, true],
  ['not used for 12 h 1 min', { idleMinutes: 721, leftMinutes: 60 }, false],
  ['at its end', { idleMinutes: 0, leftMinutes: 0 }, false],
])('a session %s', async (_what, { idleMinutes, leftMinutes }, alive) => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const machine = new Date()
  await db.update(session).set({
    lastSeenAt: after(machine, -idleMinutes * 60),
    expiresAt: after(machine, leftMinutes * 60),
  })
  const person = await readSession(db, requestWith(setCookie), MORNING)
  expect(person !== null).toBe(alive)
})

test.each([
  ['used 29 min ago', 29, true],
  ['not used for 31 min', 31, false],
])('a session on a shared device %s', async (_what, idleMinutes, alive) => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '', shared: true })
  // Without a lifetime of its own the cookie goes when the browser is closed.
  expect(setCookie).not.toMatch(/Max-Age|Expires/i)
  await db.update(session).set({ lastSeenAt: after(new Date(), -idleMinutes * 60) })
  expect((await readSession(db, requestWith(setCookie), MORNING)) !== null).toBe(alive)
  // The leftovers of the one are cleared away, those of the other are not.
  expect(await purgeSessions(db)).toBe(alive ? 0 : 1)
})

test('a used session is noted as seen, at most once a minute', async () => {
  const user = await createUser(db)
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const seenAt = async () => (await db.select().from(session))[0]?.lastSeenAt as Date
  const first = await seenAt()
  await readSession(db, requestWith(setCookie), MORNING)
  expect(await seenAt()).toEqual(first)
  await db.update(session).set({ lastSeenAt: after(first, -120) })
  await readSession(db, requestWith(setCookie), MORNING)
  expect((await seenAt()).getTime()).toBeGreaterThanOrEqual(first.getTime())
})

test('an account that ends is signed out at that instant of the product clock', async () => {
  const user = await createUser(db, { endsAt: after(MORNING, 60) })
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  expect(await readSession(db, requestWith(setCookie), after(MORNING, 59))).not.toBeNull()
  expect(await readSession(db, requestWith(setCookie), after(MORNING, 60))).toBeNull()
})

test('roles follow their dates: granted later, ended, revoked, and several at once', async () => {
  const user = await createUser(db, { roles: ['technician'] })
  const grant = (role: Role, startsAt: Date, endsAt: Date | null = null) =>
    db
      .insert(roleGrant)
      .values({ personId: user.personId, role, startsAt, endsAt, grantedAt: MORNING, reason: 'for a test' })
  await grant('engineer', after(MORNING, 100), after(MORNING, 200))
  await grant('manager', after(MORNING, 150))
  const setCookie = await openSession(db, user.personId, { userAgent: '' })
  const rolesAfter = async (seconds: number) => {
    const at = after(MORNING, seconds)
    const person = await readSession(db, requestWith(setCookie), at)
    return rolesAt(person?.grants ?? [], at)
  }
  expect(await rolesAfter(0)).toEqual(['technician'])
  expect(await rolesAfter(100)).toEqual(['technician', 'engineer'])
  expect(await rolesAfter(199)).toEqual(['technician', 'engineer', 'manager'])
  expect(await rolesAfter(200)).toEqual(['technician', 'manager'])
  await db
    .update(roleGrant)
    .set({ revokedAt: after(MORNING, 300), revokedBy: user.personId, revokeReason: 'left' })
    .where(eq(roleGrant.role, 'manager'))
  expect(await rolesAfter(299)).toEqual(['technician', 'manager'])
  expect(await rolesAfter(300)).toEqual(['technician'])
})
