import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { signedAct } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { signAct, useSignedAct } from '#app/services/signature.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createUser, PASSWORD } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()

const subject = { meaning: 'vent a segment', subjectKind: 'segment', subjectId: 'SG-01' }
const now = MORNING

test('a signature given with the own password is used once, at the time of the act', async () => {
  const actor = await createUser(db, { roles: ['technician'] })
  const signed = await signAct(db, { actor, password: PASSWORD, now, ...subject })
  const used = await tx(db, (inside) =>
    useSignedAct(inside, signed, { actor, now: after(now, 2), ...subject }),
  )
  expect(used).toEqual({ id: signed.id })
  const [row] = await db.select().from(signedAct)
  expect(row).toMatchObject({ personId: actor.personId, at: now, usedAt: after(now, 2), ...subject })
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now, ...subject })),
  ).rejects.toMatchObject({
    code: 'signature-refused',
    message: expect.stringContaining('already been used'),
  })
})

test('a wrong password is refused at its field and leaves no signature', async () => {
  const actor = await createUser(db)
  await expect(signAct(db, { actor, password: `${PASSWORD}x`, now, ...subject })).rejects.toMatchObject({
    code: 'signature-refused',
    status: 422,
    fields: { password: [expect.stringContaining('not your password')] },
  })
  expect(await db.select().from(signedAct)).toEqual([])
})

test("another person's password does not sign", async () => {
  const actor = await createUser(db, { noPassword: true })
  await expect(signAct(db, { actor, password: PASSWORD, now, ...subject })).rejects.toMatchObject({
    code: 'signature-refused',
    message: expect.stringContaining('has no password'),
  })
})

test('an account that has ended cannot sign', async () => {
  const actor = await createUser(db, { endsAt: now })
  await expect(signAct(db, { actor, password: PASSWORD, now, ...subject })).rejects.toMatchObject({
    code: 'signature-refused',
    message: expect.stringContaining('has ended'),
  })
  await expect(
    signAct(db, { actor, password: PASSWORD, now: after(now, -1), ...subject }),
  ).resolves.toBeDefined()
})

test('after five wrong passwords the right one has to wait too, for this person only', async () => {
  const actor = await createUser(db)
  const tries = Array.from({ length: 7 }, () =>
    signAct(db, { actor, password: 'guess', now, ...subject }).catch((error) => error.code),
  )
  const codes = await Promise.all(tries)
  expect(codes.filter((code) => code === 'signature-refused')).toHaveLength(5)
  expect(codes.filter((code) => code === 'rate-limited')).toHaveLength(2)
  await expect(signAct(db, { actor, password: PASSWORD, now, ...subject })).rejects.toMatchObject({
    status: 429,
  })
  const somebodyElse = await createUser(db)
  await expect(
    signAct(db, { actor: somebodyElse, password: PASSWORD, now, ...subject }),
  ).resolves.toBeDefined()
})

test.each([
  ['another meaning', { meaning: 'heat a segment' }],
  ['another kind of thing', { subjectKind: 'valve' }],
  ['another thing', { subjectId: 'SG-02' }],
])('a signature for one act does not serve for %s', async (_what, change) => {
  const actor = await createUser(db)
  const signed = await signAct(db, { actor, password: PASSWORD, now, ...subject })
  const use = { actor, now, ...subject, ...change }
  await expect(tx(db, (inside) => useSignedAct(inside, signed, use))).rejects.toMatchObject({
    code: 'signature-refused',
    message: expect.stringContaining('given for something else ("vent a segment")'),
  })
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now, ...subject })),
  ).resolves.toBeDefined()
})

test("nobody acts on another person's signature, or on one that was never given", async () => {
  const [signer, actor] = [await createUser(db), await createUser(db)]
  const signed = await signAct(db, { actor: signer, password: PASSWORD, now, ...subject })
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now, ...subject })),
  ).rejects.toMatchObject({
    code: 'signature-refused',
  })
  await expect(
    tx(db, (inside) => useSignedAct(inside, { id: signed.id + 999 }, { actor, now, ...subject })),
  ).rejects.toMatchObject({
    code: 'signature-refused',
    message: expect.stringContaining('no such signature'),
  })
})

test("a signature older than five minutes of the machine's time has to be given again", async () => {
  const actor = await createUser(db)
  const signed = await signAct(db, { actor, password: PASSWORD, now, ...subject })
  const [row] = await db.select().from(signedAct)
  const age = async (seconds: number) =>
    db
      .update(signedAct)
      .set({ machineAt: after(row?.machineAt as Date, -seconds) })
      .where(eq(signedAct.id, signed.id))
  await age(301)
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now, ...subject })),
  ).rejects.toMatchObject({
    message: expect.stringContaining('five minutes old'),
  })
  await age(290)
  // The demo clock may jump by days in between: that does not age a signature.
  const jumped = after(now, 40 * 86_400)
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now: jumped, ...subject })),
  ).resolves.toBeDefined()
})

test('an act that fails leaves its signature free for another try', async () => {
  const actor = await createUser(db)
  const signed = await signAct(db, { actor, password: PASSWORD, now, ...subject })
  const failing = tx(db, async (inside) => {
    await useSignedAct(inside, signed, { actor, now, ...subject })
    throw new Error('the act could not be done')
  })
  await expect(failing).rejects.toThrow('could not be done')
  await expect(
    tx(db, (inside) => useSignedAct(inside, signed, { actor, now, ...subject })),
  ).resolves.toBeDefined()
})

test('of two uses at once on two connections exactly one succeeds', async () => {
  const actor = await createUser(db)
  const signed = await signAct(db, { actor, password: PASSWORD, now, ...subject })
  const use = (handle: typeof db) =>
    tx(handle, async (inside) => {
      const act = await useSignedAct(inside, signed, { actor, now, ...subject })
      await new Promise((resolve) => setTimeout(resolve, 100))
      return act
    })
  const results = await Promise.allSettled([use(db), use(other)])
  expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
})
