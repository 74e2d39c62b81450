import { asc, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { importFile, importRange, reading, readingAside, record, rollupDue } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { MARKS } from '#app/domain/readings.ts'
import { stageUpload } from '#app/services/intake.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import {
  agreeWithdrawal,
  askWithdrawal,
  readWithdrawalPage,
  refuseWithdrawal,
  withdrawImport,
} from '#app/services/intake-withdrawal.server.ts'
import { beginDerived, readDerived } from '#app/services/revisions.server.ts'
import { NL_W } from '#tests/fixtures/night-files/profiles.ts'
import { fixture } from '#tests/fixtures/night-files/read.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createChannel, createSite, createSource, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()

let technician: Actor
let engineer: Actor
let administrator: Actor
let channels: Record<string, number>

beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  engineer = await createUser(db, { roles: ['engineer'], name: 'Edda Holm' })
  administrator = await createUser(db, { roles: ['administrator'], name: 'Ada Roe' })
  const west = await createSource(db, { code: 'NL-W', profile: NL_W, profileVersion: 1 })
  channels = {}
  for (const name of ['HC-01A', 'HC-01B', 'CC-01'])
    channels[name] = (await createChannel(db, { sourceId: west.id, name })).id
})

const night = () => new TextDecoder().decode(fixture('nl-w-night.csv'))

async function takeIn(text: string, fileName: string): Promise<number> {
  async function* stream() {
    yield new TextEncoder().encode(text)
  }
  const { importId } = await stageUpload(db, technician, MORNING, {
    sourceCode: 'NL-W',
    fileName,
    stream: stream(),
    statedBytes: null,
    limitBytes: 2 ** 26,
  })
  await acceptImport(db, technician, MORNING, importId)
  return importId
}

async function withdraw(importId: number) {
  await askWithdrawal(db, technician, MORNING, importId, 'wrong gauge in the file')
  await agreeWithdrawal(db, engineer, MORNING, importId)
  return withdrawImport(db, administrator, MORNING, importId)
}

/** Readings as they are stored, without the import that each is kept under. */
async function everything() {
  const rows = await db
    .select()
    .from(reading)
    .orderBy(asc(reading.channelId), asc(reading.at), asc(reading.seq))
  return rows.map(({ importId, lineNo, ...row }) => row)
}

const stateOf = async (importId: number) =>
  (await db.select().from(importFile).where(eq(importFile.id, importId)))[0]

describe('withdrawing an import', () => {
  it('takes its readings out of use, all of them, and keeps them with the import', async () => {
    const importId = await takeIn(night(), 'night.csv')
    const before = await db.select().from(reading)
    await db.delete(rollupDue)
    expect(await withdraw(importId)).toEqual({ withdrawn: 435, restored: 0, outOfDate: 0 })
    expect(await everything()).toEqual([])
    const aside = await db.select().from(readingAside).orderBy(readingAside.channelId, readingAside.at)
    const key = (row: { channelId: number; at: Date }) => `${row.channelId} ${row.at.toISOString()}`
    expect(aside.sort((a, b) => key(a).localeCompare(key(b)))).toEqual(
      before.sort((a, b) => key(a).localeCompare(key(b))),
    )
    expect(await stateOf(importId)).toMatchObject({ state: 'withdrawn', acceptedSha256: null })
    expect((await db.select().from(rollupDue)).map(({ channelId }) => channelId).sort()).toEqual(
      Object.values(channels).sort(),
    )
    const acts = await db
      .select()
      .from(record)
      .where(eq(record.subjectId, String(importId)))
      .orderBy(record.id)
    expect(acts.slice(-3).map(({ act, personId }) => [act, personId])).toEqual([
      ['withdrawal asked for', technician.personId],
      ['withdrawal agreed to', engineer.personId],
      ['import withdrawn', administrator.personId],
    ])
    expect(acts.at(-1)).toMatchObject({ reason: 'wrong gauge in the file' })
  })

  it('lets the same bytes be taken in again afterwards', async () => {
    const first = await takeIn(night(), 'night.csv')
    const before = await everything()
    await withdraw(first)
    const second = await takeIn(night(), 'night.csv')
    expect(second).not.toBe(first)
    expect(await everything()).toEqual(before)
  })

  it('keeps readings that another accepted file brought as well, now under that file', async () => {
    const lines = night().split('\r\n')
    const headText = `${lines.slice(0, 100).join('\r\n')}\r\n`
    const head = await takeIn(headText, 'head.csv')
    const all = await takeIn(`${night()}\r\n`, 'all.csv')
    const before = await everything()
    const stored = (await stateOf(head))?.readingCount ?? 0
    expect(stored).toBeGreaterThan(200)
    expect(await withdraw(head)).toMatchObject({ withdrawn: stored, restored: stored })
    expect(await everything()).toEqual(before)
    expect((await db.select().from(reading)).every(({ importId }) => importId === all)).toBe(true)
    expect(await stateOf(all)).toMatchObject({ readingCount: 435, heldCount: 0 })
    const ranges = await db.select().from(importRange).where(eq(importRange.importId, all))
    expect(ranges.map(({ readingCount }) => readingCount)).toEqual([145, 145, 145])
    // And that one can go as well, whole.
    expect(await withdraw(all)).toMatchObject({ withdrawn: 435, restored: 0 })
    expect(await everything()).toEqual([])
  })

  it('does not restore from a file that was withdrawn itself', async () => {
    const first = await takeIn(night(), 'night.csv')
    const second = await takeIn(`${night()}\r\n`, 'again.csv')
    expect(await withdraw(second)).toMatchObject({ withdrawn: 0, restored: 0 })
    expect(await withdraw(first)).toMatchObject({ withdrawn: 435, restored: 0 })
    expect(await everything()).toEqual([])
  })

  it('lifts the mark of a conflict whose other side has gone', async () => {
    await takeIn(night(), 'night.csv')
    const before = await everything()
    const changed = night().replace(';5,1E-10;1,4E-9\r\n', ';6,6E-10;1,4E-9\r\n')
    const second = await takeIn(changed, 'changed.csv')
    const marked = (rows: { marks: number }[]) =>
      rows.filter(({ marks }) => (marks & MARKS.conflict) !== 0).length
    expect(marked(await everything())).toBe(2)
    expect(await withdraw(second)).toMatchObject({ withdrawn: 1, restored: 0 })
    expect(await everything()).toEqual(before)
  })

  it('keeps a conflict between two others when a third is withdrawn', async () => {
    const change = (value: string) => night().replace(';5,1E-10;1,4E-9\r\n', `;${value};1,4E-9\r\n`)
    await takeIn(night(), 'night.csv')
    await takeIn(change('6,6E-10'), 'second.csv')
    const before = await everything()
    const third = await takeIn(change('7,7E-10'), 'third.csv')
    expect((await everything()).length).toBe(before.length + 1)
    await withdraw(third)
    expect(await everything()).toEqual(before)
  })

  it('marks what rests on its readings as out of date, and what rests on others not', async () => {
    const importId = await takeIn(night(), 'night.csv')
    const channelId = channels['HC-01A'] ?? 0
    const thing = (subjectId: string, from: string, to: string) =>
      beginDerived(db, {
        kind: 'curve',
        subjectId,
        madeAt: MORNING,
        basis: [{ channelId, from: new Date(from), to: new Date(to) }],
      })
    await thing('this night', '2026-11-08T20:00:00Z', '2026-11-08T22:00:00Z')
    await thing('long before', '2026-10-01T00:00:00Z', '2026-10-02T00:00:00Z')
    expect(await withdraw(importId)).toMatchObject({ outOfDate: 1 })
    expect(await readDerived(db, 'curve', 'this night')).toMatchObject({
      staleSince: MORNING,
      staleReason: `Import ${importId} (night.csv) was withdrawn: wrong gauge in the file`,
    })
    expect((await readDerived(db, 'curve', 'long before'))?.staleSince).toBeNull()
  })

  it('marks what was computed without a file that comes late', async () => {
    await beginDerived(db, {
      kind: 'curve',
      subjectId: 'early',
      madeAt: MORNING,
      basis: [
        {
          channelId: channels['HC-01A'] ?? 0,
          from: new Date('2026-11-08T20:00:00Z'),
          to: new Date('2026-11-08T22:00:00Z'),
        },
      ],
    })
    const importId = await takeIn(night(), 'night.csv')
    expect((await readDerived(db, 'curve', 'early'))?.staleReason).toContain(`Import ${importId} (night.csv)`)
  })
})

describe('who may do which part', () => {
  it('refuses each part to the roles that it is not for', async () => {
    const importId = await takeIn(night(), 'night.csv')
    const manager = await createUser(db, { roles: ['manager'] })
    const forbidden = { code: 'forbidden' }
    await expect(askWithdrawal(db, manager, MORNING, importId, 'why not')).rejects.toMatchObject(forbidden)
    await askWithdrawal(db, technician, MORNING, importId, 'wrong file')
    await expect(agreeWithdrawal(db, technician, MORNING, importId)).rejects.toMatchObject(forbidden)
    await expect(agreeWithdrawal(db, administrator, MORNING, importId)).rejects.toMatchObject(forbidden)
    await expect(refuseWithdrawal(db, manager, MORNING, importId, 'no')).rejects.toMatchObject(forbidden)
    await agreeWithdrawal(db, engineer, MORNING, importId)
    await expect(withdrawImport(db, engineer, MORNING, importId)).rejects.toMatchObject(forbidden)
    expect(await everything()).toHaveLength(435)
  })

  it('takes two people to ask and agree, and two to agree and withdraw, whatever roles they hold', async () => {
    const importId = await takeIn(night(), 'night.csv')
    const everyRole = await createUser(db, { roles: ['technician', 'engineer', 'administrator'] })
    await askWithdrawal(db, everyRole, MORNING, importId, 'wrong file')
    expect((await readWithdrawalPage(db, everyRole, importId)).may.agree).toBe(false)
    await expect(agreeWithdrawal(db, everyRole, MORNING, importId)).rejects.toMatchObject({
      code: 'forbidden',
    })
    await refuseWithdrawal(db, everyRole, MORNING, importId, 'a mistake')
    await askWithdrawal(db, technician, MORNING, importId, 'wrong file')
    await agreeWithdrawal(db, everyRole, MORNING, importId)
    expect((await readWithdrawalPage(db, everyRole, importId)).may.withdraw).toBe(false)
    await expect(withdrawImport(db, everyRole, MORNING, importId)).rejects.toMatchObject({
      code: 'forbidden',
    })
    expect((await readWithdrawalPage(db, administrator, importId)).may).toEqual({
      ask: false,
      agree: false,
      refuse: true,
      withdraw: true,
    })
  })

  it('goes in order: asked, agreed, done, once', async () => {
    const importId = await takeIn(night(), 'night.csv')
    const conflict = { code: 'conflict' }
    await expect(agreeWithdrawal(db, engineer, MORNING, importId)).rejects.toMatchObject(conflict)
    await askWithdrawal(db, technician, MORNING, importId, 'wrong file')
    await expect(askWithdrawal(db, engineer, MORNING, importId, 'me too')).rejects.toMatchObject({
      ...conflict,
      message: expect.stringContaining('Tilda Weir'),
    })
    await expect(withdrawImport(db, administrator, MORNING, importId)).rejects.toMatchObject(conflict)
    await agreeWithdrawal(db, engineer, MORNING, importId)
    await withdrawImport(db, administrator, MORNING, importId)
    await expect(withdrawImport(db, administrator, MORNING, importId)).rejects.toMatchObject(conflict)
    await expect(askWithdrawal(db, technician, MORNING, importId, 'again')).rejects.toMatchObject(conflict)
  })
})

describe('two at once', () => {
  it('withdraws once when two administrators press at the same moment', async () => {
    const importId = await takeIn(night(), 'night.csv')
    await askWithdrawal(db, technician, MORNING, importId, 'wrong file')
    await agreeWithdrawal(db, engineer, MORNING, importId)
    const second = await createUser(db, { roles: ['administrator'] })
    const results = await Promise.allSettled([
      withdrawImport(db, administrator, MORNING, importId),
      withdrawImport(other, second, MORNING, importId),
    ])
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
    expect(results.find((result) => result.status === 'rejected')?.reason).toMatchObject({ code: 'conflict' })
    expect(await db.select().from(readingAside)).toHaveLength(435)
  })

  it('ends as if in order when an overlapping file is taken in meanwhile', async () => {
    const first = await takeIn(night(), 'night.csv')
    const before = await everything()
    await askWithdrawal(db, technician, MORNING, first, 'wrong file')
    await agreeWithdrawal(db, engineer, MORNING, first)
    async function* stream() {
      yield new TextEncoder().encode(`${night()}\r\n`)
    }
    const staged = await stageUpload(db, technician, MORNING, {
      sourceCode: 'NL-W',
      fileName: 'again.csv',
      stream: stream(),
      statedBytes: null,
      limitBytes: 2 ** 26,
    })
    await Promise.all([
      withdrawImport(db, administrator, secondsAfter(MORNING, 1), first),
      acceptImport(other, technician, secondsAfter(MORNING, 1), staged.importId),
    ])
    expect(await everything()).toEqual(before)
    expect((await db.select().from(reading)).every(({ importId }) => importId === staged.importId)).toBe(true)
    expect(await stateOf(staged.importId)).toMatchObject({
      readingCount: 435,
      heldCount: 0,
      conflictCount: 0,
    })
  })
})
