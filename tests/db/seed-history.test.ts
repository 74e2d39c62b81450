import { createHash } from 'node:crypto'
import { count, eq, sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { verifyPassword } from '#app/auth/password.ts'
import { closeDb, type Db, getDb, getPool } from '#app/db/client.server.ts'
import {
  attachmentChunk,
  channel,
  importFile,
  person,
  productClock,
  reading,
  roleGrant,
  segmentState,
  source,
} from '#app/db/schema/index.ts'
import { rolesAt } from '#app/domain/roles.ts'
import { readClock } from '#app/services/clock.server.ts'
import { DEMO_SIGN_INS } from '#seeds/demo-sign-ins.ts'
import { nightFile } from '#seeds/readings/night-file.ts'
import { seededDemo } from '../support/demo-database.ts'

/** The demo clock's start. */
const MORNING = new Date('2026-11-09T07:00:00.000Z')
let db: Db

beforeAll(async () => {
  process.env.DATABASE_URL = await seededDemo()
  process.env.SESSION_SECRET ??= 'a secret for tests only, 32 or more'
  db = getDb()
}, 600_000)
afterAll(closeDb)

async function one(query: string): Promise<Record<string, unknown>> {
  const [rows] = await getPool().promise().query(query)
  return (rows as Record<string, unknown>[])[0] ?? {}
}

describe('the demo', () => {
  it('starts its clock on the morning of 9 November', async () => {
    expect((await readClock(db)).demo).toBe(true)
    // Where it began, and not where it stands: since the seeding it has run on.
    const [clock] = await db.select().from(productClock)
    expect(clock?.baseAt).toEqual(MORNING)
  })

  it('lets each offered person sign in with the role offered', async () => {
    for (const offered of DEMO_SIGN_INS) {
      const [found] = await db.select().from(person).where(eq(person.email, offered.email))
      expect(found?.name).toBe(offered.name)
      expect(await verifyPassword(found?.passwordHash ?? '', offered.password)).toBe(true)
      const grants = await db
        .select()
        .from(roleGrant)
        .where(eq(roleGrant.personId, found?.id ?? 0))
      expect(rolesAt(grants, MORNING)).toContain(offered.role)
    }
  })

  it('lets the insulation contractor in until the end of November, and the electrician never', async () => {
    const [tove] = await db.select().from(person).where(eq(person.name, 'Tove Brindlemark'))
    const grants = await db
      .select()
      .from(roleGrant)
      .where(eq(roleGrant.personId, tove?.id ?? 0))
    expect(rolesAt(grants, MORNING)).toEqual(['contributor'])
    // 30 November counts to its midnight on site, an hour ahead of UTC in winter.
    const end = new Date('2026-11-30T23:00:00Z')
    expect(tove?.endsAt).toEqual(end)
    expect(rolesAt(grants, new Date(end.getTime() - 1))).toEqual(['contributor'])
    expect(rolesAt(grants, end)).toEqual([])
    const [wendel] = await db.select().from(person).where(eq(person.name, 'Wendel Quarrie'))
    expect(wendel?.passwordHash).toBeNull()
  })

  it('gives every segment one open state', async () => {
    const open = await db
      .select({ segmentId: segmentState.segmentId, n: count() })
      .from(segmentState)
      .where(sql`${segmentState.endedAt} IS NULL`)
      .groupBy(segmentState.segmentId)
    expect(open).toHaveLength(17)
    expect(open.every(({ n }) => n === 1)).toBe(true)
  })

  it('keeps the original bytes of every file taken in, and has not taken in the west logger’s last', async () => {
    const imports = await db.select().from(importFile)
    expect(imports).toHaveLength(198)
    expect(imports.some(({ fileName }) => fileName === 'NL-W_2026-11-08.csv')).toBe(false)
    const newest = imports.find(({ fileName }) => fileName === 'NL-E_2026-11-08.csv')
    const chunks = await db
      .select()
      .from(attachmentChunk)
      .where(eq(attachmentChunk.attachmentId, newest?.attachmentId ?? 0))
    const bytes = Buffer.concat(chunks.map(({ data }) => data))
    expect(createHash('sha256').update(bytes).digest('hex')).toBe(newest?.sha256)
    expect(newest?.lineCount).toBe(bytes.toString('latin1').trimEnd().split('\n').length)
  })

  it('stores every reading at the line of the file it came from', async () => {
    const [row] = await db
      .select({ line: reading.lineNo, value: reading.value, at: reading.at, file: importFile.fileName })
      .from(reading)
      .innerJoin(importFile, eq(importFile.id, reading.importId))
      .innerJoin(channel, eq(channel.id, reading.channelId))
      .innerJoin(source, eq(source.id, channel.sourceId))
      .where(
        sql`${source.code} = 'NL-E' AND ${channel.name} = 'HC-16B' AND ${reading.at} = '2026-11-09 05:00:00'`,
      )
    expect(row?.file).toBe('NL-E_2026-11-08.csv')
    const lines = nightFile('NL-E', '2026-11-08').bytes.toString('latin1').split('\n')
    expect(lines[(row?.line ?? 0) - 1]).toBe('1794200400000,HC-16B,3.4e-07,Pa,OK')
    expect(row?.value).toBe(3.4e-7)
  })
})

describe('fourteen months of the demo', () => {
  it('has readings of every pressure channel in every month, thinned to an hour before the whole nights', async () => {
    const row = await one(`WITH RECURSIVE month (began) AS (SELECT TIMESTAMP '2025-09-01 00:00:00' UNION ALL
      SELECT began + INTERVAL 1 MONTH FROM month WHERE began < '2026-11-01')
      SELECT MIN(months) AS least, COUNT(*) AS channels FROM (
      SELECT c.id, SUM(EXISTS (SELECT 1 FROM reading r WHERE r.channel_id = c.id
        AND r.at >= month.began AND r.at < month.began + INTERVAL 1 MONTH)) AS months
      FROM channel c JOIN source s ON s.id = c.source_id CROSS JOIN month
      WHERE s.code IN ('NL-W', 'NL-E') GROUP BY c.id) x`)
    expect([Number(row.channels), Number(row.least)]).toEqual([51, 15])
    const quiet = await one(`SELECT COUNT(*) AS n FROM reading r JOIN channel c ON c.id = r.channel_id
      JOIN source s ON s.id = c.source_id WHERE s.code = 'NL-E' AND c.name = 'HC-12B'
      AND r.at > '2026-05-01 04:00' AND r.at <= '2026-05-02 04:00'`)
    expect(Number(quiet.n)).toBe(24)
    // A pass over two million rows: a busy machine takes its time.
  }, 120_000)

  it('counts three completed bakes, two broken off and two under way by its states', async () => {
    const row = await one(`SELECT SUM(state = 'heating') AS heated, SUM(state = 'soak') AS soaked,
      COUNT(DISTINCT CASE WHEN state = 'post-bake-test' THEN segment_id END) AS ended FROM segment_state`)
    expect([Number(row.heated), Number(row.soaked), Number(row.ended)]).toEqual([7, 6, 5])
  })

  it('exchanged six gauges and keeps the old fittings with their ends', async () => {
    const row = await one(
      'SELECT COUNT(*) AS n, COUNT(DISTINCT position_id) AS p FROM fitting WHERE ends_at IS NOT NULL',
    )
    expect([Number(row.n), Number(row.p)]).toEqual([6, 6])
  })

  it('holds 860 entries, every one signed, and not the same words over and over', async () => {
    const row = await one(
      'SELECT COUNT(*) AS n, COUNT(signed_act_id) AS signed, COUNT(DISTINCT text) AS texts FROM log_entry',
    )
    expect([Number(row.n), Number(row.signed)]).toEqual([860, 860])
    expect(Number(row.texts)).toBeGreaterThan(700)
  })

  it('says of no file that rows are missing: each is measured against the time between its own rows', async () => {
    const row = await one(`SELECT COUNT(*) AS files, SUM(JSON_VALUE(read_out, '$.gapTotal')) AS gaps,
      SUM(file_name LIKE 'NL-W%archive%' AND JSON_VALUE(read_out, '$.periodSeconds') = 3600) AS hourly,
      SUM(file_name = 'NL-W_2026-11-07.csv' AND JSON_VALUE(read_out, '$.periodSeconds') = 60) AS minutes
      FROM import_file`)
    expect([Number(row.files), Number(row.gaps), Number(row.hourly), Number(row.minutes)]).toEqual([
      198, 0, 13, 1,
    ])
  })

  it('has ion currents of 27 nights, those of the night without a clock marked and with the answer that was given', async () => {
    const row = await one(`SELECT COUNT(*) AS n, COUNT(DISTINCT r.import_id) AS files,
      SUM(r.marks = 2) AS marked FROM reading r JOIN channel c ON c.id = r.channel_id
      JOIN source s ON s.id = c.source_id WHERE s.code = 'NL-R'`)
    // 27 nights of 144 rows, one of them with the repeated hour's 150, of seven masses.
    expect([Number(row.n), Number(row.files), Number(row.marked)]).toEqual([
      7 * (26 * 144 + 150),
      27,
      7 * 144,
    ])
    const asked = await one(`SELECT JSON_VALUE(read_out, '$.answers[0].id') AS id,
      JSON_VALUE(read_out, '$.answers[0].found') AS found, JSON_VALUE(read_out, '$.answers[0].by') AS who
      FROM import_file WHERE file_name = 'NL-R_2026-11-02.csv'`)
    expect(asked.id).toBe('start')
    expect(asked.found).toContain('2000-01-01')
    expect(asked.who).toMatch(/^(Pim|Odalys|Corwin|Nerys) /)
  })

  it('shows argon at SG-06 growing a hundredfold when the leak opens, and water staying as it was', async () => {
    const mean = async (mass: string, day: string) =>
      Number(
        (
          await one(`SELECT AVG(r.value) AS a FROM reading r JOIN channel c ON c.id = r.channel_id
            WHERE c.name = 'RG-A-${mass}' AND r.quality = 0 AND DATE(r.at) = '${day}'`)
        ).a,
      )
    expect((await mean('40', '2026-11-05')) / (await mean('40', '2026-10-25'))).toBeGreaterThan(100)
    expect((await mean('18', '2026-11-05')) / (await mean('18', '2026-10-25'))).toBeCloseTo(1, 0)
  })

  it('shows argon at the closed SG-13 level all night, while hydrogen rises with its gauges', async () => {
    const mean = async (channel: string, from: string, to: string) =>
      Number(
        (
          await one(`SELECT AVG(r.value) AS a FROM reading r JOIN channel c ON c.id = r.channel_id
            JOIN source s ON s.id = c.source_id WHERE s.code = '${channel === 'HC-13B' ? 'NL-E' : 'REC'}'
            AND c.name = '${channel}' AND MOD(MINUTE(r.at), 10) = 0 AND r.quality = 0 AND r.at > '${from}' AND r.at <= '${to}'`)
        ).a,
      )
    const grown = async (channel: string) =>
      (await mean(channel, '2026-11-09 03:00', '2026-11-09 05:00')) /
      (await mean(channel, '2026-11-08 19:00', '2026-11-08 21:00'))
    expect(await grown('RG-B-40')).toBeCloseTo(1, 1)
    expect((await grown('RG-B-02')) / (await grown('HC-13B'))).toBeCloseTo(1, 1)
  })

  it('says of every typed reading who typed it, when and from what, and keeps it beside its value', async () => {
    const row = await one(`SELECT COUNT(*) AS n, SUM(r.channel_id IS NOT NULL) AS held,
      SUM(t.typed_at >= t.at AND t.instrument_text <> '') AS told, COUNT(DISTINCT c.quantity) AS quantities
      FROM typed_reading t JOIN channel c ON c.id = t.channel_id LEFT JOIN reading r ON
      r.channel_id = t.channel_id AND r.at = t.at AND r.seq = t.seq AND r.line_no = t.id AND r.import_id = 0`)
    const [typed, held, told] = [row.n, row.held, row.told].map(Number)
    expect(held).toBe(typed)
    expect(told).toBe(typed)
    // Pressure, temperature, stroke, oxygen, resistance, voltage, current.
    expect(Number(row.quantities)).toBe(7)
    const loose = await one(`SELECT COUNT(*) AS n FROM reading WHERE import_id = 0`)
    expect(Number(loose.n)).toBe(typed)
  })

  it('has the resistance of SG-10 before and after its bake, both that of a cold tube', async () => {
    const row = await one(`SELECT COUNT(*) AS n, MIN(r.value) AS low, MAX(r.value) AS high FROM reading r
      JOIN channel c ON c.id = r.channel_id WHERE c.name = 'RE-10'`)
    expect(Number(row.n)).toBe(2)
    // 22.8 mΩ at 20 °C by the register.
    expect(Number(row.low)).toBeGreaterThan(0.0222)
    expect(Number(row.high)).toBeLessThan(0.0235)
  })

  it('has no residual gas for the last night and the two temporary seals in the register', async () => {
    expect(
      (await one("SELECT COUNT(*) AS n FROM import_file WHERE file_name = 'NL-R_2026-11-08.csv'")).n,
    ).toBe(0)
    expect(Number((await one("SELECT COUNT(*) AS n FROM equipment WHERE kind = 'temporary seal'")).n)).toBe(2)
  })
})
