import { expect, test } from 'vitest'
import { derivedBasis } from '#app/db/schema/index.ts'
import { tx } from '#app/db/transaction.server.ts'
import {
  beginDerived,
  listOutOfDate,
  markOutOfDate,
  readDerived,
  type Stretch,
} from '#app/services/revisions.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'

const db = freshDatabase()

/** A stretch of channel 1, or another, from and to seconds after the morning. */
function stretch(from: number, to: number, channelId = 1): Stretch {
  return { channelId, from: after(MORNING, from), to: after(MORNING, to) }
}

function curve(subjectId: string, ...basis: Stretch[]): Promise<void> {
  return beginDerived(db, { kind: 'curve', subjectId, madeAt: MORNING, basis })
}

function change(reason: string, ...stretches: Stretch[]) {
  return tx(db, (inside) => markOutOfDate(inside, { stretches, now: after(MORNING, 9999), reason }))
}

test.each([
  ['the same stretch', stretch(100, 200), true],
  ['one that ends where it begins', stretch(0, 100), true],
  ['one that begins where it ends', stretch(200, 300), true],
  ['one instant inside', stretch(150, 150), true],
  ['all around', stretch(0, 900), true],
  ['a second before', stretch(0, 99), false],
  ['a second after', stretch(201, 300), false],
  ['the same time of another channel', stretch(100, 200, 2), false],
])('a curve over 100 to 200 s and a change of %s', async (_what, changed, touched) => {
  await curve('SG-11', stretch(100, 200))
  const marked = await change('import 12 withdrawn', changed)
  expect(marked.map(({ subjectId }) => subjectId)).toEqual(touched ? ['SG-11'] : [])
  expect(await readDerived(db, 'curve', 'SG-11')).toMatchObject({
    madeAt: MORNING,
    staleSince: touched ? after(MORNING, 9999) : null,
    staleReason: touched ? 'import 12 withdrawn' : null,
  })
})

test('what is out of date keeps its first reason until it is computed again', async () => {
  await curve('SG-11', stretch(0, 100))
  await curve('SG-12', stretch(0, 100, 2))
  await change('import 12 withdrawn', stretch(0, 10))
  expect(await change('channel map corrected', stretch(0, 10), stretch(0, 10, 2))).toHaveLength(1)
  const stale = await listOutOfDate(db)
  expect(stale.map(({ subjectId, staleReason }) => [subjectId, staleReason])).toEqual([
    ['SG-11', 'import 12 withdrawn'],
    ['SG-12', 'channel map corrected'],
  ])
  await curve('SG-11', stretch(0, 100))
  expect((await listOutOfDate(db, 'curve')).map(({ subjectId }) => subjectId)).toEqual(['SG-12'])
  expect(await listOutOfDate(db, 'report')).toEqual([])
})

test('computing again replaces what a thing rests on', async () => {
  await curve('SG-11', stretch(0, 100))
  await curve('SG-11', stretch(500, 600))
  expect(await change('x', stretch(0, 100))).toEqual([])
  expect(await change('x', stretch(600, 700))).toHaveLength(1)
})

test('a change that arrives while a thing is computed marks it', async () => {
  await curve('SG-11', stretch(0, 100))
  // Here the readings are being read and the curve computed.
  await change('import 12 withdrawn', stretch(50, 60))
  expect((await readDerived(db, 'curve', 'SG-11'))?.staleSince).not.toBeNull()
})

test('a change that rolls back marks nothing', async () => {
  await curve('SG-11', stretch(0, 100))
  const failing = tx(db, async (inside) => {
    await markOutOfDate(inside, { stretches: [stretch(0, 100)], now: MORNING, reason: 'x' })
    throw new Error('the withdrawal failed')
  })
  await expect(failing).rejects.toThrow('the withdrawal failed')
  expect(await listOutOfDate(db)).toEqual([])
})

test('stretches that overlap are kept as one, others apart', async () => {
  await curve('SG-11', stretch(50, 80), stretch(0, 60), stretch(0, 10), stretch(200, 300), stretch(0, 60, 2))
  const rows = await db.select().from(derivedBasis).orderBy(derivedBasis.channelId, derivedBasis.fromAt)
  expect(rows.map(({ channelId, fromAt, toAt }) => ({ channelId, from: fromAt, to: toAt }))).toEqual([
    stretch(0, 80),
    stretch(200, 300),
    stretch(0, 60, 2),
  ])
})

test('a change of six hundred stretches marks a thing once', async () => {
  await curve('SG-11', stretch(0, 100_000))
  const many = Array.from({ length: 600 }, (_, n) => stretch(n * 100, n * 100 + 50))
  expect(await change('import 12 withdrawn', ...many)).toHaveLength(1)
})
