import { eq } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import type { Db } from '#app/db/client.server.ts'
import { findPermit, findPermitVersion, listPermitActs } from '#app/db/queries/permits.server.ts'
import { permit as permitTable, permitVersion, signedAct } from '#app/db/schema/index.ts'
import { DomainError } from '#app/domain/errors.ts'
import type { FormAct } from '#app/domain/schemas/permit-act.ts'
import { readPermitFacts } from '#app/services/permit-facts.server.ts'
import { actOnPermit, createPermit, productAct, savePermit } from '#app/services/permits.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { readDangers } from '#app/services/safety-events.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { PASSWORD, type TestUser } from '#tests/support/factories.ts'
import {
  createPermitWorld,
  grantAt,
  lockEverything,
  type PermitWorld,
  stateHeating,
  testEverything,
  worldContent,
} from '#tests/support/permit-world.ts'

const db = freshDatabase()
const other = secondConnection()
const HOUR = 3600
const BEFORE = after(MORNING, -48 * HOUR)

let world: PermitWorld
beforeEach(async () => {
  world = await createPermitWorld(db)
})

const draft = (changes = {}, at = BEFORE) =>
  createPermit(db, world.bram, at, { content: worldContent(world, changes) })

async function stand(number: string) {
  const permit = await findPermit(db, number)
  if (permit === null) throw new Error(`no permit ${number}`)
  return permit
}

interface Doing {
  detail?: unknown
  reason?: string
  revision?: number
  password?: string
  handle?: Db
}

async function act(number: string, what: FormAct, actor: TestUser, at: Date, doing: Doing = {}) {
  const { detail = {}, reason = 'for a test', password = PASSWORD, handle = db } = doing
  const revision = doing.revision ?? (await stand(number)).revision
  return actOnPermit(handle, actor, at, number, { act: what, revision, reason, password, detail })
}

const refusal = (attempt: Promise<unknown>): Promise<DomainError> =>
  attempt.then(
    () => {
      throw new Error('nothing was refused')
    },
    (error) => {
      if (error instanceof DomainError) return error
      throw error
    },
  )

const IN_ORDER = { barriersPlaced: true, signsPosted: true }
const ON_SITE = { onSite: true }

async function requested(changes = {}) {
  const number = await draft(changes)
  await act(number, 'request', world.bram, BEFORE)
  return number
}

async function approved(changes = {}) {
  const number = await requested(changes)
  await act(number, 'approve', world.ione, after(BEFORE, HOUR))
  return number
}

/** Accepted by Pim half an hour into the window. */
async function live(changes = {}) {
  const number = await approved(changes)
  const ready = after(MORNING, 0.25 * HOUR)
  await lockEverything(db, number, ready, {
    appliedBy: world.odalys.personId,
    verifiedBy: world.nerys.personId,
  })
  await testEverything(db, number, ready, world.nerys.personId)
  await act(number, 'site-check', world.pim, ready, { detail: IN_ORDER })
  await act(number, 'accept', world.pim, after(MORNING, 0.5 * HOUR), { detail: ON_SITE })
  return number
}

test('numbers run on by the year on site, and each permit has a short code without look-alikes', async () => {
  expect(await draft()).toBe('HSP-2026-001')
  expect(await draft()).toBe('HSP-2026-002')
  // On site it is 2027 already.
  expect(await draft({}, new Date('2026-12-31T23:30:00.000Z'))).toBe('HSP-2027-001')
  const codes = await db.select({ code: permitTable.shortCode }).from(permitTable)
  for (const { code } of codes) expect(code).toMatch(/^[234679ACDEFGHJKMNPQRTWXY]{6}$/)
  expect(new Set(codes.map(({ code }) => code)).size).toBe(3)
})

test('twelve drafts at once get twelve numbers, none left out', async () => {
  const make = (handle: Db) => createPermit(handle, world.bram, BEFORE, { content: worldContent(world) })
  const numbers = await Promise.all(Array.from({ length: 12 }, (_, i) => make(i % 2 === 0 ? db : other)))
  const wanted = Array.from({ length: 12 }, (_, i) => `HSP-2026-${String(i + 1).padStart(3, '0')}`)
  expect(numbers.sort()).toEqual(wanted)
})

test('after 999 comes 1000', async () => {
  const number = await draft()
  await db.update(permitTable).set({ number: 'HSP-2026-999' }).where(eq(permitTable.number, number))
  expect(await draft()).toBe('HSP-2026-1000')
  expect(await draft()).toBe('HSP-2026-1001')
})

test('a draft is saved as versions; what does not differ makes none', async () => {
  const number = await draft({ title: 'First' })
  const content = worldContent(world, { title: 'Second' })
  expect(await savePermit(db, world.pim, BEFORE, number, { revision: 1, content, reason: '' })).toEqual({
    revision: 2,
    version: 2,
    state: 'draft',
  })
  expect(await savePermit(db, world.pim, BEFORE, number, { revision: 2, content, reason: '' })).toEqual({
    revision: 2,
    version: 2,
    state: 'draft',
  })
  const { id, content: now } = await stand(number)
  expect(now.title).toBe('Second')
  expect((await findPermitVersion(db, id, 1))?.title).toBe('First')
})

test('somebody with an old page is told who has done what since, and nothing is saved', async () => {
  const number = await draft()
  await act(number, 'request', world.bram, BEFORE)
  const error = await refusal(
    savePermit(db, world.bram, BEFORE, number, {
      revision: 1,
      content: worldContent(world, { title: 'Late' }),
      reason: '',
    }),
  )
  expect(error).toMatchObject({
    code: 'conflict',
    fields: { form: [expect.stringMatching(/2026-11-07 08:00 \(UTC\+01:00\): request by Bram.*requested/)] },
  })
  expect((await stand(number)).content.title).toBe('Bake at 150 °C')
})

test('a permit lives from its draft to its end', async () => {
  const number = await live()
  expect(await stand(number)).toMatchObject({
    state: 'issued',
    holderName: 'Pim',
    approvedByName: 'Ione',
    requestedByName: 'Bram',
    approvedVersion: 1,
    currentUntil: after(MORNING, 12.5 * HOUR),
    windowTo: after(MORNING, 96 * HOUR),
  })
  await act(number, 'hand-over', world.corwin, after(MORNING, 8 * HOUR), {
    detail: { outgoingId: world.pim.personId, how: 'by-phone', readBack: true },
  })
  await testEverything(db, number, after(MORNING, 11 * HOUR), world.nerys.personId)
  await act(number, 'revalidate', world.corwin, after(MORNING, 12 * HOUR), { detail: ON_SITE })
  await act(number, 'extend', world.rafe, after(MORNING, 13 * HOUR), {
    detail: { hours: 24, recheck: 'locks' },
  })
  expect(await stand(number)).toMatchObject({
    holderName: 'Corwin',
    currentUntil: after(MORNING, 24 * HOUR),
    windowTo: after(MORNING, 120 * HOUR),
    extensions: 1,
    extendedHours: 24,
  })
  const detail = {
    outcome: 'complete',
    plantState: 'cold',
    peopleClear: true,
    toolsOut: true,
    hottestC: 31,
    locks: 'left',
    locksText: 'tomorrow',
  }
  await act(number, 'hand-back', world.corwin, after(MORNING, 14 * HOUR), { detail })
  // Locks still hang: no end.
  const refused = await refusal(
    act(number, 'cancel', world.ione, after(MORNING, 15 * HOUR), { detail: { inspection: 'clean' } }),
  )
  expect(refused).toMatchObject({
    code: 'not-acceptable-now',
    fields: { form: [expect.stringMatching(/2 locks.*L-\d+, L-\d+/)] },
  })

  const acts = await listPermitActs(db, (await stand(number)).id)
  expect(
    acts.map(({ act: each, personName, signed }) => `${each} ${personName} ${signed ? 'signed' : ''}`.trim()),
  ).toEqual([
    'draft Bram',
    'request Bram signed',
    'approve Ione signed',
    'site-check Pim',
    'accept Pim signed',
    'hand-over Corwin signed',
    'revalidate Corwin signed',
    'extend Rafe signed',
    'hand-back Corwin signed',
  ])
  expect(acts.map(({ revision }) => revision)).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9])
})

test('what is missing is told all at once, and nothing is signed', async () => {
  const number = await draft({ title: '', bays: '', contacts: [] })
  const error = await refusal(act(number, 'request', world.bram, BEFORE))
  expect(error.code).toBe('not-acceptable-now')
  expect(error.fields.form).toHaveLength(3)
  expect(await db.select().from(signedAct)).toEqual([])
})

test('a wrong password changes nothing, and a free one is asked for', async () => {
  const number = await draft()
  expect(await refusal(act(number, 'request', world.bram, BEFORE, { password: 'wrong' }))).toMatchObject({
    code: 'signature-refused',
  })
  expect(await refusal(act(number, 'request', world.bram, BEFORE, { password: '' }))).toMatchObject({
    fields: { password: [expect.any(String)] },
  })
  expect((await stand(number)).state).toBe('draft')
})

test('who planned may not approve, is told whom to ask, and the attempt stays on record', async () => {
  const number = await requested()
  const bram = await grantAt(db, world.bram, 'safety-officer', after(BEFORE, -72 * HOUR), world.magnus)
  const error = await refusal(act(number, 'approve', bram, BEFORE))
  expect(error.code).toBe('forbidden')
  expect(error.message).toContain('Ione or Rafe')
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    {
      act: 'permit attempt blocked',
      person: 'Bram',
      subjectId: number,
      after: { attempt: 'approve', reasons: [{ code: 'own-draft' }, { code: 'own-request' }] },
    },
  ])
  expect((await stand(number)).state).toBe('requested')
})

test('rank does not approve, and that is recorded too', async () => {
  const number = await requested()
  expect((await refusal(act(number, 'approve', world.magnus, BEFORE))).code).toBe('forbidden')
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    { act: 'permit attempt blocked', person: 'Magnus' },
  ])
})

test('a role confirmed less than a day ago does not approve yet', async () => {
  const number = await requested()
  const nerys = await grantAt(db, world.nerys, 'safety-officer', BEFORE, world.magnus)
  const early = await refusal(act(number, 'approve', nerys, after(BEFORE, 24 * HOUR - 1)))
  expect(early).toMatchObject({
    code: 'forbidden',
    fields: { form: [expect.stringContaining('23 h 59 min')] },
  })
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    { act: 'permit attempt blocked', person: 'Nerys' },
  ])
  await act(number, 'approve', nerys, after(BEFORE, 24 * HOUR))
  expect((await stand(number)).approvedByName).toBe('Nerys')
})

test('two officers at once: one decides, the other is told', async () => {
  const number = await requested()
  const revision = (await stand(number)).revision
  const results = await Promise.allSettled([
    act(number, 'approve', world.ione, BEFORE, { revision }),
    act(number, 'refuse', world.rafe, BEFORE, { revision, handle: other }),
  ])
  expect(results.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
  const lost = results.find((each) => each.status === 'rejected')?.reason as DomainError
  expect(lost.code).toBe('conflict')
  expect(lost.fields.form?.[0]).toMatch(/approve by Ione|refuse by Rafe/)
  const acts = await listPermitActs(db, (await stand(number)).id)
  expect(acts).toHaveLength(3)
})

test('a revalidation against the end of the validity: one of the two, never both', async () => {
  const number = await live()
  const end = after(MORNING, 12.5 * HOUR)
  await testEverything(db, number, after(end, -HOUR), world.nerys.personId)
  const revision = (await stand(number)).revision
  const [person, time] = await Promise.allSettled([
    act(number, 'revalidate', world.pim, after(end, -1), { revision, detail: ON_SITE }),
    productAct(other, end, number, 'expire', { at: end }),
  ])
  const permit = await stand(number)
  if (person.status === 'fulfilled') {
    expect(time.status).toBe('rejected')
    expect(permit).toMatchObject({ state: 'issued', currentUntil: after(end, 12 * HOUR - 1) })
  } else {
    expect(time.status).toBe('fulfilled')
    expect(permit).toMatchObject({ state: 'expired', currentUntil: end })
    expect((person.reason as DomainError).fields.form?.[0]).toContain('expire by the product')
  }
})

test('a hand-back against a stop: the second is told of the first', async () => {
  const number = await live()
  const revision = (await stand(number)).revision
  const at = after(MORNING, 2 * HOUR)
  const detail = {
    outcome: 'stopped',
    plantState: 'cold',
    peopleClear: true,
    toolsOut: true,
    hottestC: 31,
    locks: 'left',
    locksText: 'later',
  }
  const results = await Promise.allSettled([
    act(number, 'hand-back', world.pim, at, { revision, detail }),
    act(number, 'suspend', world.magnus, at, { revision, handle: other }),
  ])
  expect(results.filter(({ status }) => status === 'fulfilled')).toHaveLength(1)
  const lost = results.find((each) => each.status === 'rejected')?.reason as DomainError
  expect(lost).toMatchObject({ code: 'conflict' })
  expect(lost.fields.form?.[0]).toMatch(/hand-back|hand back by Pim|suspend by Magnus/)
})

test('time that has passed is written down before anybody acts, as of when it passed', async () => {
  const number = await live()
  const revision = (await stand(number)).revision
  const late = after(MORNING, 20 * HOUR)
  const error = await refusal(act(number, 'revalidate', world.pim, late, { revision, detail: ON_SITE }))
  expect(error).toMatchObject({
    code: 'conflict',
    fields: { form: [expect.stringContaining('expire by the product')] },
  })
  const last = (await listPermitActs(db, (await stand(number)).id)).at(-1)
  expect(last).toMatchObject({
    act: 'expire',
    at: after(MORNING, 12.5 * HOUR),
    recordedAt: late,
    personId: null,
    detail: { because: 'revalidation' },
  })
  // And it never lives again.
  const again = await refusal(act(number, 'revalidate', world.pim, late, { detail: ON_SITE }))
  expect(again.fields.form?.[0]).toContain('run out for good')
})

test('nothing is due twice, and nothing at another time than it is due', async () => {
  const number = await live()
  const end = after(MORNING, 12.5 * HOUR)
  expect((await refusal(productAct(db, after(end, -1), number, 'expire', { at: end }))).code).toBe('conflict')
  expect((await refusal(productAct(db, end, number, 'expire', { at: after(end, -1) }))).code).toBe('conflict')
  await productAct(db, end, number, 'expire', { at: end })
  expect((await refusal(productAct(db, end, number, 'expire', { at: end }))).code).toBe('conflict')
})

test('a stop is told at once, and work goes on only after a re-check and for what was left', async () => {
  const number = await live()
  const at = (hours: number) => after(MORNING, hours * HOUR)
  await act(number, 'suspend', world.odalys, at(2), { password: '', reason: 'fan' })
  expect((await readDangers(db, number)).map(({ kind }) => kind)).toContain('permit-suspended')
  const refused = await refusal(act(number, 'resume', world.ione, at(4)))
  expect(refused.fields.form).toEqual([
    expect.stringContaining('site has not been checked'),
    expect.stringContaining('Oxygen at bay 5: the last result is from before'),
  ])
  await testEverything(db, number, at(3), world.nerys.personId)
  await act(number, 'site-check', world.pim, at(3), { detail: IN_ORDER })
  await act(number, 'resume', world.ione, at(4))
  expect(await stand(number)).toMatchObject({ state: 'issued', currentUntil: at(12.5) })
  expect((await listPermitActs(db, (await stand(number)).id)).at(-1)?.detail).toEqual({ suspendedHours: 2 })
})

test('changed terms void the approval; both versions stay, and another officer may decide anew', async () => {
  const number = await approved()
  const content = worldContent(world, { maxCelsius: 160 })
  const save = (reason: string) =>
    savePermit(db, world.pim, after(BEFORE, 2 * HOUR), number, { revision: 3, content, reason })
  expect(await refusal(save(''))).toMatchObject({
    code: 'bad-input',
    fields: { reason: [expect.any(String)] },
  })
  expect(await save('higher')).toEqual({ revision: 4, version: 2, state: 'requested' })
  const permit = await stand(number)
  expect(permit).toMatchObject({
    approvedBy: null,
    approvedVersion: 1,
    requestedByName: 'Pim',
    content: { maxCelsius: 160 },
  })
  expect((await readPermitFacts(db, permit, BEFORE)).permit.approvedContent?.maxCelsius).toBe(150)
  await act(number, 'approve', world.ione, after(BEFORE, 3 * HOUR))
  expect(await stand(number)).toMatchObject({ state: 'approved', approvedVersion: 2 })
})

test('terms of a live permit are not edited: it is suspended first, with heating off', async () => {
  const number = await live()
  const at = (hours: number) => after(MORNING, hours * HOUR)
  const content = worldContent(world, { maxCelsius: 160, from: at(4).toISOString() })
  const save = async (hours: number) =>
    savePermit(db, world.bram, at(hours), number, {
      revision: (await stand(number)).revision,
      content,
      reason: 'hotter',
    })
  expect((await refusal(save(1))).fields.form?.[0]).toContain('Suspend it')
  await stateHeating(db, world, true, at(1))
  await act(number, 'suspend', world.pim, at(2))
  expect((await refusal(save(3))).fields.form?.[0]).toContain('Heating is recorded as on')
  await stateHeating(db, world, false, at(3))
  expect(await save(3.5)).toMatchObject({ state: 'requested' })
  expect(await stand(number)).toMatchObject({ currentUntil: null, holderName: 'Pim' })
})

test('nobody but the next holder signs a hand-over, and nobody for somebody else', async () => {
  const number = await live()
  const at = after(MORNING, 2 * HOUR)
  const detail = { outgoingId: world.pim.personId, how: 'at-site' }
  expect((await refusal(act(number, 'hand-over', world.odalys, at, { detail }))).fields.form?.[0]).toContain(
    'Nobody signs for somebody else',
  )
  expect(
    (
      await refusal(
        act(number, 'hand-over', world.corwin, at, {
          detail: { ...detail, outgoingId: world.odalys.personId },
        }),
      )
    ).code,
  ).toBe('bad-input')
})

test('a permit that is not there, a form of nobody’s, and a content that is none', async () => {
  expect(
    (
      await refusal(
        actOnPermit(db, world.bram, BEFORE, 'HSP-2026-777', {
          act: 'request',
          revision: 1,
          reason: '',
          password: PASSWORD,
          detail: {},
        }),
      )
    ).code,
  ).toBe('not-found')
  expect((await refusal(createPermit(db, world.magnus, BEFORE, { content: worldContent(world) }))).code).toBe(
    'forbidden',
  )
  await expect(createPermit(db, world.bram, BEFORE, { content: { title: 5 } as never })).rejects.toThrow()
  expect(await db.select().from(permitVersion)).toEqual([])
})
