import { beforeEach, describe, expect, it } from 'vitest'
import { listMaps } from '#app/db/queries/register-maps.server.ts'
import { channelMap, record } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { overlaps, spanAt } from '#app/domain/dated-spans.ts'
import type { DomainError } from '#app/domain/errors.ts'
import type { ChannelMapForm } from '#app/domain/schemas/register-dated.ts'
import { mapChannel } from '#app/services/register-maps.server.ts'
import { beginDerived, listOutOfDate } from '#app/services/revisions.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createChannel,
  createPosition,
  createSite,
  createSource,
  createUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const CROSSED = new Date('2026-10-20T08:40:00.000Z')
let bram: Actor
let sourceId: number
/** Channels of one source, each on the position of the same name. */
let channels: Record<'HC-03B' | 'HC-04A', number>

beforeEach(async () => {
  await createSite(db)
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  sourceId = (await createSource(db)).id
  const make = async (name: string) => {
    const { id } = await createPosition(db, { tag: name })
    return (await createChannel(db, { sourceId, name, positionId: id })).id
  }
  channels = { 'HC-03B': await make('HC-03B'), 'HC-04A': await make('HC-04A') }
})

async function seenOf(channelId: number): Promise<number> {
  return Math.max(0, ...(await listMaps(db, { channelId })).map(({ id }) => id))
}

async function form(channelId: number, changes: Partial<ChannelMapForm>): Promise<ChannelMapForm> {
  return {
    seen: await seenOf(channelId),
    position: '',
    startsAt: CROSSED,
    endsAt: null,
    other: '',
    reason: 'Cables found crossed',
    ...changes,
  }
}

async function positionAt(channelId: number, at: Date): Promise<string | undefined> {
  return spanAt(await listMaps(db, { channelId }), at)?.position
}

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

describe('mapping a channel', () => {
  it('exchanges two crossed channels from an instant on and leaves all before it', async () => {
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-04A', other: 'exchange' }),
    )
    for (const [at, b03, a04] of [
      [shift(CROSSED, -1), 'HC-03B', 'HC-04A'],
      [CROSSED, 'HC-04A', 'HC-03B'],
      [MORNING, 'HC-04A', 'HC-03B'],
    ] as const) {
      expect(await positionAt(channels['HC-03B'], at)).toBe(b03)
      expect(await positionAt(channels['HC-04A'], at)).toBe(a04)
    }
  })

  it('keeps the former rows as replaced and puts before and after on record', async () => {
    const former = await listMaps(db, { sourceId })
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-04A', other: 'exchange' }),
    )
    const rows = await db.select().from(channelMap)
    for (const { id, startsAt } of former) {
      expect(rows.find((row) => row.id === id)).toMatchObject({ startsAt, endsAt: null, replacedAt: MORNING })
    }
    expect(rows).toHaveLength(6)
    const [line] = await db.select().from(record)
    expect(line).toMatchObject({
      subjectKind: 'channel',
      subjectId: String(channels['HC-03B']),
      effectiveAt: CROSSED,
      reason: 'Cables found crossed',
    })
    expect(line?.before).toHaveLength(2)
    expect(line?.after).toMatchObject([
      { channel: 'HC-03B', position: 'HC-04A' },
      { channel: 'HC-04A', position: 'HC-03B' },
    ])
  })

  it('marks what rests on either channel since then as out of date, and nothing older', async () => {
    const before = shift(CROSSED, -7200)
    const basis = (channelId: number, from: Date, to: Date) => ({
      madeAt: MORNING,
      basis: [{ channelId, from, to }],
    })
    await beginDerived(db, { kind: 'curve', subjectId: 'own', ...basis(channels['HC-03B'], before, MORNING) })
    await beginDerived(db, {
      kind: 'curve',
      subjectId: 'rival',
      ...basis(channels['HC-04A'], CROSSED, MORNING),
    })
    await beginDerived(db, {
      kind: 'curve',
      subjectId: 'older',
      ...basis(channels['HC-03B'], before, shift(CROSSED, -1)),
    })
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-04A', other: 'exchange' }),
    )
    expect((await listOutOfDate(db)).map(({ subjectId }) => subjectId).sort()).toEqual(['own', 'rival'])
  })

  it('asks what becomes of the channel that belongs there, and can release it', async () => {
    const asked = await refusal(
      mapChannel(
        db,
        bram,
        MORNING,
        channels['HC-03B'],
        await form(channels['HC-03B'], { position: 'HC-04A' }),
      ),
    )
    expect(asked.fields.other?.[0]).toContain('HC-04A of the same source belongs to HC-04A')
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-04A', other: 'release' }),
    )
    expect(await positionAt(channels['HC-03B'], MORNING)).toBe('HC-04A')
    expect(await positionAt(channels['HC-04A'], MORNING)).toBeUndefined()
    expect(await positionAt(channels['HC-04A'], shift(CROSSED, -1))).toBe('HC-04A')
  })

  it('takes a channel off for a while and gives it back after', async () => {
    const endsAt = shift(CROSSED, 3600)
    await mapChannel(db, bram, MORNING, channels['HC-03B'], await form(channels['HC-03B'], { endsAt }))
    expect(await positionAt(channels['HC-03B'], CROSSED)).toBeUndefined()
    expect(await positionAt(channels['HC-03B'], endsAt)).toBe('HC-03B')
  })

  it('holds up to the next change that is recorded already', async () => {
    const later = shift(CROSSED, 7200)
    await createPosition(db, { tag: 'HC-05A' })
    await createPosition(db, { tag: 'HC-06A' })
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-05A', startsAt: later }),
    )
    await mapChannel(
      db,
      bram,
      MORNING,
      channels['HC-03B'],
      await form(channels['HC-03B'], { position: 'HC-06A' }),
    )
    expect(await positionAt(channels['HC-03B'], shift(later, -1))).toBe('HC-06A')
    expect(await positionAt(channels['HC-03B'], later)).toBe('HC-05A')
  })

  it('lets channels of two sources belong to one position', async () => {
    const hand = await createChannel(db, { sourceId: (await createSource(db)).id, name: 'HC-04A by hand' })
    await mapChannel(db, bram, MORNING, hand.id, await form(hand.id, { position: 'HC-04A' }))
    expect(await positionAt(hand.id, MORNING)).toBe('HC-04A')
    expect(await positionAt(channels['HC-04A'], MORNING)).toBe('HC-04A')
  })
})

describe('what is refused', () => {
  it('names a position that is unknown or measures something else', async () => {
    await createPosition(db, { tag: 'TH-03-01', kind: 'thermocouple', quantity: 'temperature' })
    const id = channels['HC-03B']
    const unknown = await refusal(mapChannel(db, bram, MORNING, id, await form(id, { position: 'HC-99' })))
    expect(unknown.fields.position?.[0]).toContain('no position "HC-99"')
    const wrong = await refusal(mapChannel(db, bram, MORNING, id, await form(id, { position: 'TH-03-01' })))
    expect(wrong.fields.position?.[0]).toContain('measures temperature, this channel pressure')
    const same = await refusal(mapChannel(db, bram, MORNING, id, await form(id, { position: 'HC-03B' })))
    expect(same.fields.position?.[0]).toContain('already')
  })

  it('does not write over a map that was changed since the form was made', async () => {
    const id = channels['HC-03B']
    const stale = await form(id, { position: '' })
    await createPosition(db, { tag: 'HC-05A' })
    await mapChannel(db, bram, MORNING, id, await form(id, { position: 'HC-05A' }))
    const error = await refusal(mapChannel(db, bram, MORNING, id, stale))
    expect(error).toMatchObject({ code: 'conflict', status: 409 })
    expect(error.message).toContain('Bram mapped it to HC-05A')
  })

  it('is not for a technician', async () => {
    const pim = await createUser(db, { roles: ['technician'] })
    const id = channels['HC-03B']
    expect(await refusal(mapChannel(db, pim, MORNING, id, await form(id, {})))).toMatchObject({
      code: 'forbidden',
    })
  })

  it('never gives one position to two channels of a source, also when two people save at once', async () => {
    await createPosition(db, { tag: 'HC-05A' })
    const forms = await Promise.all([
      form(channels['HC-03B'], { position: 'HC-05A' }),
      form(channels['HC-04A'], { position: 'HC-05A' }),
    ])
    const results = await Promise.allSettled([
      mapChannel(db, bram, MORNING, channels['HC-03B'], forms[0]),
      mapChannel(other, bram, MORNING, channels['HC-04A'], forms[1]),
    ])
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
    const rows = await listMaps(db, { sourceId })
    for (const [index, one] of rows.entries()) {
      for (const two of rows.slice(index + 1)) {
        if (one.positionId === two.positionId || one.channelId === two.channelId)
          expect(overlaps(one, two)).toBe(false)
      }
    }
  })
})
