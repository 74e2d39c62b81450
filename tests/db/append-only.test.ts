import { eq } from 'drizzle-orm'
import { expect, test } from 'vitest'
import { logAmendment, logEntry, record } from '#app/db/schema/index.ts'
import { amendEntry, writeEntry } from '#app/services/logbook.server.ts'
import { MORNING } from '#tests/support/clock.ts'
import { cleanDatabase, freshDatabase } from '#tests/support/db.ts'
import { createUser, PASSWORD } from '#tests/support/factories.ts'

const db = freshDatabase()

async function writeAndAmend(): Promise<void> {
  const actor = await createUser(db, { roles: ['technician'] })
  const entryId = await writeEntry(db, actor, MORNING, {
    segment: '',
    kind: 'note',
    eventAt: MORNING,
    text: 'Pump room swept.',
    onChart: false,
    password: PASSWORD,
  })
  await amendEntry(db, actor, MORNING, entryId, {
    text: 'Pump room swept and mopped.',
    reason: 'left out the mop',
    password: PASSWORD,
  })
}

test.each([
  ['the record', record, { reason: 'changed' }, 'The record is append-only'],
  ['log entries', logEntry, { text: 'changed' }, 'Log entries are amended and never edited'],
  ['amendments', logAmendment, { text: 'changed' }, 'Amendments are never edited'],
] as const)('the database itself refuses to change %s', async (_name, table, change, message) => {
  await writeAndAmend()
  const before = await db.select().from(table)
  expect(before.length).toBeGreaterThan(0)
  const attempt = db.update(table as typeof record).set(change as { reason: string })
  await expect(attempt).rejects.toMatchObject({ cause: { message } })
  expect(await db.select().from(table)).toEqual(before)
})

test.each([
  ['the record', record, 'The record is append-only'],
  ['log entries', logEntry, 'Log entries are never deleted'],
  ['amendments', logAmendment, 'Amendments are never deleted'],
] as const)('the database itself refuses to delete from %s', async (_name, table, message) => {
  await writeAndAmend()
  const before = await db.select().from(table)
  const attempt = db.delete(table).where(eq(table.id, before[0]?.id ?? 0))
  await expect(attempt).rejects.toMatchObject({ cause: { message } })
  expect(await db.select().from(table)).toEqual(before)
})

test('tests still start empty, so nothing leaks from one into the next', async () => {
  await writeAndAmend()
  await cleanDatabase()
  expect(await db.select().from(record)).toEqual([])
  expect(await db.select().from(logEntry)).toEqual([])
})
