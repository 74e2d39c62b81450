import { beforeEach, describe, expect, it } from 'vitest'
import { factorAt, listFittingSpans } from '#app/db/queries/readings.server.ts'
import { listFittings } from '#app/db/queries/register-maps.server.ts'
import { record } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { spanAt } from '#app/domain/dated-spans.ts'
import type { DomainError } from '#app/domain/errors.ts'
import type { FittingForm } from '#app/domain/schemas/register-dated.ts'
import { fitInstrument } from '#app/services/register-fittings.server.ts'
import { beginDerived, listOutOfDate } from '#app/services/revisions.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createChannel,
  createFitting,
  createInstrument,
  createPosition,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const EXCHANGED = shift(MORNING, 3.5 * 3600)
let bram: Actor
let positionId: number

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  positionId = (await createPosition(db, { tag: 'HC-14A' })).id
  const instrumentId = await createInstrument(db, { serial: 'Q-7741' })
  await createFitting(db, { positionId, instrumentId, factor: 1.08 })
  await createInstrument(db, { serial: 'Q-8120' })
})

async function form(changes: Partial<FittingForm>): Promise<FittingForm> {
  const seen = Math.max(0, ...(await listFittings(db, { positionId })).map(({ id }) => id))
  return {
    seen,
    serial: 'Q-8120',
    factor: 0.97,
    startsAt: EXCHANGED,
    endsAt: null,
    reason: 'Filament gone',
    ...changes,
  }
}

async function sitsAt(at: Date): Promise<string | undefined> {
  return spanAt(await listFittings(db, { positionId }), at)?.serial
}

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

describe('exchanging an instrument', () => {
  it('keeps the old factor for readings before the instant and uses the new one from it on', async () => {
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({}))
    const spans = await listFittingSpans(db, [positionId])
    expect(factorAt(spans, positionId, shift(EXCHANGED, -1))).toBe(1.08)
    expect(factorAt(spans, positionId, EXCHANGED)).toBe(0.97)
    expect(await sitsAt(shift(EXCHANGED, -1))).toBe('Q-7741')
    expect(await sitsAt(EXCHANGED)).toBe('Q-8120')
  })

  it('keeps what was believed before and records both', async () => {
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({}))
    const all = await listFittings(db, { positionId, withReplaced: true })
    expect(all.filter(({ replacedAt }) => replacedAt !== null)).toMatchObject([
      { serial: 'Q-7741', endsAt: null },
    ])
    const [line] = await db.select().from(record)
    expect(line).toMatchObject({
      act: 'instrument fitted',
      subjectId: 'HC-14A',
      effectiveAt: EXCHANGED,
      before: [{ instrument: 'Q-7741', factor: 1.08 }],
      after: [{ instrument: 'Q-8120', factor: 0.97 }],
    })
  })

  it('marks what rests on the channels of the position since then as out of date', async () => {
    const { id } = await createChannel(db, { sourceId: (await createSource(db)).id, positionId })
    const basis = [{ channelId: id, from: MORNING, to: shift(EXCHANGED, 60) }]
    await beginDerived(db, { kind: 'curve', subjectId: 'SG-14', madeAt: MORNING, basis })
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({}))
    expect((await listOutOfDate(db)).map(({ subjectId }) => subjectId)).toEqual(['SG-14'])
  })

  it('takes an instrument out, so that it can sit elsewhere', async () => {
    await createPosition(db, { tag: 'HC-15A' })
    const seat = await form({ serial: 'Q-7741', seen: 0 })
    const taken = await refusal(fitInstrument(db, bram, EXCHANGED, 'HC-15A', seat))
    expect(taken.fields.serial?.[0]).toContain(
      'Q-7741 sits at HC-14A from 2025-01-01 01:00 (UTC+01:00) and still does',
    )
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({ serial: '' }))
    await fitInstrument(db, bram, EXCHANGED, 'HC-15A', seat)
    expect(await sitsAt(EXCHANGED)).toBeUndefined()
    expect(await sitsAt(shift(EXCHANGED, -1))).toBe('Q-7741')
  })

  it('corrects a factor from an instant on without an exchange', async () => {
    await fitInstrument(
      db,
      bram,
      MORNING,
      'HC-14A',
      await form({ serial: 'Q-7741', factor: 1.1, startsAt: MORNING }),
    )
    const spans = await listFittingSpans(db, [positionId])
    expect(factorAt(spans, positionId, shift(MORNING, -1))).toBe(1.08)
    expect(factorAt(spans, positionId, MORNING)).toBe(1.1)
  })
})

describe('what is refused', () => {
  it('names an instrument that is unknown or measures something else, and a change that changes nothing', async () => {
    await createInstrument(db, { serial: 'K-1', kind: 'thermocouple', quantity: 'temperature' })
    const unknown = await refusal(fitInstrument(db, bram, MORNING, 'HC-14A', await form({ serial: 'Q-1' })))
    expect(unknown.fields.serial?.[0]).toContain('no instrument "Q-1"')
    const wrong = await refusal(fitInstrument(db, bram, MORNING, 'HC-14A', await form({ serial: 'K-1' })))
    expect(wrong.fields.serial?.[0]).toBe('K-1 measures temperature, HC-14A pressure.')
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({}))
    const again = await refusal(fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({})))
    expect(again.fields.serial?.[0]).toContain('already')
  })

  it('does not write over a newer exchange', async () => {
    const stale = await form({ serial: '' })
    await fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({}))
    const error = await refusal(fitInstrument(db, bram, EXCHANGED, 'HC-14A', stale))
    expect(error).toMatchObject({ code: 'conflict' })
    expect(error.message).toContain('Bram put Q-8120 there')
  })

  it('is not for a technician', async () => {
    const pim = await createUser(db, { roles: ['technician'] })
    expect(await refusal(fitInstrument(db, pim, MORNING, 'HC-14A', await form({})))).toMatchObject({
      code: 'forbidden',
    })
  })

  it('puts one instrument into one place when two people save at once', async () => {
    await createPosition(db, { tag: 'HC-15A' })
    const results = await Promise.allSettled([
      fitInstrument(db, bram, EXCHANGED, 'HC-14A', await form({})),
      fitInstrument(other, bram, EXCHANGED, 'HC-15A', await form({ seen: 0 })),
    ])
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  })
})
