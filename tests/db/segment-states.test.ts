import { isNull } from 'drizzle-orm'
import { beforeEach, expect, test } from 'vitest'
import { listSegments, listStates } from '#app/db/queries/segments.server.ts'
import { segmentState } from '#app/db/schema/index.ts'
import type { Role } from '#app/domain/roles.ts'
import { listRecord } from '#app/services/record.server.ts'
import { type StateChange, setSegmentState } from '#app/services/segment-states.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import { createSegment, createState, createUser, type TestUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const HOUR = 3600

let pim: TestUser
let segment: { id: number; tag: string }
beforeEach(async () => {
  pim = await createUser(db, { roles: ['technician'] })
  segment = await createSegment(db)
})

function set(
  change: Partial<StateChange>,
  options: { actor?: TestUser; handle?: typeof db } = {},
): Promise<void> {
  return setSegmentState(options.handle ?? db, options.actor ?? pim, MORNING, {
    tag: segment.tag,
    from: 'unknown',
    state: 'vented',
    since: after(MORNING, -HOUR),
    reason: 'seen on site',
    unusual: false,
    ...change,
  })
}

async function stateAt(at: Date): Promise<string | undefined> {
  return (await listSegments(db, at)).find(({ id }) => id === segment.id)?.state
}

test('a segment nobody has spoken of is unknown; a state holds from since-when on', async () => {
  expect(await stateAt(MORNING)).toBe('unknown')
  await set({})
  expect(await stateAt(after(MORNING, -HOUR - 1))).toBe('unknown')
  expect(await stateAt(after(MORNING, -HOUR))).toBe('vented')
  expect(await listRecord(db, { limit: 5 })).toMatchObject([
    {
      person: pim.name,
      act: 'segment state set',
      subjectId: segment.tag,
      before: { state: 'unknown' },
      after: { state: 'vented' },
      effectiveAt: after(MORNING, -HOUR),
      reason: 'seen on site',
    },
  ])
})

test('the next state ends the one before at the same instant, and the history tells both', async () => {
  await set({ since: after(MORNING, -3 * HOUR) })
  await set({ from: 'vented', state: 'roughing', since: after(MORNING, -HOUR), reason: 'set RP-2 started' })
  expect(await listStates(db, segment.id)).toMatchObject([
    {
      state: 'roughing',
      since: after(MORNING, -HOUR),
      endedAt: null,
      reason: 'set RP-2 started',
      setBy: pim.name,
    },
    { state: 'vented', since: after(MORNING, -3 * HOUR), endedAt: after(MORNING, -HOUR) },
  ])
  expect(await stateAt(after(MORNING, -HOUR - 1))).toBe('vented')
})

test('an unusual change needs to be meant: refused at its tick box, taken with it', async () => {
  await createState(db, { segmentId: segment.id, setBy: pim.personId, state: 'vented' })
  const change = { from: 'vented', state: 'soak' } as const
  await expect(set(change)).rejects.toMatchObject({
    code: 'bad-input',
    fields: { unusual: [expect.stringContaining('"Vented" to "Soak"')] },
  })
  expect(await stateAt(MORNING)).toBe('vented')
  await set({ ...change, unusual: true })
  expect(await stateAt(MORNING)).toBe('soak')
})

test('a hot segment cannot be called "maintenance" in passing, because that hides the heat', async () => {
  await createState(db, { segmentId: segment.id, setBy: pim.personId, state: 'soak' })
  await expect(set({ from: 'soak', state: 'maintenance' })).rejects.toMatchObject({
    fields: { unusual: [expect.any(String)] },
  })
})

test.each([
  ['in the future', { since: after(MORNING, 301) }, 'since'],
  ['before the present one began', { since: after(MORNING, -3 * HOUR) }, 'since'],
  ['exactly when the present one began', { since: after(MORNING, -2 * HOUR) }, 'since'],
  ['that is the present one', { state: 'vented' as const }, 'state'],
])('a state %s is refused at its field', async (_what, change, field) => {
  const since = after(MORNING, -2 * HOUR)
  await createState(db, { segmentId: segment.id, setBy: pim.personId, state: 'vented', since })
  await expect(set({ from: 'vented', state: 'roughing', ...change })).rejects.toMatchObject({
    code: 'bad-input',
    fields: { [field]: [expect.any(String)] },
  })
  expect(await listStates(db, segment.id)).toHaveLength(1)
})

test('a form that was open while somebody else changed the state is refused and says who', async () => {
  const bram = await createUser(db, { roles: ['engineer'] })
  await set({ since: after(MORNING, -2 * HOUR) }, { actor: bram })
  await expect(set({ from: 'unknown', state: 'maintenance' })).rejects.toMatchObject({
    code: 'conflict',
    status: 409,
    message: expect.stringMatching(new RegExp(`now "Vented" \\(set by ${bram.name}\\)`)),
  })
})

test('a segment the register does not have is named', async () => {
  await expect(set({ tag: 'SG-99' })).rejects.toMatchObject({
    code: 'not-found',
    message: 'The register has no segment SG-99.',
  })
})

test.each<Role>(['safety-officer', 'manager', 'administrator', 'contributor'])(
  'a %s does not set states',
  async (role) => {
    const actor = await createUser(db, { roles: [role] })
    await expect(set({}, { actor })).rejects.toMatchObject({ status: 403 })
    expect(await db.select().from(segmentState)).toEqual([])
  },
)

test('of two people who set a state at once one wins, the other is told, and one state is open', async () => {
  const bram = await createUser(db, { roles: ['engineer'] })
  const results = await Promise.allSettled([
    set({ state: 'vented' }),
    set({ state: 'maintenance' }, { actor: bram, handle: other }),
  ])
  const lost = results.flatMap((result) => (result.status === 'rejected' ? [result.reason] : []))
  expect(lost).toHaveLength(1)
  expect(lost[0]).toMatchObject({ code: 'conflict' })
  expect(await db.select().from(segmentState).where(isNull(segmentState.endedAt))).toHaveLength(1)
})
