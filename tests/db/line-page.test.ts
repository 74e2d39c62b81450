import { beforeEach, expect, test } from 'vitest'
import { pump, pumpPlacement, segmentState } from '#app/db/schema/index.ts'
import type { PumpSpeeds } from '#app/domain/register.ts'
import { readLinePage } from '#app/services/line-page.server.ts'
import { after, MORNING } from '#tests/support/clock.ts'
import { freshDatabase } from '#tests/support/db.ts'
import { createSegment, createSite, createSource, createState, createUser } from '#tests/support/factories.ts'

const db = freshDatabase()
const HOUR = 3600
let segmentId: number

beforeEach(async () => {
  await createSite(db)
  const segment = await createSegment(db, { tag: 'SG-X1', startM: 160, endM: 320 })
  segmentId = segment.id
  await createState(db, { segmentId, setBy: (await createUser(db)).personId, state: 'pumping' })
})

async function placePump(
  tag: string,
  offsetM: number,
  startsAt: Date,
  { endsAt = null, speeds = { H2: 2, H2O: 1, N2: 1 } }: { endsAt?: Date | null; speeds?: PumpSpeeds } = {},
) {
  const kind = tag.startsWith('TC') ? ('turbomolecular-cart' as const) : ('getter-ion' as const)
  const [made] = await db.insert(pump).values({ tag, kind, speeds })
  await db
    .insert(pumpPlacement)
    .values({ pumpId: made.insertId, segmentId, offsetM, startsAt, endsAt, reason: 'for a test' })
}

test('Line shows the pumps at work at its instant, in order along the line', async () => {
  await placePump('TC-2', 150, after(MORNING, -HOUR))
  await placePump('NP-1', 10, after(MORNING, -100 * HOUR))
  await placePump('TC-9', 80, after(MORNING, -50 * HOUR), { endsAt: after(MORNING, -HOUR) })
  const pumpsAt = async (at: Date) => (await readLinePage(db, at)).segments[0]?.pumps
  expect(await pumpsAt(MORNING)).toEqual([
    { tag: 'NP-1', kind: 'getter-ion', chainageM: 170 },
    { tag: 'TC-2', kind: 'turbomolecular-cart', chainageM: 310 },
  ])
  const before = await pumpsAt(after(MORNING, -2 * HOUR))
  expect(before?.map(({ tag }) => tag)).toEqual(['NP-1', 'TC-9'])
})

test('a source that never sent a file is named as such, not as late', async () => {
  await createSource(db, { code: 'NL-X', dueAt: '07:00' })
  const { nightFiles, silentSources } = await readLinePage(db, MORNING)
  expect(nightFiles).toEqual([])
  expect(silentSources).toEqual(['NL-X'])
})

test('a pump whose speeds leave out a gas of the wall has its mark, and the segment no prediction', async () => {
  await placePump('NP-1', 80, after(MORNING, -HOUR))
  const shown = async () => (await readLinePage(db, MORNING)).segments[0]
  await db.update(segmentState).set({ since: after(MORNING, -HOUR) })
  expect((await shown())?.predicted).not.toBeNull()
  // An engineer empties a field of the pump's form: the page must stand.
  await db.update(pump).set({ speeds: { N2: 1 } })
  expect((await shown())?.pumps).toHaveLength(1)
  expect((await shown())?.predicted).toBeNull()
})
