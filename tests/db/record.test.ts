import { expect, test } from 'vitest'
import { tx } from '#app/db/transaction.server.ts'
import { listRecord, type RecordEntry, writeRecord } from '#app/services/record.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createUser } from '#tests/support/factories.ts'

const db = freshDatabase()

function write(entry: Partial<RecordEntry>): Promise<void> {
  return tx(db, (inside) =>
    writeRecord(inside, {
      at: MORNING,
      actor: null,
      act: 'valve turned',
      subjectKind: 'valve',
      subjectId: 'GV-01',
      ...entry,
    }),
  )
}

test('a change is kept with who, when by both clocks, from when it holds, before, after and why', async () => {
  const actor = await createUser(db)
  const began = Date.now()
  const before = { position: 'open', limits: [1, 2.5e-9], note: null }
  const later = { position: 'shut', limits: [], note: 'ä — “x”' }
  await write({ actor, before, after: later, reason: 'leak hunt', effectiveAt: after(MORNING, -600) })
  const [line] = await listRecord(db, { limit: 1 })
  expect(line).toMatchObject({
    at: MORNING,
    person: actor.name,
    act: 'valve turned',
    effectiveAt: after(MORNING, -600),
    before,
    after: later,
    reason: 'leak hunt',
    signed: false,
  })
  expect(line?.machineAt.getTime()).toBeGreaterThanOrEqual(began)
  expect(line?.machineAt.getTime()).toBeLessThanOrEqual(Date.now())
})

test('what the product did itself names nobody', async () => {
  await write({})
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    { person: null, before: null, after: null, reason: '' },
  ])
})

test('lists are as good as objects, and come back as they were', async () => {
  await write({ before: ['HC-03B'], after: [{ channel: 'HC-04A', from: null }] })
  expect(await listRecord(db, { limit: 1 })).toMatchObject([
    { before: ['HC-03B'], after: [{ channel: 'HC-04A', from: null }] },
  ])
})

test('a change that rolls back leaves no line', async () => {
  const failing = tx(db, async (inside) => {
    await writeRecord(inside, {
      at: MORNING,
      actor: null,
      act: 'x',
      subjectKind: 'valve',
      subjectId: 'GV-01',
    })
    throw new Error('the valve does not exist')
  })
  await expect(failing).rejects.toThrow('does not exist')
  expect(await listRecord(db, { limit: 10 })).toEqual([])
})

test('lines are found by thing and by person, newest first, page by page', async () => {
  const [pim, bram] = [await createUser(db), await createUser(db)]
  for (let n = 1; n <= 5; n += 1) await write({ actor: pim, reason: `pim ${n}` })
  await write({ actor: bram, subjectId: 'GV-02', reason: 'bram 1' })
  await write({ actor: bram, subjectKind: 'pump', reason: 'bram 2' })
  const reasons = async (filter: Parameters<typeof listRecord>[1]) =>
    (await listRecord(db, filter)).map(({ reason }) => reason)

  expect(await reasons({ personId: bram.personId, limit: 10 })).toEqual(['bram 2', 'bram 1'])
  expect(await reasons({ subjectKind: 'valve', subjectId: 'GV-02', limit: 10 })).toEqual(['bram 1'])
  const valve = { subjectKind: 'valve', subjectId: 'GV-01', limit: 2 }
  const first = await listRecord(db, valve)
  expect(first.map(({ reason }) => reason)).toEqual(['pim 5', 'pim 4'])
  const second = await listRecord(db, { ...valve, beforeId: first.at(-1)?.id ?? 0 })
  expect(second.map(({ reason }) => reason)).toEqual(['pim 3', 'pim 2'])
  expect(await reasons({ ...valve, beforeId: second.at(-1)?.id ?? 0 })).toEqual(['pim 1'])
})
