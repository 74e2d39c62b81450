import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { closeDb, type Db, getDb, getPool } from '#app/db/client.server.ts'
import { person, roleGrant } from '#app/db/schema/index.ts'
import type { Actor } from '#app/domain/actor.ts'
import { rolesAt } from '#app/domain/roles.ts'
import { facilityFigures } from '#app/domain/segment-standing.ts'
import { type Staged, stageUpload } from '#app/services/intake.server.ts'
import { findRoundedCopy } from '#app/services/intake-copy.server.ts'
import { acceptImport } from '#app/services/intake-decisions.server.ts'
import { readStandings } from '#app/services/standing.server.ts'
import { seedDemo } from '#seeds/demo.ts'
import { anyNightFile, LOGGER_CODES } from '#seeds/readings/any-night.ts'
import { demoNights } from '#seeds/readings/calendar.ts'
import type { LoggerFile } from '#seeds/readings/files.ts'
import { handExport } from '#seeds/readings/hand-export.ts'
import { LOST_CLOCK_ANSWER } from '#seeds/readings/logger-files.ts'
import { nightFile } from '#seeds/readings/night-file.ts'
import { recorderFile } from '#seeds/readings/recorder-file.ts'
import { RECORDINGS } from '#seeds/scenario/recordings.ts'
import { demoDatabase } from '../support/demo-database.ts'

let db: Db
/** The demo clock's start. */
const MORNING = new Date('2026-11-09T07:00:00.000Z')
/** Segments at target needed for "available". */
const NEEDED = 14

/** A person of the demo, with the roles of the morning. */
async function someone(name: string): Promise<Actor> {
  const [found] = await db.select().from(person).where(eq(person.name, name))
  const grants = await db
    .select()
    .from(roleGrant)
    .where(eq(roleGrant.personId, found?.id ?? 0))
  return { personId: found?.id ?? 0, name, roles: rolesAt(grants, MORNING) }
}

/** Sends a file through the intake. */
async function stage(file: LoggerFile): Promise<Staged> {
  async function* stream() {
    yield file.bytes
  }
  return await stageUpload(db, await someone('Pim Larkspur'), MORNING, {
    sourceCode: file.source,
    fileName: file.fileName,
    stream: stream(),
    statedBytes: file.bytes.length,
    limitBytes: 2 ** 26,
  })
}

/** Rows of a query in plain SQL. */
async function rowsOf(query: string): Promise<Record<string, unknown>[]> {
  const [rows] = await getPool().promise().query(query)
  return rows as Record<string, unknown>[]
}

/** The first look of the morning, counted by plain SQL from states, gauges and their last three hours. */
async function countedBySql(): Promise<Record<string, number>> {
  const [row] = await rowsOf(`WITH gauge AS (
      SELECT s.tag AS segment, p.kind, RIGHT(p.tag, 1) AS letter,
        (SELECT r.value FROM reading r JOIN channel_map m ON m.channel_id = r.channel_id
          WHERE m.position_id = p.id AND m.ends_at IS NULL AND r.quality = 0
          AND r.at > '2026-11-09 04:00' AND r.at <= '2026-11-09 07:00' ORDER BY r.at DESC LIMIT 1) AS pa
      FROM segment s JOIN segment_state t ON t.segment_id = s.id AND t.ended_at IS NULL
      JOIN position p ON p.segment_id = s.id AND p.kind IN ('hot-cathode', 'cold-cathode')
      WHERE t.state = 'in-service'),
    stand AS (
      SELECT segment, SUM(kind = 'hot-cathode' AND pa IS NOT NULL) AS fresh,
        MAX(CASE WHEN kind = 'hot-cathode' THEN pa END) AS worst,
        MAX(CASE WHEN letter = 'A' THEN pa END) AS west_end, MAX(CASE WHEN letter = 'B' THEN pa END) AS middle
      FROM gauge GROUP BY segment)
    SELECT COUNT(*) AS inService, SUM(fresh = 2 AND worst <= 2e-7) AS atTarget,
      SUM(fresh > 0 AND worst > 2e-7 AND worst <= 2e-6) AS aboveTarget, SUM(fresh = 0) AS unknown,
      SUM(fresh = 2 AND west_end < middle) AS questioned FROM stand`)
  return Object.fromEntries(Object.entries(row ?? {}).map(([name, value]) => [name, Number(value)]))
}

async function figures() {
  const standings = await readStandings(db, MORNING)
  return facilityFigures(
    standings.map(({ segment, standing }) => ({
      tag: segment.tag,
      main: segment.lineCode === 'MAIN',
      state: segment.state,
      standing,
    })),
    NEEDED,
  )
}

/** A checksum of every table's content, to see whether anything changed. */
async function checksums(): Promise<Record<string, string>> {
  const [tables] = await getPool()
    .promise()
    .query(
      "SELECT TABLE_NAME AS name FROM information_schema.TABLES WHERE TABLE_SCHEMA = DATABASE() AND TABLE_TYPE = 'BASE TABLE'",
    )
  const names = (tables as { name: string }[]).map(({ name }) => name)
  const [rows] = await getPool().promise().query('CHECKSUM TABLE ??', [names])
  return Object.fromEntries(
    (rows as { Table: string; Checksum: unknown }[]).map((row) => [row.Table, String(row.Checksum)]),
  )
}

/** Takes the west logger's last night in, as somebody does on the morning. */
async function acceptLastWestFile(): Promise<void> {
  const { importId } = await stage(nightFile('NL-W', '2026-11-08'))
  await acceptImport(db, await someone('Pim Larkspur'), MORNING, importId)
}

beforeAll(async () => {
  process.env.DATABASE_URL = await demoDatabase('ebbline_seed')
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  process.env.LOG_LEVEL ??= 'silent'
  db = getDb()
}, 600_000)
afterAll(closeDb)

describe('the demo, filled in again', () => {
  it('changes nothing', async () => {
    const before = await checksums()
    expect(Object.keys(before).length).toBeGreaterThan(40)
    expect(await seedDemo(db, getPool())).toEqual({ seeded: false })
    expect(await checksums()).toEqual(before)
  }, 120_000)
})

describe('the night files that lie ready', () => {
  it('are known by their bytes where they were taken in before, whatever their quirk', async () => {
    const nights = demoNights().slice(-3)
    const files = [
      ...nights.flatMap((night) => LOGGER_CODES.map((code) => anyNightFile(code, night))),
      anyNightFile('NL-R', LOST_CLOCK_ANSWER.night),
      ...RECORDINGS.map(recorderFile),
    ].filter((file) => file !== null)
    // Three nights of five loggers, less the analyser's last; its night without a clock; four recordings.
    expect(files).toHaveLength(14 + 1 + 4)
    for (const file of files.filter(({ fileName }) => fileName !== 'NL-W_2026-11-08.csv')) {
      await expect(stage(file), file.fileName).rejects.toMatchObject({ code: 'conflict' })
    }
  }, 120_000)

  it('refuses the copy saved by hand, and says of which stored readings it is a rounded copy', async () => {
    const { importId, state } = await stage(handExport())
    expect(state).toBe('refused')
    expect(await findRoundedCopy(db, importId)).toMatchObject({ kind: 'rounded-copy' })
  })

  it('reads the west’s last without a question', async () => {
    const { state, again } = await stage(nightFile('NL-W', '2026-11-08'))
    expect([state, again]).toEqual(['read', false])
  })
})

describe('the morning of the demo', () => {
  it('shows SG-11 at 2.4e-5 Pa after 66 hours of high vacuum', async () => {
    const [sg11] = await readStandings(db, MORNING, 'SG-11')
    expect(sg11?.segment.state).toBe('pumping')
    expect((MORNING.getTime() - (sg11?.segment.since?.getTime() ?? 0)) / 3_600_000).toBe(66)
    expect(sg11?.standing.headline?.tag).toBe('HC-11B')
    expect(sg11?.standing.headline?.value).toBe(2.4e-5)
    expect(sg11?.standing.headline?.fresh).toBe(true)
  })

  it('knows nothing of the west before its last file is in, and the counts of the morning after', async () => {
    const before = await figures()
    expect(before.unknown).toEqual(['SG-01', 'SG-02', 'SG-03', 'SG-04', 'SG-07', 'SG-15'])
    const standings = await readStandings(db, MORNING)
    const west = standings.filter(({ segment }) => segment.sortOrder <= 8)
    expect(west).toHaveLength(8)
    expect(west.every(({ standing }) => standing.freshGauges.fresh === 0)).toBe(true)
    expect(await countedBySql()).toEqual({
      inService: 9,
      atTarget: 2,
      aboveTarget: 1,
      unknown: 6,
      questioned: 0,
    })

    await acceptLastWestFile()
    // Gas flows toward the pump: an end that reads below its cross is the question, in plain SQL too.
    expect(await countedBySql()).toEqual({
      inService: 9,
      atTarget: 7,
      aboveTarget: 1,
      unknown: 1,
      questioned: 3,
    })
    const after = await figures()
    expect(after.inService).toEqual([
      'SG-01',
      'SG-02',
      'SG-03',
      'SG-04',
      'SG-07',
      'SG-09',
      'SG-10',
      'SG-15',
      'SG-16',
    ])
    expect(after.atTarget).toEqual(['SG-01', 'SG-02', 'SG-03', 'SG-04', 'SG-07', 'SG-09', 'SG-10'])
    expect(after.aboveTarget).toEqual(['SG-16'])
    expect(after.unknown).toEqual(['SG-15'])
    expect(after.questioned).toEqual(['SG-03', 'SG-04', 'SG-07'])
    expect(after.overLimit).toEqual([])
    expect(after.available).toBe(false)

    const [sg01] = await readStandings(db, MORNING, 'SG-01')
    expect(sg01?.standing.headline?.tag).toBe('HC-01B')
    expect(sg01?.standing.headline?.value).toBeCloseTo(5.1e-8, 20)
  })

  it('has each segment in the state of the story, by plain SQL', async () => {
    const rows =
      await rowsOf(`SELECT t.state, GROUP_CONCAT(s.tag ORDER BY s.sort_order) AS tags FROM segment s
      JOIN segment_state t ON t.segment_id = s.id AND t.ended_at IS NULL GROUP BY t.state ORDER BY t.state`)
    expect(Object.fromEntries(rows.map(({ state, tags }) => [state, tags]))).toEqual({
      'bake-prep': 'SG-12',
      cooling: 'SG-08',
      'in-service': 'SG-01,SG-02,SG-03,SG-04,SG-07,SG-09,SG-10,SG-15,SG-16',
      'isolated-test': 'SG-13',
      'leak-hunt': 'SG-06',
      pumping: 'SG-11',
      roughing: 'SP-1',
      soak: 'SG-05',
      vented: 'SG-14',
    })
  })

  // Hot cathode at the west end, at the cross, cold cathode at the east end, Pa. With the west's last file in.
  it.each([
    ['01', '6.3e-8', '5.1e-8', '6.0e-8'],
    ['02', '6.1e-8', '4.9e-8', '6.2e-8'],
    ['03', '6.0e-8', '6.1e-8', '6.0e-8'],
    ['04', '4.9e-8', '5.2e-8', '6.4e-8'],
    ['05', '2.4e-4', '2.1e-4', null],
    ['06', '1.9e-7', '1.7e-7', '3.1e-7'],
    ['07', '1.8e-8', '4.7e-8', '5.5e-8'],
    ['08', '3.9e-7', '3.3e-7', null],
    ['09', '5.6e-8', '4.2e-8', '5.9e-8'],
    ['10', '5.9e-8', '4.0e-8', '5.6e-8'],
    ['11', '3.4e-5', '2.4e-5', '3.5e-5'],
    ['12', '2.6e-7', '2.0e-7', '2.7e-7'],
    ['13', '7.1e-5', '7.2e-5', '7.0e-5'],
    ['14', null, null, null],
    ['15', null, null, null],
    ['16', '4.1e-7', '3.4e-7', '4.3e-7'],
    ['S1', null, null, null],
  ])(
    'shows the gauges of segment %s as the story has them, by plain SQL',
    async (short, west, cross, east) => {
      const rows = await rowsOf(`SELECT p.tag, (SELECT r.value FROM reading r JOIN channel_map m
        ON m.channel_id = r.channel_id WHERE m.position_id = p.id AND m.ends_at IS NULL AND r.quality IN (0, 9)
        AND r.at > '2026-11-09 04:00' AND r.at <= '2026-11-09 07:00' ORDER BY r.at DESC LIMIT 1) AS pa
      FROM position p WHERE p.tag IN ('HC-${short}A', 'HC-${short}B', 'CC-${short}') ORDER BY p.tag`)
      const shown = Object.fromEntries(
        rows.map(({ tag, pa }) => [tag, pa === null ? null : Number(Number(pa).toPrecision(2))]),
      )
      const number = (text: string | null) => (text === null ? null : Number(text))
      expect(shown).toEqual({
        [`HC-${short}A`]: number(west),
        [`HC-${short}B`]: number(cross),
        [`CC-${short}`]: number(east),
      })
    },
  )
})
