import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { findRegisterRow, listSegmentPlaces } from '#app/db/queries/register-rows.server.ts'
import { instrument, position, pump, record, segment } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { DomainError } from '#app/domain/errors.ts'
import type { EditedKind, EditedValues } from '#app/domain/schemas/register.ts'
import { addThing, editThing } from '#app/services/register-edit.server.ts'
import { type Values, valuesOf } from '#app/services/register-values.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createChannel,
  createInstrument,
  createLine,
  createPosition,
  createSegment,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
let bram: Actor

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
})

async function formOf(
  kind: EditedKind,
  tag: string,
  changes: Values,
  frame: Partial<EditedValues> = {},
): Promise<EditedValues> {
  const row = await findRegisterRow(db, kind, tag)
  if (row === null) throw new Error(`no ${tag}`)
  const values = { ...valuesOf(kind, row, await listSegmentPlaces(db)), ...changes }
  return { values, revision: row.revision, validFrom: MORNING, reason: 'Measured again', tag: '', ...frame }
}

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

describe('editing the register', () => {
  it('stores the change and puts only what differs on record, with its date and reason', async () => {
    const { tag } = await createSegment(db)
    const validFrom = shift(MORNING, -86_400)
    await editThing(
      db,
      bram,
      MORNING,
      'segments',
      tag,
      await formOf('segments', tag, { steel: '316LN', lastBakeYear: 2026 }, { validFrom }),
    )
    const [row] = await db.select().from(segment).where(eq(segment.tag, tag))
    expect(row).toMatchObject({ steel: '316LN', lastBakeYear: 2026, revision: 2, startM: 0, endM: 160 })
    const lines = await db.select().from(record)
    expect(lines).toHaveLength(1)
    expect(lines[0]).toMatchObject({
      personId: bram.personId,
      subjectKind: 'segment',
      subjectId: tag,
      effectiveAt: validFrom,
      before: { steel: '304L', lastBakeYear: null },
      after: { steel: '316LN', lastBakeYear: 2026 },
      reason: 'Measured again',
    })
  })

  it('stores the feeder that a bake of a segment draws from, and that nobody knows it any more', async () => {
    const { tag } = await createSegment(db)
    const stored = async (feeder: 'east' | null) => {
      await editThing(db, bram, MORNING, 'segments', tag, await formOf('segments', tag, { feeder }))
      return (await db.select().from(segment).where(eq(segment.tag, tag)))[0]?.feeder
    }
    expect(await stored('east')).toBe('east')
    expect(await stored(null)).toBeNull()
    const lines = await db.select().from(record)
    expect(lines.map(({ after }) => after)).toEqual([{ feeder: 'east' }, { feeder: null }])
  })

  it('stores what somebody typed over no newer edit, and says what that was', async () => {
    const { tag } = await createSegment(db)
    const stale = await formOf('segments', tag, { bellowsCount: 9 })
    await editThing(db, bram, MORNING, 'segments', tag, await formOf('segments', tag, { steel: '316LN' }))
    const error = await refusal(editThing(db, bram, MORNING, 'segments', tag, stale))
    expect(error).toMatchObject({ code: 'conflict', status: 409 })
    expect(error.message).toContain('Bram changed Steel from 304L to 316LN.')
    const [row] = await db.select().from(segment).where(eq(segment.tag, tag))
    expect(row).toMatchObject({ bellowsCount: 8, steel: '316LN', revision: 2 })
  })

  it('lets exactly one of two people through who save at once', async () => {
    const { tag } = await createSegment(db)
    const forms = await Promise.all([9, 10].map((bellowsCount) => formOf('segments', tag, { bellowsCount })))
    const results = await Promise.allSettled(
      forms.map((form, index) => editThing(index === 0 ? db : other, bram, MORNING, 'segments', tag, form)),
    )
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
    expect(await db.select().from(record)).toHaveLength(1)
  })

  it('refuses a date to come, an unchanged form and an unknown tag', async () => {
    const { tag } = await createSegment(db)
    const later = await formOf('segments', tag, { bellowsCount: 9 }, { validFrom: shift(MORNING, 3600) })
    expect(Object.keys((await refusal(editThing(db, bram, MORNING, 'segments', tag, later))).fields)).toEqual(
      ['validFrom'],
    )
    const same = await formOf('segments', tag, {})
    expect((await refusal(editThing(db, bram, MORNING, 'segments', tag, same))).message).toContain(
      'Nothing differs',
    )
    expect(await refusal(editThing(db, bram, MORNING, 'segments', 'SG-99', same))).toMatchObject({
      code: 'not-found',
    })
    expect(await db.select().from(record)).toHaveLength(0)
  })

  it.each(['technician', 'safety-officer', 'manager', 'contributor'] as const)(
    'is not for a %s',
    async (role) => {
      const { tag } = await createSegment(db)
      const actor = await createUser(db, { roles: [role] })
      const form = await formOf('segments', tag, { bellowsCount: 9 })
      expect(await refusal(editThing(db, actor, MORNING, 'segments', tag, form))).toMatchObject({
        code: 'forbidden',
      })
      expect(await refusal(addThing(db, actor, MORNING, 'pumps', form))).toMatchObject({ code: 'forbidden' })
    },
  )
})

describe('what one form cannot see', () => {
  it('lets two segments share no tube and none leave its line', async () => {
    const lineId = await createLine(db, { lengthM: 320 })
    const west = await createSegment(db, { lineId, startM: 0, endM: 160 })
    const east = await createSegment(db, { lineId, startM: 160, endM: 320 })
    const over = await refusal(
      editThing(db, bram, MORNING, 'segments', west.tag, await formOf('segments', west.tag, { endM: 170 })),
    )
    expect(over.fields.endM?.[0]).toContain(`${east.tag} lies from 160 to 320 m`)
    const out = await refusal(
      editThing(db, bram, MORNING, 'segments', east.tag, await formOf('segments', east.tag, { endM: 330 })),
    )
    expect(out.fields.endM?.[0]).toContain('ends at 320 m')
  })

  it('keeps a position on its segment', async () => {
    const place = await createSegment(db)
    const { tag } = await createPosition(db, { segmentId: place.id })
    const error = await refusal(
      editThing(db, bram, MORNING, 'positions', tag, await formOf('positions', tag, { chainageM: 161 })),
    )
    expect(error.fields.chainageM?.[0]).toBe(`${place.tag} runs from 0 to 160 m; 161 m is not on it.`)
    const unknown = await refusal(
      editThing(db, bram, MORNING, 'positions', tag, await formOf('positions', tag, { segment: 'SG-99' })),
    )
    expect(Object.keys(unknown.fields)).toEqual(['segment'])
  })

  it('does not turn a position with channels into one of another quantity', async () => {
    const { id, tag } = await createPosition(db)
    await createChannel(db, { sourceId: (await createSource(db)).id, positionId: id })
    const error = await refusal(
      editThing(
        db,
        bram,
        MORNING,
        'positions',
        tag,
        await formOf('positions', tag, { quantity: 'temperature' }),
      ),
    )
    expect(Object.keys(error.fields)).toEqual(['quantity'])
  })
})

describe('adding to the register', () => {
  const FRAME = { revision: 0, validFrom: MORNING, reason: 'Delivered today' }

  it('adds a pump with unknown and with no speed kept apart', async () => {
    const values = { kind: 'turbomolecular-cart', speedH2: 0.4, speedAr: 0, ultimatePa: 1e-7, note: '' }
    await addThing(db, bram, MORNING, 'pumps', { ...FRAME, tag: 'MC-E', values })
    const [row] = await db.select().from(pump)
    expect(row).toMatchObject({ tag: 'MC-E', speeds: { H2: 0.4, Ar: 0 }, revision: 1 })
    expect(await db.select().from(record)).toHaveLength(1)
  })

  it('puts a new position on the line of its segment', async () => {
    const place = await createSegment(db)
    const values = {
      kind: 'hot-cathode',
      quantity: 'pressure',
      segment: place.tag,
      chainageM: 80,
      label: '',
      retiredAt: null,
    }
    await addThing(db, bram, MORNING, 'positions', { ...FRAME, tag: 'HC-99A', values })
    const [row] = await db.select().from(position)
    expect(row).toMatchObject({ tag: 'HC-99A', segmentId: place.id, lineId: place.lineId })
  })

  it('refuses a serial number that is taken and leaves no record of it', async () => {
    await createInstrument(db, { serial: 'Q-8120' })
    const values = {
      kind: 'hot-cathode',
      quantity: 'pressure',
      rangeMin: null,
      rangeMax: null,
      calibrationDue: null,
      certificate: '',
      note: '',
    }
    const error = await refusal(
      addThing(db, bram, MORNING, 'instruments', { ...FRAME, tag: 'q-8120', values }),
    )
    expect(Object.keys(error.fields)).toEqual(['tag'])
    expect(await db.select().from(instrument)).toHaveLength(1)
    expect(await db.select().from(record)).toHaveLength(0)
  })
})
