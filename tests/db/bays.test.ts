import { beforeEach, expect, test } from 'vitest'
import { listSafetyEvents } from '#app/db/queries/safety-events.server.ts'
import { equipment } from '#app/db/schema/index.ts'
import { readClosedStretches } from '#app/services/bay-closures.server.ts'
import { readBaysPage, releaseBay, typeOxygen } from '#app/services/bays.server.ts'
import { listRecord } from '#app/services/record.server.ts'
import { typeReading } from '#app/services/typed-readings.server.ts'
import { MORNING, after as secondsAfter } from '#tests/support/clock.ts'
import { freshDatabase, secondConnection } from '#tests/support/db.ts'
import {
  createLine,
  createPosition,
  createSegment,
  createSite,
  createUser,
  PASSWORD,
  type TestUser,
} from '#tests/support/factories.ts'

const db = freshDatabase()
const other = secondConnection()
const at = (minutes: number) => secondsAfter(MORNING, minutes * 60)

let pim: TestUser
let ione: TestUser
let lineId: number
beforeEach(async () => {
  await createSite(db, { timeZone: 'Europe/Vienna' })
  pim = await createUser(db, { roles: ['technician'], name: 'Pim' })
  ione = await createUser(db, { roles: ['safety-officer'], name: 'Ione' })
  lineId = await createLine(db, { code: 'QF' })
  await createSegment(db, { tag: 'SG-13', lineId, startM: 1800, endM: 1950 })
  await createSegment(db, { tag: 'SG-14', lineId, startM: 1950, endM: 2100 })
  await db.insert(equipment).values([
    { tag: 'OX-21', kind: 'oxygen monitor', facts: 'personal', calibrationDue: secondsAfter(MORNING, 8e6) },
    { tag: 'OX-22', kind: 'oxygen monitor', facts: 'personal', calibrationDue: secondsAfter(MORNING, -60) },
  ])
})

function read(percent: number, minutes: number, options: { instrument?: string; handle?: typeof db } = {}) {
  return typeOxygen(options.handle ?? db, pim, at(minutes), {
    intent: 'type-oxygen',
    segment: 'SG-14',
    percent,
    at: at(minutes),
    place: '2 010 m, 0.3 m above the floor',
    instrument: options.instrument ?? 'OX-21',
    tester: '',
  })
}
const open = async (minutes: number) => (await readBaysPage(db, ione, at(minutes))).open
async function release(minutes: number, actor = ione, handle = db) {
  const [bay] = await open(minutes)
  return releaseBay(handle, actor, at(minutes), {
    intent: 'release',
    closureId: bay?.closure.id ?? 0,
    reason: 'Vent line found open, shut and locked; fans proven',
    password: PASSWORD,
  })
}

test('19.2 % at SG-14 closes 1950 to 2100 m, says to leave, and is one event', async () => {
  const said = await read(19.2, 0)
  expect(said).toMatchObject({ closed: true, text: expect.stringContaining('without breathing apparatus') })
  await read(18.9, 2)
  expect(await readClosedStretches(db)).toMatchObject([
    { line: 'QF', fromM: 1950, toM: 2100, closedAt: at(0), closedBy: 'Pim' },
  ])
  expect(await listSafetyEvents(db, {})).toMatchObject([
    { kind: 'low-oxygen', segment: 'SG-14', startedAt: at(0), text: expect.stringContaining('below 19.5 %') },
  ])
  expect(await readClosedStretches(db, { lineId, fromM: 1800, toM: 1950 })).toEqual([])
  expect(await readClosedStretches(db, { lineId, fromM: 2099, toM: 2200 })).toHaveLength(1)
})

test('19.5 and 23.5 % close nothing; 23.6 % does', async () => {
  for (const percent of [19.5, 23.5]) expect((await read(percent, 0)).closed).toBe(false)
  expect((await read(23.6, 1)).closed).toBe(true)
  expect(await listSafetyEvents(db, {})).toMatchObject([{ kind: 'high-oxygen' }])
})

test('only an officer opens it, on 20.0 % or more over ten minutes, and the readings stay with it', async () => {
  await read(19.2, 0)
  await read(20.4, 10)
  await expect(release(10)).rejects.toMatchObject({
    code: 'not-acceptable-now',
    message: expect.stringContaining('0 of 10 minutes'),
  })
  await read(20.6, 20)
  await expect(release(20, pim)).rejects.toMatchObject({ code: 'forbidden' })
  expect(await release(21)).toBe('QF 1950 to 2100 m is open again.')
  const { open: still, released } = await readBaysPage(db, ione, at(22))
  expect(still).toEqual([])
  expect(released).toMatchObject([
    { releasedBy: 'Ione', releasedAt: at(21), releaseReadings: [{ percent: 20.4 }, { percent: 20.6 }] },
  ])
  expect(await listSafetyEvents(db, {})).toEqual([])
  const [line] = await listRecord(db, { subjectKind: 'bay-closure', limit: 1 })
  expect(line).toMatchObject({ act: 'closed stretch released', person: 'Ione', signed: true })
})

test('an instrument that is overdue or unknown closes, and does not open', async () => {
  await read(19.2, 0, { instrument: 'OX-22' })
  expect(await open(0)).toHaveLength(1)
  await read(20.8, 10, { instrument: 'OX-22' })
  const said = await read(20.8, 20, { instrument: 'borrowed' })
  expect(said.text).toContain('does not count for a release: The register knows no instrument “borrowed”.')
  await expect(release(21)).rejects.toMatchObject({
    message: expect.stringContaining('The newest reading does not count'),
  })
})

test('a bad reading that comes in while it is being released wins, whichever is first', async () => {
  await read(19.2, 0)
  await read(20.6, 10)
  await read(20.6, 20)
  await Promise.allSettled([release(21, ione, other), read(18.5, 20.9)])
  // Either the release saw it and was refused, or it came after the release and closed the stretch again.
  expect(await readClosedStretches(db)).toHaveLength(1)
})

test('a bad reading newer than those of the release closes again, though typed after it', async () => {
  await read(19.2, 0)
  await read(20.6, 10)
  await read(20.6, 20)
  await release(22)
  expect((await read(18.5, 21)).closed).toBe(true)
  expect(await readClosedStretches(db)).toMatchObject([{ closedAt: at(21) }])
})

test('a bad reading from before the release, typed afterwards, is kept and closes nothing', async () => {
  await read(19.2, 0)
  await read(20.6, 10)
  await read(20.6, 20)
  await release(21)
  const late = await typeOxygen(db, pim, at(40), {
    intent: 'type-oxygen',
    segment: 'SG-14',
    percent: 18.8,
    at: at(5),
    place: '2 010 m',
    instrument: 'OX-21',
    tester: 'Corwin',
  })
  expect(late).toMatchObject({ closed: false })
  expect(await listRecord(db, { subjectKind: 'oxygen-reading', subjectId: 'SG-14', limit: 1 })).toMatchObject(
    [{ after: { percent: 18.8, tester: 'Corwin' }, effectiveAt: at(5) }],
  )
})

test('a reading typed at a position of the register closes as well', async () => {
  const segment = (await readBaysPage(db, ione, MORNING)).segments.find(({ tag }) => tag === 'SG-14')
  expect(segment).toBeDefined()
  await createPosition(db, { tag: 'OX-7', kind: 'oxygen', quantity: 'oxygen', lineId, chainageM: 2000 })
  const said = await typeReading(db, pim, MORNING, 'SG-14', {
    position: 'OX-7',
    value: '19,1',
    unit: '%',
    at: MORNING,
    instrument: 'OX-21',
    note: '',
  })
  expect(said).toContain('without breathing apparatus')
  expect(await readClosedStretches(db)).toMatchObject([{ fromM: 1950, toM: 2100 }])
})
