import { beforeEach, describe, expect, it } from 'vitest'
import { limitValue, pump, supplySet } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { EDITED_KINDS, REGISTER_KINDS } from '#app/domain/schemas/register.ts'
import { type Cell, cellText } from '#app/services/register-cells.server.ts'
import { fitInstrument } from '#app/services/register-fittings.server.ts'
import { mapChannel } from '#app/services/register-maps.server.ts'
import {
  readRegisterDetail,
  readRegisterIndex,
  readRegisterList,
} from '#app/services/register-page.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import {
  createChannel,
  createFitting,
  createInstrument,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const NO_QUERY = new URLSearchParams()
let bram: Actor
let channelId: number

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  const place = await createSegment(db, { tag: 'SG-14' })
  const position = await createPosition(db, { tag: 'HC-14A', segmentId: place.id, label: 'west end' })
  await createFitting(db, {
    positionId: position.id,
    instrumentId: await createInstrument(db, { serial: 'Q-7741' }),
  })
  await createInstrument(db, { serial: 'Q-8120' })
  const source = await createSource(db, { code: 'NL-E' })
  channelId = (await createChannel(db, { sourceId: source.id, name: 'HC-14A', positionId: position.id })).id
  await db.insert(supplySet).values({ tag: 'HX-1', maxAmps: 1500, maxVolts: 60, openCircuitVolts: 75 })
  await db.insert(pump).values({ tag: 'MC-B', kind: 'turbomolecular-cart', speeds: { N2: 0.45 } })
  await db.insert(limitValue).values({
    kind: 'target',
    value: 2e-7,
    unit: 'Pa',
    startsAt: shift(MORNING, -60),
    reason: 'Adopted',
    recordedAt: MORNING,
  })
})

function said(cells: readonly Cell[]): string[] {
  return cells.map(cellText)
}

describe('the register', () => {
  it('counts its kinds and finds a word in tags, names and notes', async () => {
    const index = await readRegisterIndex(db, new URLSearchParams('words=14a'))
    expect(index.counts).toMatchObject({
      segments: 1,
      positions: 1,
      instruments: 2,
      channels: 1,
      sources: 1,
      'supply-sets': 1,
    })
    expect(index.hits).toEqual([
      { kind: 'positions', tag: 'HC-14A', to: '/register/positions/HC-14A' },
      { kind: 'channels', tag: 'HC-14A', to: `/register/channels/${channelId}` },
    ])
    expect((await readRegisterIndex(db, new URLSearchParams('words=west end'))).hits).toHaveLength(1)
    expect((await readRegisterIndex(db, new URLSearchParams('words=%25'))).hits).toEqual([])
    expect((await readRegisterIndex(db, NO_QUERY)).hits).toEqual([])
  })

  it.each(REGISTER_KINDS)('lists %s with as many cells as columns', async (kind) => {
    const list = await readRegisterList(db, kind, MORNING, NO_QUERY)
    for (const table of list.tables) {
      for (const { cells } of table.rows) expect(cells).toHaveLength(table.columns.length)
    }
    expect(list.total).toBe(list.tables.reduce((sum, { rows }) => sum + rows.length, 0))
  })

  it('shows what holds at the instant asked for', async () => {
    const [table] = (await readRegisterList(db, 'positions', MORNING, NO_QUERY)).tables
    expect(said(table?.rows[0]?.cells ?? [])).toEqual([
      'HC-14A',
      'Hot cathode',
      'SG-14',
      '80 ',
      'Q-7741',
      'NL-E HC-14A',
      'west end',
      '',
    ])
    const [limits] = (await readRegisterList(db, 'limits', MORNING, new URLSearchParams('words=target in')))
      .tables
    expect(limits?.rows[0]?.cells[2]).toEqual({ kind: 'pressure', pa: 2e-7 })
    const [before] = (
      await readRegisterList(db, 'limits', shift(MORNING, -61), new URLSearchParams('words=target in'))
    ).tables
    expect(said(before?.rows[0]?.cells ?? [])[2]).toBe('not set')
  })

  it('shows a long list in pages of a hundred, and the nearest page for a number that has none', async () => {
    // The register has two already.
    for (let n = 0; n < 201; n += 1) {
      await createInstrument(db, { serial: `P-${String(n).padStart(3, '0')}` })
    }
    const pageOf = async (query: string) => {
      const list = await readRegisterList(db, 'instruments', MORNING, new URLSearchParams(query))
      return [list.page, list.pages, list.found, list.tables[0]?.rows.length]
    }
    expect(await pageOf('')).toEqual([1, 3, 203, 100])
    expect(await pageOf('page=3')).toEqual([3, 3, 203, 3])
    expect(await pageOf('page=99')).toEqual([3, 3, 203, 3])
    expect(await pageOf('page=no')).toEqual([1, 3, 203, 100])
    expect(await pageOf('page=2&words=P-')).toEqual([2, 3, 201, 100])
  })

  it('puts the supply sets under the circuits and narrows a list by words', async () => {
    const list = await readRegisterList(db, 'circuits', MORNING, new URLSearchParams('words=hx'))
    expect(list.tables.map(({ title, rows }) => [title, rows.length])).toEqual([
      ['Heater circuits', 0],
      ['Supply sets', 1],
    ])
  })
})

describe('the page of one thing', () => {
  it('shows instruments and channels of a position, former beliefs included, and who changed them', async () => {
    const before = await readRegisterDetail(db, 'positions', 'hc-14a', MORNING)
    expect(before.form).toMatchObject({
      form: 'fitting',
      serial: 'Q-7741',
      factor: 1,
      choices: ['Q-7741', 'Q-8120'],
    })
    await fitInstrument(db, bram, MORNING, 'HC-14A', {
      seen: before.form?.seen ?? 0,
      serial: 'Q-8120',
      factor: 0.97,
      startsAt: MORNING,
      endsAt: null,
      reason: 'Filament gone',
    })
    const page = await readRegisterDetail(db, 'positions', 'HC-14A', MORNING)
    expect(page.form).toMatchObject({ serial: 'Q-8120', factor: 0.97 })
    expect(page.tables[0]?.rows.map(({ replaced }) => replaced).sort()).toEqual([false, false, true])
    expect(page.history).toMatchObject([
      { person: 'Bram', act: 'instrument fitted', effectiveAt: MORNING, reason: 'Filament gone' },
    ])
    expect(
      page.history[0]?.changes.map(({ name, before: was, after: is }) => [name, cellText(was), cellText(is)]),
    ).toEqual([
      ['Was', 'Q-7741, factor 1', ''],
      ['Is', '', 'Q-8120, factor 0.97'],
    ])
  })

  it('shows the maps of a channel', async () => {
    await createPosition(db, { tag: 'HC-15A' })
    const form = (await readRegisterDetail(db, 'channels', String(channelId), MORNING)).form
    expect(form).toMatchObject({ form: 'channel-map', position: 'HC-14A', choices: ['HC-14A', 'HC-15A'] })
    await mapChannel(db, bram, MORNING, channelId, {
      seen: form?.seen ?? 0,
      position: 'HC-15A',
      startsAt: MORNING,
      endsAt: null,
      other: '',
      reason: 'Moved over',
    })
    const page = await readRegisterDetail(db, 'channels', String(channelId), MORNING)
    expect(page.tag).toBe('HC-14A')
    expect(said(page.tables[0]?.rows[0]?.cells ?? []).slice(0, 3)).toEqual(['HC-14A', 'NL-E', 'HC-15A'])
    expect(page.history).toHaveLength(1)
  })

  it('says that a thing is not there', async () => {
    for (const [kind, key] of [
      ...EDITED_KINDS.map((kind) => [kind, 'XX-1'] as const),
      ['channels', 'abc'],
      ['channels', '99999'],
      ['limits', 'x'],
      ['equipment', 'LD-1'],
    ] as const) {
      await expect(readRegisterDetail(db, kind, key, MORNING), `${kind} ${key}`).rejects.toMatchObject({
        code: 'not-found',
      })
    }
  })
})
