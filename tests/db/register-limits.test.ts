import { eq } from 'drizzle-orm'
import { beforeEach, describe, expect, it } from 'vitest'
import { listDatedLimits, listPlacements } from '#app/db/queries/register-limits.server.ts'
import { listLimits } from '#app/db/queries/segments.server.ts'
import { pump, record } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import type { DomainError } from '#app/domain/errors.ts'
import type { LimitForm, PlacementForm } from '#app/domain/schemas/register-dated.ts'
import { setLimit } from '#app/services/register-limits.server.ts'
import { placePump } from '#app/services/register-placements.server.ts'
import { MORNING, after as shift } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createSite, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const TOMORROW = shift(MORNING, 86_400)
let bram: Actor

beforeEach(async () => {
  bram = await createUser(db, { roles: ['engineer'], name: 'Bram' })
  await createSite(db)
})

function refusal(work: Promise<unknown>): Promise<DomainError> {
  return work.then(
    () => {
      throw new Error('was not refused')
    },
    (error: DomainError) => error,
  )
}

async function limitForm(changes: Partial<LimitForm>): Promise<LimitForm> {
  const seen = Math.max(0, ...(await listDatedLimits(db, { kind: 'operating-limit' })).map(({ id }) => id))
  return { seen, segment: '', value: 2e-6, startsAt: MORNING, reason: 'Agreed in the meeting', ...changes }
}

async function holds(at: Date, segmentId: number | null = null): Promise<number | undefined> {
  return (await listLimits(db, at)).find(
    (limit) => limit.kind === 'operating-limit' && limit.segmentId === segmentId,
  )?.value
}

describe('setting a limit', () => {
  beforeEach(async () => {
    await setLimit(db, bram, MORNING, 'operating-limit', await limitForm({}))
  })

  it('lets the old value hold for the past and the new one from its date on', async () => {
    await setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ value: 3e-6, startsAt: TOMORROW }))
    expect(await holds(MORNING)).toBe(2e-6)
    expect(await holds(shift(TOMORROW, -1))).toBe(2e-6)
    expect(await holds(TOMORROW)).toBe(3e-6)
    expect(await holds(shift(MORNING, -1))).toBeUndefined()
  })

  it('gives one segment its own limit and takes it away again', async () => {
    const { id, tag } = await createSegment(db)
    await setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ segment: tag, value: 3e-6 }))
    expect([await holds(TOMORROW, id), await holds(TOMORROW)]).toEqual([3e-6, 2e-6])
    await setLimit(
      db,
      bram,
      MORNING,
      'operating-limit',
      await limitForm({ segment: tag, value: null, startsAt: TOMORROW }),
    )
    expect([await holds(shift(TOMORROW, -1), id), await holds(TOMORROW, id)]).toEqual([3e-6, undefined])
  })

  it('records who set it, the value before and after, and from when', async () => {
    await setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ value: 3e-6, startsAt: TOMORROW }))
    const lines = await db.select().from(record)
    expect(lines).toHaveLength(2)
    expect(lines[1]).toMatchObject({
      personId: bram.personId,
      subjectKind: 'limit',
      subjectId: 'operating-limit',
      effectiveAt: TOMORROW,
      before: { value: 2e-6, unit: 'Pa' },
      after: { value: 3e-6, unit: 'Pa' },
      reason: 'Agreed in the meeting',
    })
  })

  it('refuses the past, the same value, an unknown segment and a stale form', async () => {
    const past = await refusal(
      setLimit(
        db,
        bram,
        MORNING,
        'operating-limit',
        await limitForm({ value: 3e-6, startsAt: shift(MORNING, -7200) }),
      ),
    )
    expect(Object.keys(past.fields)).toEqual(['startsAt'])
    const same = await refusal(
      setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ startsAt: TOMORROW })),
    )
    expect(Object.keys(same.fields)).toEqual(['value'])
    const unknown = await refusal(
      setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ segment: 'SG-99' })),
    )
    expect(Object.keys(unknown.fields)).toEqual(['segment'])
    const stale = await refusal(
      setLimit(db, bram, MORNING, 'operating-limit', await limitForm({ value: 4e-6, seen: 0 })),
    )
    expect(stale).toMatchObject({ code: 'conflict' })
    expect(stale.message).toContain('Bram set 0.000002 Pa for the site')
  })

  it('is an engineer’s alone, whoever else edits the register', async () => {
    for (const role of ['administrator', 'manager', 'safety-officer', 'technician'] as const) {
      const actor = await createUser(db, { roles: [role] })
      const error = await refusal(
        setLimit(db, actor, MORNING, 'operating-limit', await limitForm({ value: 1e-6 })),
      )
      expect(error, role).toMatchObject({ code: 'forbidden' })
    }
    expect(await holds(TOMORROW)).toBe(2e-6)
  })

  it('leaves one value in force when two people set it at once', async () => {
    const forms = await Promise.all([3e-6, 4e-6].map((value) => limitForm({ value, startsAt: TOMORROW })))
    const results = await Promise.allSettled(
      forms.map((form, index) => setLimit(index === 0 ? db : other, bram, MORNING, 'operating-limit', form)),
    )
    expect(results.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
    expect((await listLimits(db, TOMORROW)).filter(({ kind }) => kind === 'operating-limit')).toHaveLength(1)
  })
})

describe('placing a pump', () => {
  let west: { id: number; tag: string }
  let east: { id: number; tag: string }

  beforeEach(async () => {
    west = await createSegment(db)
    east = await createSegment(db)
    await db.insert(pump).values({ tag: 'MC-B', kind: 'turbomolecular-cart', speeds: { N2: 0.45 } })
    await placePump(db, bram, MORNING, 'MC-B', await placementForm({ segment: west.tag }))
  })

  async function placementForm(changes: Partial<PlacementForm>): Promise<PlacementForm> {
    const [row] = await db.select().from(pump).where(eq(pump.tag, 'MC-B'))
    return {
      seen: row?.revision ?? 0,
      segment: '',
      offsetM: 80,
      startsAt: MORNING,
      reason: 'Cart moved',
      ...changes,
    }
  }

  it('ends the former place at the instant of the new one', async () => {
    await placePump(db, bram, MORNING, 'MC-B', await placementForm({ segment: east.tag, startsAt: TOMORROW }))
    expect(await listPlacements(db)).toMatchObject([
      { segment: east.tag, startsAt: TOMORROW, endsAt: null },
      { segment: west.tag, startsAt: MORNING, endsAt: TOMORROW },
    ])
  })

  it('lets it stand idle, once', async () => {
    await placePump(db, bram, MORNING, 'MC-B', await placementForm({ startsAt: TOMORROW }))
    expect(await listPlacements(db)).toMatchObject([{ segment: west.tag, endsAt: TOMORROW }])
    const again = await refusal(
      placePump(db, bram, MORNING, 'MC-B', await placementForm({ startsAt: shift(TOMORROW, 60) })),
    )
    expect(again.fields.segment?.[0]).toContain('stands idle')
  })

  it('refuses a time before a recorded place, a place off the segment and a stale form', async () => {
    const early = await refusal(
      placePump(db, bram, MORNING, 'MC-B', await placementForm({ segment: east.tag, startsAt: MORNING })),
    )
    expect(Object.keys(early.fields)).toEqual(['startsAt'])
    const off = await refusal(
      placePump(
        db,
        bram,
        MORNING,
        'MC-B',
        await placementForm({ segment: east.tag, offsetM: 161, startsAt: TOMORROW }),
      ),
    )
    expect(Object.keys(off.fields)).toEqual(['offsetM'])
    const stale = await refusal(
      placePump(
        db,
        bram,
        MORNING,
        'MC-B',
        await placementForm({ segment: east.tag, startsAt: TOMORROW, seen: 1 }),
      ),
    )
    expect(stale).toMatchObject({ code: 'conflict' })
    expect(stale.message).toContain(`segment from nothing to ${west.tag}`)
  })
})
