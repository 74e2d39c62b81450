import { beforeEach, expect, test } from 'vitest'
import { logAmendment, logEntry, signedAct } from '#app/db/schema/index.ts'
import type { Role } from '#app/domain/roles.ts'
import { amendEntry, type NewEntry, readEntry, writeEntry } from '#app/services/logbook.server.ts'
import { findLogbookPage } from '#app/services/logbook-page.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSegment, createUser, PASSWORD, type TestUser } from '#tests/support/factories.ts'

const db = freshDatabase()
let pim: TestUser
beforeEach(async () => {
  pim = await createUser(db, { roles: ['technician'] })
})

function write(entry: Partial<NewEntry> = {}, actor: TestUser = pim, now = MORNING): Promise<number> {
  return writeEntry(db, actor, now, {
    segment: '',
    kind: 'note',
    eventAt: MORNING,
    text: 'Fan of bay 3 rattles.',
    onChart: false,
    password: PASSWORD,
    ...entry,
  })
}

const amendment = { text: 'Fan of bay 4 rattles.', reason: 'miscounted', password: PASSWORD }

test('an entry keeps what, where, when it happened, when it was written and who signed it', async () => {
  const { tag } = await createSegment(db)
  const id = await write({ segment: tag, kind: 'valve', eventAt: after(MORNING, -900), onChart: true })
  expect(await readEntry(db, pim, id)).toMatchObject({
    segmentTag: tag,
    kind: 'valve',
    eventAt: after(MORNING, -900),
    writtenAt: MORNING,
    author: pim.name,
    onChart: true,
    signed: true,
    amendments: [],
  })
  const [act] = await db.select().from(signedAct)
  expect(act).toMatchObject({ personId: pim.personId, meaning: 'write a log entry', usedAt: MORNING })
  expect(await listRecord(db, { limit: 10 })).toMatchObject([
    { act: 'log entry written', subjectId: String(id), effectiveAt: after(MORNING, -900), signed: true },
  ])
})

test('a wrong password writes nothing', async () => {
  await expect(write({ password: 'wrong' })).rejects.toMatchObject({ code: 'signature-refused' })
  expect(await db.select().from(logEntry)).toEqual([])
  expect(await listRecord(db, { limit: 10 })).toEqual([])
})

test.each([
  ['in the future', { eventAt: after(MORNING, 301) }, 'eventAt'],
  ['on a segment that does not exist', { segment: 'SG-99' }, 'segment'],
])('an event %s is refused at its field', async (_what, entry, field) => {
  await expect(write(entry)).rejects.toMatchObject({
    code: 'bad-input',
    fields: { [field]: [expect.any(String)] },
  })
  expect(await db.select().from(logEntry)).toEqual([])
})

test('a clock on site that runs five minutes ahead is borne with', async () => {
  await expect(write({ eventAt: after(MORNING, 300) })).resolves.toBeGreaterThan(0)
})

test.each<Role>(['technician', 'engineer', 'safety-officer', 'manager', 'administrator', 'contributor'])(
  'a %s may write',
  async (role) => {
    const actor = await createUser(db, { roles: [role] })
    await expect(write({}, actor)).resolves.toBeGreaterThan(0)
  },
)

test('somebody without a role in force may neither write nor read', async () => {
  const id = await write()
  const nobody = await createUser(db, { roles: [] })
  await expect(write({}, nobody)).rejects.toMatchObject({ status: 403 })
  await expect(readEntry(db, nobody, id)).rejects.toMatchObject({ status: 403 })
})

test('an amendment stands beside the old text, signed, and amendments follow each other', async () => {
  const id = await write()
  await amendEntry(db, pim, after(MORNING, 60), id, amendment)
  await amendEntry(db, pim, after(MORNING, 120), id, { ...amendment, text: 'Fan of bay 5 rattles.' })
  const entry = await readEntry(db, pim, id)
  expect(entry.text).toBe('Fan of bay 3 rattles.')
  expect(entry.amendments).toMatchObject([
    { text: 'Fan of bay 4 rattles.', reason: 'miscounted', writtenAt: after(MORNING, 60), author: pim.name },
    { text: 'Fan of bay 5 rattles.' },
  ])
  const [newest] = await listRecord(db, { limit: 1 })
  expect(newest).toMatchObject({
    act: 'log entry amended',
    before: { text: 'Fan of bay 4 rattles.' },
    after: { text: 'Fan of bay 5 rattles.' },
    signed: true,
  })
})

test("nobody amends another person's entry, not even the administrator", async () => {
  const id = await write()
  for (const role of ['engineer', 'administrator'] as const) {
    const actor = await createUser(db, { roles: [role] })
    await expect(amendEntry(db, actor, MORNING, id, amendment)).rejects.toMatchObject({
      code: 'forbidden',
      message: expect.stringContaining(pim.name),
    })
  }
  expect(await db.select().from(logAmendment)).toEqual([])
})

test.each([
  ['with the text as it is', { text: 'Fan of bay 3 rattles.' }, 'bad-input'],
  ['with a wrong password', { password: 'wrong' }, 'signature-refused'],
])('an amendment %s is refused and changes nothing', async (_what, change, code) => {
  const id = await write()
  await expect(amendEntry(db, pim, MORNING, id, { ...amendment, ...change })).rejects.toMatchObject({ code })
  expect(await db.select().from(logAmendment)).toEqual([])
})

test('an entry that does not exist cannot be read or amended', async () => {
  await expect(readEntry(db, pim, 4711)).rejects.toMatchObject({ code: 'not-found' })
  await expect(amendEntry(db, pim, MORNING, 4711, amendment)).rejects.toMatchObject({ code: 'not-found' })
})

test('the logbook page finds by segment, kind and words, amended words and % signs included', async () => {
  const { tag } = await createSegment(db)
  const first = await write({
    segment: tag,
    kind: 'valve',
    text: 'GV-01 shut.',
    eventAt: after(MORNING, -60),
  })
  const second = await write({ text: 'Valve at 50 % open.' })
  const third = await write({ text: 'Valve at 50 turns.', eventAt: after(MORNING, -30) })
  await amendEntry(db, pim, MORNING, first, { text: 'GV-02 shut.', reason: 'wrong tag', password: PASSWORD })
  const found = async (query: string) =>
    (await findLogbookPage(db, new URLSearchParams(query))).entries.map(({ id }) => id)
  expect(await found('')).toEqual([second, third, first])
  expect(await found(`segment=${tag}`)).toEqual([first])
  expect(await found('kind=valve')).toEqual([first])
  expect(await found('words=GV-01')).toEqual([first])
  expect(await found('words=gv-02')).toEqual([first])
  expect(await found('words=50+%25')).toEqual([second])
  expect(await found('kind=nonsense&page=x')).toEqual([second, third, first])
  expect(await found('page=2')).toEqual([])
})
