import { createHash } from 'node:crypto'
import { eq, sql } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { findPermit, insertPermitAct } from '#app/db/queries/permits.server.ts'
import { isolationPoint, permit, permitAct, permitVersion, safetyEvent } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import { readPermitPolicy, setPermitPolicy } from '#app/services/permit-policy.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import {
  askRetention,
  carryOutRetention,
  decideRetention,
  exportRun,
  holdPermit,
  readManifest,
  readRetention,
} from '#app/services/retention.server.ts'
import { noteDangers } from '#app/services/safety-events.server.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser, PASSWORD, type TestUser } from '#tests/support/factories.ts'
import { createPermitRow } from '#tests/support/permit-rows.ts'
import { createSupply } from '#tests/support/supply.ts'

const db = freshDatabase()
const other = secondConnection()
const DAY = 86_400
/** Five years and two leap days, the proposal that holds until an officer sets something. */
const KEPT = 1827

let juniper: TestUser
let ione: TestUser
let bram: TestUser
beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  juniper = await createUser(db, { roles: ['administrator', 'engineer'], name: 'Juniper' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  await createSegment(db, { tag: 'SG-T1' })
})

async function ended(daysAgo: number, more: Partial<typeof permit.$inferInsert> = {}) {
  const endedAt = secondsAfter(MORNING, -daysAgo * DAY)
  const made = await createPermitRow(db, { createdBy: bram.personId, state: 'cancelled', endedAt, ...more })
  await insertPermitAct(db, {
    permitId: made.id,
    act: 'cancel',
    fromState: 'handed-back',
    toState: 'cancelled',
    revision: 2,
    version: 1,
    at: endedAt,
    recordedAt: endedAt,
    personId: ione.personId,
  })
  await db.insert(isolationPoint).values({
    permitId: made.id,
    tag: 'IP-1',
    isolates: 'NV-T1',
    required: 'shut',
    purpose: 'to-heat',
    lockNumber: 'L-1',
    appliedBy: bram.personId,
    appliedAt: endedAt,
    removedAt: endedAt,
  })
  return made
}

const ask = () => askRetention(db, juniper, MORNING, PASSWORD)
const agree = async (runId: number, actor = ione) =>
  decideRetention(db, actor, MORNING, {
    intent: 'agree',
    runId,
    revision: (await readManifest(db, actor, runId)).revision,
    password: PASSWORD,
  })
const numbers = async () => (await db.select({ number: permit.number }).from(permit)).map((row) => row.number)

test('what is old enough goes with everything of its own; what is younger, live or held stays', async () => {
  const old = await ended(KEPT + 1)
  const held = await ended(KEPT + 1, { held: true, heldReason: 'burn of a hand' })
  const young = await ended(KEPT)
  const live = await ended(KEPT + 1, { state: 'handed-back' })
  const id = await ask()
  const { manifest } = await readManifest(db, ione, id)
  expect(manifest.permits).toMatchObject([
    {
      number: old.number,
      state: 'cancelled',
      counts: { versions: 1, acts: 1, points: 1, tests: 0 },
      deletedAt: null,
    },
  ])
  const [exported] = await exportRun(db, ione, id)
  expect(
    createHash('sha256')
      .update(exported?.content ?? '')
      .digest('hex'),
  ).toBe(manifest.permits[0]?.sha256)
  expect(exported?.content).toContain('Bake at 150 °C')
  expect(await agree(id)).toBe('1 deleted.')
  expect((await numbers()).toSorted()).toEqual([held.number, young.number, live.number].toSorted())
  expect(await db.select().from(permitAct).where(eq(permitAct.permitId, old.id))).toEqual([])
  expect(await db.select().from(permitVersion).where(eq(permitVersion.permitId, old.id))).toEqual([])
  expect(await db.select().from(isolationPoint).where(eq(isolationPoint.permitId, old.id))).toEqual([])
  const done = await readManifest(db, ione, id)
  expect(done).toMatchObject({ doneAt: MORNING, agreedByName: 'Ione', askedByName: 'Juniper' })
  expect(done.manifest.permits[0]?.deletedAt).toBe(MORNING.toISOString())
  const [line] = await listRecord(db, { subjectKind: 'permit', subjectId: old.number, limit: 1 })
  expect(line).toMatchObject({
    act: 'permit deleted by policy',
    before: { sha256: manifest.permits[0]?.sha256 },
  })
})

test('acts and versions cannot be deleted past a run, before one or after', async () => {
  const old = await ended(KEPT + 1)
  const young = await ended(10)
  const deleting = (id: number) => async () => {
    await db.delete(permitAct).where(eq(permitAct.permitId, id))
  }
  await expect(deleting(old.id)()).rejects.toMatchObject({
    cause: { message: expect.stringContaining('by a retention run only') },
  })
  await agree(await ask())
  // Every connection of the pool: the leave given to one of them must have been taken back.
  for (let index = 0; index < 12; index += 1) {
    await expect(deleting(young.id)()).rejects.toMatchObject({
      cause: { message: expect.stringContaining('by a retention run only') },
    })
    await expect(
      db.delete(permitVersion).where(eq(permitVersion.permitId, young.id)).execute(),
    ).rejects.toMatchObject({ cause: { message: expect.stringContaining('by a retention run only') } })
  }
  const [rows] = await db.execute(sql`SELECT @ebbline_retention_run AS run`)
  expect(rows).toEqual([{ run: null }])
})

test('whoever asked does not agree, whatever roles they hold; who may do neither is refused', async () => {
  await ended(KEPT + 1)
  await expect(askRetention(db, ione, MORNING, PASSWORD)).rejects.toMatchObject({ code: 'forbidden' })
  const id = await ask()
  await expect(ask()).rejects.toMatchObject({ code: 'conflict' })
  await expect(agree(id, juniper)).rejects.toMatchObject({
    code: 'forbidden',
    message: expect.stringContaining('You asked for this run yourself'),
  })
  const pim = await createUser(db, { roles: ['technician'] })
  await expect(agree(id, pim)).rejects.toMatchObject({ code: 'forbidden' })
  await expect(
    decideRetention(db, ione, MORNING, { intent: 'agree', runId: id, revision: 1, password: 'wrong' }),
  ).rejects.toMatchObject({ code: 'signature-refused' })
  expect(await numbers()).toHaveLength(1)
  await agree(id, bram)
  expect(await numbers()).toEqual([])
})

test('what was held or changed since the list was made stays, and the manifest says why', async () => {
  const [held, changed, gone] = [await ended(KEPT + 3), await ended(KEPT + 2), await ended(KEPT + 1)]
  const id = await ask()
  await holdPermit(db, ione, MORNING, {
    intent: 'hold',
    number: held.number,
    reason: 'asked about after an accident',
    password: PASSWORD,
  })
  await db.update(permit).set({ revision: 9 }).where(eq(permit.id, changed.id))
  expect(await agree(id)).toBe('1 deleted, 2 left where they are (the manifest says why).')
  expect(
    (await readManifest(db, ione, id)).manifest.permits.map(({ number, left }) => [number, left]),
  ).toEqual([
    [held.number, 'It is held: asked about after an accident'],
    [changed.number, 'It has changed since the list was made.'],
    [gone.number, ''],
  ])
  await expect(
    holdPermit(db, ione, MORNING, {
      intent: 'hold',
      number: held.number,
      reason: 'again',
      password: PASSWORD,
    }),
  ).rejects.toMatchObject({ code: 'conflict' })
})

test('called off, it deletes nothing, and nobody agrees to it any more', async () => {
  await ended(KEPT + 1)
  const id = await ask()
  await decideRetention(db, juniper, MORNING, { intent: 'call-off', runId: id, revision: 1 })
  await expect(agree(id)).rejects.toMatchObject({ code: 'conflict' })
  expect(await carryOutRetention(db, id, MORNING)).toEqual({ deleted: 0, left: 0 })
  expect(await numbers()).toHaveLength(1)
})

test('two that carry it out at once delete each permit once', async () => {
  for (let index = 1; index <= 4; index += 1) await ended(KEPT + index)
  const id = await ask()
  await agree(id)
  await Promise.all([carryOutRetention(db, id, MORNING), carryOutRetention(other, id, MORNING)])
  const { manifest } = await readManifest(db, ione, id)
  expect(manifest.permits.every(({ deletedAt }) => deletedAt !== null)).toBe(true)
  const lines = await listRecord(db, { subjectKind: 'permit', limit: 20 })
  expect(lines.filter(({ act }) => act === 'permit deleted by policy')).toHaveLength(4)
})

test('a permit with a danger is held by itself; its event stays when it goes after the release', async () => {
  const supply = await createSupply(db)
  const made = await createPermitRow(db, { createdBy: bram.personId, state: 'expired' })
  await supply.posts(secondsAfter(MORNING, -60), { volts: 23, amps: 1083 })
  await tx(db, (inside) => noteDangers(inside, made.number, MORNING))
  expect(await findPermit(db, made.number)).toMatchObject({ held: true })
  await supply.posts(secondsAfter(MORNING, 60), 'off')
  const endedAt = secondsAfter(MORNING, 120)
  await db.update(permit).set({ state: 'cancelled', endedAt })
  await tx(db, (inside) => noteDangers(inside, made.number, secondsAfter(MORNING, 120)))
  const later = secondsAfter(MORNING, (KEPT + 2) * DAY)
  expect((await readRetention(db, ione, later)).deletable).toEqual([])
  await holdPermit(db, ione, later, {
    intent: 'release',
    number: made.number,
    reason: 'the case is closed',
    password: PASSWORD,
  })
  const id = await askRetention(db, juniper, later, PASSWORD)
  await decideRetention(db, ione, later, { intent: 'agree', runId: id, revision: 1, password: PASSWORD })
  expect(await numbers()).toEqual([])
  expect(await db.select().from(safetyEvent)).toMatchObject([
    { kind: 'expired-while-heated', permitId: null, text: expect.stringContaining(made.number) },
    { kind: 'revalidation-missed', permitId: null },
  ])
})

test('an officer sets how long and whether; the next one sees that it was set meanwhile', async () => {
  expect(await readPermitPolicy(db)).toEqual({ extensionAllowed: true, keepDays: KEPT })
  const form = {
    intent: 'set-policy' as const,
    seen: 0,
    extensionAllowed: false,
    keepDays: 4000,
    reason: 'asked for by the insurer',
    password: PASSWORD,
  }
  await expect(setPermitPolicy(db, bram, MORNING, form)).rejects.toMatchObject({ code: 'forbidden' })
  await setPermitPolicy(db, ione, MORNING, form)
  expect(await readPermitPolicy(db)).toEqual({ extensionAllowed: false, keepDays: 4000 })
  await expect(setPermitPolicy(db, ione, MORNING, form)).rejects.toMatchObject({ code: 'conflict' })
  await ended(KEPT + 1)
  await expect(ask()).rejects.toMatchObject({ code: 'not-acceptable-now' })
})
