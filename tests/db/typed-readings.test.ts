import { asc, eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import {
  channel,
  channelMap,
  importFile,
  reading,
  record,
  source,
  typedReading,
} from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { MARKS, qualityCode } from '#app/domain/readings.ts'
import { readStandings } from '#app/services/standing.server.ts'
import { readTypedReadingPage, typeReading } from '#app/services/typed-readings.server.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createFitting,
  createInstrument,
  createPosition,
  createSegment,
  createSite,
  createState,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
let technician: Actor
let segment: { id: number; tag: string; lineId: number }
let gauge: { id: number; tag: string }

beforeEach(async () => {
  await createSite(db)
  technician = await createUser(db, { roles: ['technician'], name: 'Tilda Weir' })
  segment = await createSegment(db, { tag: 'SG-11', startM: 1500, endM: 1650 })
  gauge = await createPosition(db, {
    tag: 'HC-11B',
    segmentId: segment.id,
    lineId: segment.lineId,
    chainageM: 1575,
  })
  const instrumentId = await createInstrument(db, { serial: 'Q-8120', rangeMin: 1e-9, rangeMax: 1e-2 })
  await createFitting(db, { positionId: gauge.id, instrumentId })
})

function type(typed: Record<string, unknown> = {}, on = db, tag = 'SG-11') {
  return typeReading(on, technician, MORNING, tag, {
    position: 'HC-11B',
    value: '2.4e-5',
    unit: 'Pa',
    at: MORNING,
    instrument: '',
    note: '',
    ...typed,
  })
}

const stored = () => db.select().from(reading).orderBy(asc(reading.at), asc(reading.seq))

describe('a typed reading', () => {
  it('stands under HAND as typed by hand, with who, when, from what and as typed', async () => {
    expect(await type({ value: '2,4E-7', unit: 'mbar', note: 'display flickers' })).toBe(
      'HC-11B at 2026-11-09 08:00: 2.40 × 10⁻⁵ Pa, written down.',
    )
    const [row] = await stored()
    const [typed] = await db.select().from(typedReading)
    expect(row).toMatchObject({
      at: MORNING,
      quality: qualityCode('manual'),
      marks: 0,
      importId: 0,
      lineNo: typed?.id,
    })
    // 1 mbar is 100 Pa by definition of the bar.
    expect(row?.value).toBeCloseTo(2.4e-5, 16)
    expect(typed).toMatchObject({
      valueText: '2,4E-7',
      unit: 'mbar',
      instrumentText: 'Q-8120',
      note: 'display flickers',
      typedBy: technician.personId,
      typedAt: MORNING,
    })
    const [hand] = await db.select().from(source)
    expect(hand).toMatchObject({ code: 'HAND', dueAt: '' })
    const acts = await db.select().from(record).where(eq(record.act, 'reading typed'))
    expect(acts).toMatchObject([
      { personId: technician.personId, subjectId: String(gauge.id), effectiveAt: MORNING },
    ])
    expect(await db.select().from(importFile)).toEqual([])
  })

  it('is what the segment shows, for a shift', async () => {
    await createState(db, { segmentId: segment.id, setBy: technician.personId, state: 'pumping' })
    await type()
    const headline = async (now: Date) => (await readStandings(db, now, 'SG-11'))[0]?.standing.headline
    expect(await headline(secondsAfter(MORNING, 3600))).toMatchObject({
      tag: 'HC-11B',
      value: 2.4e-5,
      fresh: true,
    })
    expect((await headline(secondsAfter(MORNING, 13 * 3600)))?.fresh).not.toBe(true)
  })

  it('may be a word, kept without a value', async () => {
    await type({ value: 'off' })
    expect(await stored()).toMatchObject([{ value: null, quality: qualityCode('off') }])
  })

  it('typed twice is there once; unlike another of its minute, both are marked', async () => {
    await type()
    expect(await type()).toContain('was there already')
    expect(await db.select().from(typedReading)).toHaveLength(1)
    expect(await type({ value: '2.5e-5' })).toContain('Both are marked')
    expect((await stored()).map(({ seq, marks }) => [seq, marks])).toEqual([
      [0, MARKS.conflict],
      [1, MARKS.conflict],
    ])
  })

  it('typed by two at once makes one channel, and the same value is kept once', async () => {
    const both = await Promise.all([type(), type({}, other)])
    expect(both.filter((said) => said.includes('was there already'))).toHaveLength(1)
    expect(await db.select().from(channel)).toHaveLength(1)
    expect(await stored()).toHaveLength(1)
  })

  it('goes to the hand channel that the register gives the position', async () => {
    await type()
    const [map] = await db.select().from(channelMap)
    expect(map).toMatchObject({ positionId: gauge.id, startsAt: secondsAfter(MORNING, -31 * 86_400) })
    await db.update(channelMap).set({ endsAt: secondsAfter(MORNING, -60) })
    await expect(type({ value: '3e-5' })).rejects.toMatchObject({ code: 'conflict' })
    expect(await stored()).toHaveLength(1)
  })
})

describe('what is refused, by field', () => {
  it.each([
    ['position', { position: 'HC-12B' }, 'Choose one from the list'],
    ['value', { value: '38' }, 'expected what Q-8120 can read'],
    ['value', { value: '0' }, 'has no reading'],
    ['unit', { unit: '°C' }, 'expected a unit of pressure'],
    ['at', { at: secondsAfter(MORNING, 301) }, 'expected now (2026-11-09 08:00) or earlier'],
    ['at', { at: secondsAfter(MORNING, -32 * 86_400) }, 'within the last 31 days'],
    ['instrument', { instrument: 'R-1' }, 'which reads temperature; expected an instrument for pressure'],
  ])('%s: %j', async (field, typed, says) => {
    await createInstrument(db, { serial: 'R-1', quantity: 'temperature' })
    await expect(type(typed)).rejects.toMatchObject({
      code: 'bad-input',
      fields: { [field]: [expect.stringContaining(says)] },
    })
    expect(await stored()).toEqual([])
    expect(await db.select().from(typedReading)).toEqual([])
  })

  it('an unknown instrument where none is fitted', async () => {
    await createPosition(db, {
      tag: 'BX-11-01',
      kind: 'bellows-scale',
      quantity: 'stroke',
      segmentId: segment.id,
    })
    const scale = { position: 'BX-11-01', value: '33', unit: 'mm' }
    await expect(type(scale)).rejects.toMatchObject({
      fields: { instrument: [expect.stringContaining('steel rule')] },
    })
    expect(await type({ ...scale, instrument: 'steel rule' })).toContain('33 mm, written down')
  })

  it('who may not', async () => {
    technician = await createUser(db, {
      roles: ['manager', 'safety-officer', 'administrator', 'contributor'],
    })
    await expect(type()).rejects.toMatchObject({ code: 'forbidden' })
    await expect(readTypedReadingPage(db, technician, MORNING, 'SG-11')).rejects.toMatchObject({
      code: 'forbidden',
    })
  })

  it('a segment that is not there', async () => {
    await expect(type({}, db, 'SG-99')).rejects.toMatchObject({ code: 'not-found' })
  })
})

describe('the page', () => {
  it('offers what one can read at the segment, with its instrument, and what was typed', async () => {
    const { lineId } = segment
    const add = (tag: string, rest: Parameters<typeof createPosition>[1]) =>
      createPosition(db, { tag, ...rest })
    await add('OX-8', { kind: 'oxygen', quantity: 'oxygen', lineId, chainageM: 1500 })
    await add('OX-9', { kind: 'oxygen', quantity: 'oxygen', lineId, chainageM: 1700 })
    await add('HX-1-U', { kind: 'supply-volts', quantity: 'voltage', chainageM: null })
    await add('BF-01', { kind: 'bay-fan', quantity: 'switch', lineId, chainageM: 1510 })
    await add('TH-11-01', {
      kind: 'thermocouple',
      quantity: 'temperature',
      segmentId: segment.id,
      retiredAt: secondsAfter(MORNING, -60),
    })
    await type({ note: 'by torch light' })
    const page = await readTypedReadingPage(db, technician, MORNING, 'SG-11')
    expect(page.positions.map(({ tag, fitted }) => [tag, fitted])).toEqual([
      ['OX-8', null],
      ['HC-11B', 'Q-8120'],
      ['HX-1-U', null],
    ])
    expect(page.typed).toMatchObject([{ position: 'HC-11B', note: 'by torch light', typedBy: 'Tilda Weir' }])
  })
})
